"""Laws of what is said beside the settings: hand formulas and what being off changes."""

from __future__ import annotations

from typing import TYPE_CHECKING

import pytest
from hypothesis import given
from hypothesis import strategies as st
from spine_course import HFP, HFS, beam, course, field, junction, machine, pair, reach

from featherlog.junction.design import EarlierCourse, Technique
from featherlog.junction.hand_check import (
    COLLIMATOR_EXACT,
    COUCH_EXACT,
    HALF_BEAM_RULE,
    hand_checks,
)
from featherlog.junction.machine import Jaw
from featherlog.junction.solve import solve

if TYPE_CHECKING:
    from featherlog.geometry.patient import PatientPosition
    from featherlog.junction.plan import BeamSetting

gantry = st.floats(0, 359)
WITHIN_CM = 1e-9


@given(gantry, gantry, st.floats(-4, 4), st.floats(2, 12))
def test_half_beams_matched_at_their_isocentre_leave_what_the_formula_says(
    upper: float, lower: float, offset_cm: float, depth_cm: float
) -> None:
    isocentre = (0.0, -depth_cm, 0.0)
    half = junction("J", (0, 0, 0), depth_cm, technique=Technique.HALF_BEAM, thickness_cm=15.0)
    of = pair(
        [beam("u", upper, isocentre)],
        [beam("l", lower, isocentre)],
        half,
        offsets_cm=(0.0, offset_cm),
    )
    found = [c for c in hand_checks(of, solve(of, machine())) if c.formula == HALF_BEAM_RULE]
    assert len(found) == (2 if round(upper, 6) != round(lower, 6) else 0)
    for check in found:
        assert check.by_formula == pytest.approx(check.exact, abs=WITHIN_CM)


@given(st.sampled_from([HFS, HFP]), st.sampled_from([90, 270]), st.floats(5, 12), st.floats(8, 18))
def test_laterals_against_a_sagittal_neighbour_have_both_angles_by_the_exact_formulas(
    position: PatientPosition, lateral: float, above_cm: float, below_cm: float
) -> None:
    straight = 180 if position is HFS else 0
    of = pair(
        [beam("lateral", lateral, (0, -8, above_cm))],
        [beam("l", straight, (0, 0, -below_cm))],
        junction("J", (0, 0, 0), 5.0, turned_field="UPPER"),
        position=position,
    )
    found = hand_checks(of, solve(of, machine()))
    exact = [check for check in found if check.formula in (COLLIMATOR_EXACT, COUCH_EXACT)]
    assert len(exact) == 2
    for check in exact:
        assert check.by_formula == pytest.approx(check.exact, abs=1e-6)


@given(gantry, gantry, st.floats(-0.5, 0.5), st.tuples(st.floats(-1, 1), st.floats(-1, 1)))
def test_no_jaws_within_tolerance_change_the_mismatch_by_more_than_is_said(
    upper: float, lower: float, separation_cm: float, off: tuple[float, float]
) -> None:
    on = machine()
    half = junction(
        "J",
        (0, 0, 0),
        5.0,
        technique=Technique.HALF_BEAM,
        thickness_cm=15.0,
        separation_cm=separation_cm,
    )
    of = pair([beam("u", upper, (0, -5, 6))], [beam("l", lower, (0, -5, -6))], half)
    (settings,) = solve(of, on)
    (above,), (below,) = (each.beams for each in settings.fields)
    found = settings.junction("J")
    assert found.if_jaws_off is not None
    for place in found.mismatches:
        changes = [
            part * on.tolerances.jaw_cm * per_jaw_cm(one, (place.x_cm, place.y_cm))
            for part, one in zip(off, (above, below), strict=True)
        ]
        assert abs(changes[0] - changes[1]) <= found.if_jaws_off.worst_cm + WITHIN_CM


def per_jaw_cm(one: BeamSetting, at: tuple[float, float]) -> float:
    """Return how far an edge of a straight beam moves at a point for a cm of its jaw."""
    # Both edges of a straight beam run through the source: they part evenly with distance.
    wide = one.superior_edge.z_at(*at) - one.inferior_edge.z_at(*at)
    return wide / (one.jaw_cm[Jaw.Y2] - one.jaw_cm[Jaw.Y1])


@given(st.floats(4, 10), st.floats(-3, 3), st.lists(gantry, min_size=1, max_size=3))
def test_a_new_edge_meets_the_mean_of_old_edges_whatever_the_design_put_there(
    reach_cm: float, away_cm: float, gantries: list[float]
) -> None:
    given_before = EarlierCourse("2029", dose_gy=30.0, fractions=15, junction_reach_cm=reach_cm)
    old = [beam(f"old {n}", at, (0, -1, 7 + away_cm)) for n, at in enumerate(gantries)]
    of = course(
        HFS,
        (
            field("OLD", *old, earlier=given_before),
            field("NEW", beam("new", 180, (0, -3, -11))),
        ),
        (junction("J", (0, 0, 0), 5.0, technique=Technique.HALF_BEAM),),
        (reach(12.0), reach(12.0)),
    )
    (settings,) = solve(of, machine())
    x, y, z = settings.junction("J").match_point_cm
    edges = [each.inferior_edge.z_at(x, y) for each in settings.fields[0].beams]
    assert z == pytest.approx(sum(edges) / len(edges), abs=WITHIN_CM)
    (new,) = settings.fields[1].beams
    assert new.superior_edge.z_at(x, y) == pytest.approx(z, abs=1e-5)
