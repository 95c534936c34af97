from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

import pytest

from featherlog.paper.dose_panels import Area, divide

if TYPE_CHECKING:
    from featherlog.paper.plot import Axes
    from featherlog.views.dose import JunctionDose

AREA = Area(left=30.0, bottom=20.0, width=400.0, height=100.0)


def gray_per_point(axes: Axes) -> float:
    low, high = axes.dose_range_gy
    return (high - low) / axes.height


def test_a_dose_far_below_has_a_part_of_its_own_at_the_same_scale(
    junction_dose: JunctionDose,
) -> None:
    lower, upper = divide(junction_dose.lines[1], 36.0, AREA)
    assert [curve.name for curve in lower.curves] == ["delivered"]
    assert len(upper.curves) == 3
    assert gray_per_point(lower.axes) == pytest.approx(gray_per_point(upper.axes))
    assert lower.axes.bottom == AREA.bottom
    assert lower.axes.bottom + lower.axes.height < upper.axes.bottom
    assert upper.axes.bottom + upper.axes.height == pytest.approx(AREA.bottom + AREA.height)


def test_a_finished_course_is_one_picture(junction_dose: JunctionDose) -> None:
    line = junction_dose.lines[1]
    done = tuple(replace(curve, dose_gy=line.curves[0].dose_gy) for curve in line.curves)
    (panel,) = divide(replace(line, curves=done), 36.0, AREA)
    assert len(panel.curves) == 4


def test_every_part_holds_its_curves_and_the_levels(junction_dose: JunctionDose) -> None:
    for line in junction_dose.lines:
        panels = divide(line, 36.0, AREA)
        for panel in panels:
            low, high = panel.axes.dose_range_gy
            doses = [dose for curve in panel.curves for dose in curve.dose_gy]
            assert low < min(doses)
            assert max(doses) < high
        assert panels[-1].axes.dose_range_gy[1] > 36.0 * 1.07


def test_before_the_first_fraction_there_is_nothing_to_draw_below(
    junction_dose: JunctionDose,
) -> None:
    line = junction_dose.lines[1]
    curves = tuple(
        replace(curve, dose_gy=() if curve.name == "delivered" else curve.dose_gy)
        for curve in line.curves
    )
    (panel,) = divide(replace(line, curves=curves), 36.0, AREA)
    assert [curve.name for curve in panel.curves] == ["planned", "predicted", "unfeathered"]


def test_a_dose_of_zero_so_far_still_has_a_part_with_height(junction_dose: JunctionDose) -> None:
    line = junction_dose.lines[1]
    zero = tuple(
        replace(curve, dose_gy=(0.0,) * len(line.z_cm)) if curve.name == "delivered" else curve
        for curve in line.curves
    )
    lower, _ = divide(replace(line, curves=zero), 36.0, AREA)
    assert lower.axes.dose_range_gy[0] == 0.0
    assert lower.axes.height > 15.0
