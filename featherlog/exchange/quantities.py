"""The quantities that several parts of a file hold, each with what it may be."""

from __future__ import annotations

from featherlog.exchange.kinds import number

COORDINATE_CM = number("cm", -200, 200)
DEPTH_CM = number("cm", 0, 60)
JAW_CM = number("cm", -30, 30)
SAD_CM = number("cm", 50, 200)
FRACTION_DOSE_GY = number("Gy", 0, 30, low_open=True)
COURSE_DOSE_GY = number("Gy", 0, 200, low_open=True)
