"""What whole angle steps and held angles leave at a rotated junction (derived).

The figures are for laterals over a posterior spine field, the junction moved by the jaws.
"""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

import pytest
from spine_course import machine, spine

from featherlog.junction.design import Angles
from featherlog.junction.machine import Steps
from featherlog.junction.solve import solve

if TYPE_CHECKING:
    from featherlog.junction.plan import BeamSetting, PositionSettings

DEEP_CM, SHALLOW_CM = -15.0, 5.0
"""10 cm past the match point and 10 cm before it."""


def solved(angles: Angles) -> tuple[PositionSettings, ...]:
    return solve(spine(angles=angles), machine())


def residual_mm(settings: PositionSettings, side: int, x_cm: float, y_cm: float) -> float:
    """Return the mismatch of one lateral and the spine field at a point, + gap."""
    lateral, upper = settings.fields[0].beams[side], settings.fields[1].beams[0]
    return 10 * (lateral.inferior_edge.z_at(x_cm, y_cm) - upper.superior_edge.z_at(x_cm, y_cm))


def angles_of(one: BeamSetting) -> tuple[float, float]:
    return one.exact_collimator_deg, one.exact_couch_deg


def test_recomputed_angles_change_by_about_half_a_degree_for_each_cm() -> None:
    first, second, third = (
        angles_of(each.fields[0].beams[1]) for each in solved(Angles.RECOMPUTED)
    )
    for before, after in ((first, second), (second, third)):
        assert before[0] - after[0] == pytest.approx(0.55, abs=0.02)
        assert before[1] - after[1] == pytest.approx(0.59, abs=0.005)


def test_held_angles_are_those_of_position_a_at_every_position() -> None:
    settings = solved(Angles.HELD)
    for each in settings[1:]:
        for one, first in zip(each.fields[0].beams, settings[0].fields[0].beams, strict=True):
            assert angles_of(one) == angles_of(first)
            assert (one.collimator_deg, one.couch_deg) == (first.collimator_deg, first.couch_deg)


@pytest.mark.parametrize(
    ("x_cm", "y_cm", "left_mm", "right_mm"),
    [
        (0.0, -5.0, 0.0, 0.0),
        # 1 mm at 10 cm to a side, with opposite sign for the two laterals.
        (10.0, -5.0, 1.0, -1.0),
        (-10.0, -5.0, -1.0, 1.0),
        # 1 mm at 10 cm in depth.
        (0.0, DEEP_CM, 0.94, 0.94),
        (0.0, SHALLOW_CM, -0.94, -0.94),
        # They add up at the corners.
        (10.0, DEEP_CM, 1.94, -0.06),
        (-10.0, DEEP_CM, -0.06, 1.94),
        (10.0, SHALLOW_CM, 0.06, -1.94),
        (-10.0, SHALLOW_CM, -1.94, 0.06),
    ],
)
def test_held_angles_leave_about_two_mm_at_the_corners(
    x_cm: float, y_cm: float, left_mm: float, right_mm: float
) -> None:
    moved = solved(Angles.HELD)[1]
    found = [residual_mm(moved, side, x_cm, y_cm) for side in (0, 1)]
    assert found == pytest.approx([left_mm, right_mm], abs=0.01)


def test_whole_degrees_leave_about_0_7_mm() -> None:
    course = spine(offsets_cm=(0.0,))
    first, second = course.junctions
    wide = replace(course, junctions=(replace(first, lateral_limits_cm=(-5, 5)), second))
    (settings,) = solve(wide, machine(steps=Steps(0.1, 0.1, 1.0)))
    for lateral, side in zip(settings.fields[0].beams, (-1, 1), strict=True):
        assert (lateral.collimator_deg, lateral.couch_deg) == (side * 8.0, side * -5.0)
    found = settings.junction("J1")
    assert max(abs(place.rounded_cm) for place in found.mismatches) == pytest.approx(
        0.07, abs=0.003
    )
    assert found.rounding_cm == pytest.approx(0.07, abs=0.003)


def test_held_angles_are_held_as_rounded() -> None:
    on = machine(steps=Steps(0.1, 0.1, 1.0))
    settings = solve(spine(angles=Angles.HELD), on)
    for each in settings:
        for lateral, side in zip(each.fields[0].beams, (-1, 1), strict=True):
            assert (lateral.collimator_deg, lateral.couch_deg) == (side * 8.0, side * -5.0)


def test_signed_angles_go_to_the_nearest_step() -> None:
    settings = solve(spine(offsets_cm=(0.0,)), machine(steps=Steps(0.1, 0.1, 5.0)))[0]
    # 7.62 and 4.93 degrees.
    left, right = settings.fields[0].beams
    assert (left.collimator_deg, left.couch_deg) == (-10.0, 5.0)
    assert (right.collimator_deg, right.couch_deg) == (10.0, -5.0)
