"""Rounding to what a machine can set, against every other choice, edges by the tests' own rays."""

from __future__ import annotations

from itertools import product
from math import floor
from typing import TYPE_CHECKING

import pytest
from hypothesis import given
from hypothesis import strategies as st
from rays import Setting, edge_z
from spine_course import beam, junction, machine, pair

from featherlog.junction.design import Technique
from featherlog.junction.machine import Steps
from featherlog.junction.solve import solve

if TYPE_CHECKING:
    from featherlog.junction.design import Beam
    from featherlog.junction.machine import Jaw
    from featherlog.junction.plan import BeamSetting, JunctionSetting, Mismatch, PositionSettings

lateral = st.floats(-10, 10)
aims = st.lists(
    st.tuples(st.sampled_from([0.0, 180.0, 90.0, 250.0]), lateral, st.floats(-12, 2)),
    min_size=1,
    max_size=2,
)
steps = st.builds(
    Steps, jaw_cm=st.sampled_from([0.05, 0.1, 0.25]), table_cm=st.just(0.1), angle_deg=st.just(1.0)
)
# Whole table steps, so that rounding the table adds nothing to rounding the jaws.
offset = st.integers(-30, 30).map(lambda steps: steps / 10)
courses = st.tuples(aims, aims, offset, st.booleans())
Aims = list[tuple[float, float, float]]


def beams(name: str, z_cm: float, of: Aims) -> list[Beam]:
    return [
        beam(f"{name}{n}", gantry, (0, y, z_cm), collimator_deg=turn)
        for n, (gantry, turn, y) in enumerate(of)
    ]


def rounded(of: tuple[Aims, Aims, float, bool], by: Steps) -> PositionSettings:
    upper, lower, move, couch = of
    course = pair(
        beams("u", 13.03, upper),
        beams("l", -12.41, lower),
        junction("J", (0, 0, 0), 5.0, critical_depth_cm=8.0, technique=Technique.HALF_BEAM),
        follows="J" if couch else None,
        offsets_cm=(0.0, move),
    )
    return solve(course, machine(steps=by))[1]


def is_multiple(value: float, step: float) -> bool:
    return value / step == pytest.approx(round(value / step), abs=1e-6)


@given(courses, steps)
def test_every_jaw_and_table_move_can_be_set(of: tuple[Aims, Aims, float, bool], by: Steps) -> None:
    for each in rounded(of, by).fields:
        assert all(is_multiple(move, by.table_cm) for move in each.table_from_a_cm)
        for one in each.beams:
            for jaw in (one.superior_jaw, one.inferior_jaw):
                assert is_multiple(one.jaw_cm[jaw], by.jaw_cm)


@given(courses, steps)
def test_no_other_way_of_rounding_the_inferior_field_changes_the_mismatch_less(
    of: tuple[Aims, Aims, float, bool], by: Steps
) -> None:
    settings = rounded(of, by)
    found = settings.junction("J")
    upper, lower = (each.beams for each in settings.fields)
    choices = product(*(around(one.exact_jaw_cm[one.superior_jaw], by.jaw_cm) for one in lower))
    least = min(worst_change(upper, lower, jaws, found) for jaws in choices)
    set_to = tuple(one.jaw_cm[one.superior_jaw] for one in lower)
    assert worst_change(upper, lower, set_to, found) == pytest.approx(least, abs=1e-9)
    assert abs(found.rounding_cm) == pytest.approx(least, abs=1e-9)


@given(courses, steps)
def test_rounding_moves_no_neighbours_edge_by_more_than_half_a_step(
    of: tuple[Aims, Aims, float, bool], by: Steps
) -> None:
    position_b = rounded(of, by)
    place = next(p for p in position_b.junction("J").mismatches if p.place == "match depth")
    for one in position_b.fields[0].beams:
        jaw = one.inferior_jaw
        half = abs(moved(one, jaw, one.exact_jaw_cm[jaw] + by.jaw_cm / 2, place))
        assert abs(moved(one, jaw, one.jaw_cm[jaw], place)) <= half + 1e-9


@given(st.floats(8, 20), st.floats(8, 20), st.floats(-12, 2), offset, steps)
def test_rounding_changes_the_match_of_two_beams_by_no_more_than_half_a_step(
    upper: float, lower: float, y_cm: float, offset_cm: float, by: Steps
) -> None:
    course = pair(
        [beam("u", 180, (0, y_cm, upper))],
        [beam("l", 180, (0, y_cm, -lower))],
        junction("J", (0, 0, 0), 5.0, critical_depth_cm=8.0),
        offsets_cm=(0.0, offset_cm),
    )
    found = solve(course, machine(steps=by))[1].junction("J")
    # A jaw's step is seen from the source at the match point, 5 cm below the back.
    half = by.jaw_cm / 2 * (100 + y_cm + 5) / 100
    at_match = [place for place in found.mismatches if place.place == "match depth"]
    assert all(abs(place.rounded_cm) <= half + 1e-9 for place in at_match)


def around(jaw_cm: float, step: float) -> list[float]:
    """Give the four settable positions nearest to a jaw."""
    below = floor(jaw_cm / step)
    return [(below + steps) * step for steps in (-1, 0, 1, 2)]


def worst_change(
    upper: tuple[BeamSetting, ...],
    lower: tuple[BeamSetting, ...],
    jaws_cm: tuple[float, ...],
    found: JunctionSetting,
) -> float:
    return max(
        abs(
            moved(above, above.inferior_jaw, above.jaw_cm[above.inferior_jaw], place)
            - moved(below, below.superior_jaw, jaw_cm, place)
        )
        for place in found.mismatches
        for above in upper
        for below, jaw_cm in zip(lower, jaws_cm, strict=True)
    )


def moved(one: BeamSetting, jaw: Jaw, jaw_cm: float, place: Mismatch) -> float:
    """Give how far an edge stands from where the exact jaw would put it at a place."""
    angles = (one.gantry_deg, one.collimator_deg, one.couch_deg)
    traced = Setting("HFS", *angles, one.isocentre_cm)
    at = (place.x_cm, place.y_cm)
    return edge_z(traced, jaw, jaw_cm, *at) - edge_z(traced, jaw, one.exact_jaw_cm[jaw], *at)
