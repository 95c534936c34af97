from __future__ import annotations

import numpy as np
import pytest
from small_plans import half_beam_plan, machine, quality

from featherlog.dose.course_sum import AxisLine
from featherlog.dose.worst_fraction import figures_by_fraction, figures_by_position
from featherlog.geometry.patient import PatientPosition
from featherlog.sequence.progress import DeliveredBeam

Z_CM = np.arange(-250, 151) / 50


def line(width_cm: float) -> AxisLine:
    return AxisLine(0.0, -5.0, PatientPosition.HFS, machine(quality(width_cm)))


def test_every_position_has_its_own_extremes() -> None:
    by_position = figures_by_position(Z_CM, line(0.6), half_beam_plan("AABC", gap_cm=-0.1))
    # An overlap of 1 mm with an 80-20 width of 6 mm.
    assert [f.maximum_percent for f in by_position.values()] == pytest.approx([111.2] * 3, abs=0.05)
    places = {label: figures.maximum_z_cm for label, figures in by_position.items()}
    assert places == pytest.approx({"A": 0.0, "B": -1.0, "C": -2.0}, abs=1e-3)


@pytest.mark.parametrize(("width_cm", "percent"), [(0.5, 191), (0.7, 177), (1.0, 160)])
@pytest.mark.parametrize("behind", ["UPPER", "LOWER"])
def test_a_fraction_with_one_field_left_behind_by_a_step(
    width_cm: float, percent: float, behind: str
) -> None:
    deliveries = [
        DeliveredBeam(2, "field", name, "A" if name == behind else "B", 100.0, 100.0)
        for name in ("UPPER", "LOWER")
    ]
    deliveries += [
        DeliveredBeam(1, "field", name, "A", 100.0, 100.0) for name in ("UPPER", "LOWER")
    ]
    good, bad = figures_by_fraction(Z_CM, line(width_cm), half_beam_plan("AB"), deliveries).values()
    assert (good.maximum_percent, good.minimum_percent) == pytest.approx((100, 100))
    extreme = bad.maximum_percent if behind == "LOWER" else 200 - bad.minimum_percent
    assert extreme == pytest.approx(percent, abs=0.5)
