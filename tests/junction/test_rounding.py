from math import asin, atan, cos, degrees, radians

import pytest
from spine_course import beam, junction, machine, pair, spine

from featherlog.junction.design import Angles
from featherlog.junction.machine import Jaw, Steps
from featherlog.junction.rounding import to_step
from featherlog.junction.solve import solve


@pytest.mark.parametrize(
    ("value", "step", "expected"),
    [
        (0.25, 0.1, 0.3),
        (-0.25, 0.1, -0.3),
        (0.15, 0.1, 0.2),  # 0.15 / 0.1 is a little less than 1.5 in binary
        (0.24, 0.1, 0.2),
        (-0.24, 0.1, -0.2),
        (12.3810, 0.05, 12.4),
        (7.5, 1.0, 8.0),
        (-7.5, 1.0, -8.0),
    ],
)
def test_halves_go_away_from_zero(value: float, step: float, expected: float) -> None:
    assert to_step(value, step) == expected


def test_no_value_rounds_to_minus_zero() -> None:
    assert str(to_step(-0.01, 0.1)) == "0.0"


def test_what_is_set_goes_to_the_nearest_step_at_the_borders() -> None:
    _, settings = solve(spine(offsets_cm=(0.0, -1.0)), machine(steps=Steps(0.1, 0.1, 1.0)))
    laterals, _, lower = settings.fields
    # With whole angles 10.7 up to the border at 20 for the laterals; 11.3208 down to -56.
    for lateral in laterals.beams:
        assert lateral.jaw_cm[Jaw.Y2] == pytest.approx(10.7)
    assert lower.beams[0].jaw_cm[Jaw.Y1] == pytest.approx(-11.3)


def test_a_table_move_is_rounded_first_and_the_jaws_make_up_for_it() -> None:
    course = spine(offsets_cm=(0.0, -1.3), lower_follows="J2")
    _, settings = solve(course, machine(steps=Steps(1e-6, 0.5, 1.0)))
    lower = settings.fields[2]
    assert lower.table_from_a_cm == (0, 1.5, 0)
    # 0.2 cm too far toward the feet, seen 106 cm from the source.
    assert lower.beams[0].jaw_cm[Jaw.Y2] == pytest.approx(13.2075 + 0.2 / 1.06, abs=0.0001)
    at_depth = [p for p in settings.junction("J2").mismatches if p.place == "match depth"]
    assert [place.rounded_cm for place in at_depth] == pytest.approx([0, 0, 0], abs=1e-5)


@pytest.mark.parametrize(
    ("upper", "lower", "set_to"),
    [
        (12.0, 13.25, 13.2),
        # The superior field's jaw goes half a step past the match, away from zero.
        (13.25, 13.2, 13.1),
    ],
)
def test_a_tie_goes_to_the_gap(upper: float, lower: float, set_to: float) -> None:
    course = pair(
        [beam("u", 180, (0, -5, upper))],
        [beam("l", 180, (0, -5, -lower))],
        junction("J", (0, 0, 0), 5.0),
    )
    (settings,) = solve(course, machine(steps=Steps(0.1, 0.1, 1.0)))
    assert settings.fields[1].beams[0].jaw_cm[Jaw.Y2] == set_to
    assert settings.junction("J").rounding_cm == pytest.approx(0.05, abs=0.003)


@pytest.mark.parametrize("angles", Angles)
def test_the_angles_against_the_neighbour_as_set_stand_beside_the_exact_ones(
    angles: Angles,
) -> None:
    of = spine(offsets_cm=(0.0,), angles=angles)
    (settings,) = solve(of, machine(steps=Steps(0.1, 0.1, 1.0)))
    laterals, upper, _ = settings.fields
    assert upper.beams[0].jaw_cm[Jaw.Y2] == 13.3
    # The laterals' sources, 8 cm in front of the back, lie in the edge as set.
    edge_z = -14 + 13.3 * (100 + 8) / 100
    couch = degrees(asin((9 - edge_z) / 100))
    collimator = degrees(atan(13.3 / 100 / cos(radians(couch))))
    left, right = laterals.beams
    for lateral, sign in ((left, 1), (right, -1)):
        assert lateral.couch_beside_set_deg == pytest.approx(sign * couch)
        assert lateral.collimator_beside_set_deg == pytest.approx(-sign * collimator)
        assert abs(lateral.couch_beside_set_deg or 0.0) == pytest.approx(4.95, abs=0.01)
        assert abs(lateral.exact_couch_deg) == pytest.approx(4.9335, abs=1e-4)
    assert upper.beams[0].couch_beside_set_deg is None


def test_held_angles_against_the_neighbour_as_set_are_those_of_the_first_position() -> None:
    of = spine(offsets_cm=(0.0, -1.0), angles=Angles.HELD)
    first, second = solve(of, machine(steps=Steps(0.1, 0.1, 1.0)))
    for before, now in zip(first.fields[0].beams, second.fields[0].beams, strict=True):
        assert now.couch_beside_set_deg == before.couch_beside_set_deg
        assert now.collimator_beside_set_deg == before.collimator_beside_set_deg
