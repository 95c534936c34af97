"""Textbook formulas beside the edge planes: equal wherever the formula is exact."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING, Any

import pytest
from spine_course import FFS, HFP, HFS, beam, junction, machine, pair, spine

from featherlog.junction.design import Side, Technique
from featherlog.junction.hand_check import (
    COLLIMATOR_EXACT,
    COLLIMATOR_RULE,
    COUCH_EXACT,
    COUCH_RULE,
    GAP_RULE,
    HALF_BEAM_RULE,
    JAW_RULE,
    OVERLAP_RULE,
    HandCheck,
    hand_checks,
)
from featherlog.junction.solve import solve
from featherlog.sequence.planning import plan_course

if TYPE_CHECKING:
    from collections.abc import Collection

    from featherlog.geometry.patient import PatientPosition
    from featherlog.junction.design import Course

EXACT = {JAW_RULE, GAP_RULE, OVERLAP_RULE, COLLIMATOR_EXACT, COUCH_EXACT}


def checks(of: Course, formulas: Collection[str] = EXACT) -> list[HandCheck]:
    found = hand_checks(of, solve(of, machine()))
    return [check for check in found if check.formula in formulas]


def deep_spine(position: PatientPosition = HFS, **more: object) -> Course:
    """Give the spine with SSDs that fit: 100 to the back, whose fields have isocentres on it."""
    of = spine(position, **more)
    fields = [
        replace(each, beams=tuple(replace(one, ssd_cm=100.0) for one in each.beams))
        for each in of.fields
    ]
    return replace(of, fields=tuple(fields))


@pytest.mark.parametrize("position", [HFS, HFP, FFS])
@pytest.mark.parametrize("upper_follows", [None, "J1", "J2"])
def test_exact_formulas_give_what_the_edge_planes_give(
    position: PatientPosition, upper_follows: str | None
) -> None:
    found = checks(deep_spine(position, upper_follows=upper_follows))
    # At three positions: three spine edges, one gap, two angles of two laterals.
    assert len(found) == 3 * (3 + 1 + 2 * 2)
    for check in found:
        assert check.by_formula == pytest.approx(check.exact, abs=1e-6), check


@pytest.mark.parametrize("follows", [None, "J"])
@pytest.mark.parametrize("slope_deg", [0.0, 15.0])
def test_the_jaw_rule_holds_on_a_sloping_back(follows: str | None, slope_deg: float) -> None:
    of = pair(
        [beam("u", 180, (0, 0, 12), ssd_cm=100.0)],
        [beam("l", 180, (0, 0, -15), ssd_cm=100.0)],
        junction("J", (0, 0, 0), 5.0, skin_slope_deg=slope_deg),
        follows=follows,
        offsets_cm=(0.0, -2.0),
    )
    found = checks(of, {JAW_RULE})
    assert len(found) == 4
    for check in found:
        assert check.by_formula == pytest.approx(check.exact, abs=1e-6), check


def test_a_beam_that_leaves_by_the_entrance_skin_is_checked_through_the_patient() -> None:
    of = pair(
        [beam("front", 0, (0, -8, 12), ssd_cm=92.0), beam("back", 180, (0, -8, 12), ssd_cm=92.0)],
        [beam("l", 180, (0, -8, -12), ssd_cm=92.0)],
        junction("J", (0, 0, 0), 5.0, thickness_cm=16.0),
    )
    front = next(check for check in checks(of) if check.subject.startswith("front"))
    assert front.numbers == "12.000 × 100.0 / (92.00 + 11.00)"
    assert front.by_formula == pytest.approx(front.exact, abs=1e-6)


def khan_pairs() -> Course:
    """Give opposed pairs of 30 and 15 cm at SSD 100, matched at 10 cm, the cord 15 cm deep."""
    upper, lower = (
        [
            beam(f"{name} AP", 0, (0, -10, z), ssd_cm=100.0),
            beam(f"{name} PA", 180, (0, 10, z), ssd_cm=100.0),
        ]
        for name, z in (("upper", 16.5), ("lower", -8.25))
    )
    between = junction(
        "J", (0, -10, 0), 10.0, entrance=Side.ANTERIOR, thickness_cm=20.0, critical_depth_cm=15.0
    )
    return pair(upper, lower, between)


def test_the_textbook_gap_and_overlap_of_opposed_pairs() -> None:
    by_formula = {check.formula: check for check in checks(khan_pairs())}
    gap, overlap = by_formula[GAP_RULE], by_formula[OVERLAP_RULE]
    assert gap.numbers == "10.000 × (15.000 / 100.0 + 7.500 / 100.0)"
    assert (gap.by_formula, gap.exact) == pytest.approx((2.25, 2.25))
    assert overlap.numbers == "(15.000 / 100.0 − 7.500 / 100.0) × 5.000"
    assert (overlap.by_formula, overlap.exact) == pytest.approx((0.375, 0.375), abs=1e-5)


def test_textbook_angles_of_laterals_are_near_and_said_to_be_so() -> None:
    found = checks(deep_spine(offsets_cm=(0.0,)), {COLLIMATOR_RULE, COUCH_RULE})
    assert [check.numbers for check in found[:2]] == [
        "atan(13.333 / 100.0)",
        "atan(8.556 / 100.0)",
    ]
    for check in found:
        assert "≈" in check.formula
        assert check.by_formula == pytest.approx(check.exact, abs=0.25)
        assert check.by_formula != pytest.approx(check.exact, abs=1e-3)


def test_oblique_beams_have_the_textbook_angles_alone_and_they_are_degrees_off() -> None:
    of = pair(
        [beam("oblique", 130, (0, -8, 9), ssd_cm=92.0)],
        [beam("l", 180, (0, 0, -14), ssd_cm=100.0)],
        junction("J", (0, 0, 0), 5.0, turned_field="UPPER"),
    )
    assert checks(of, {COLLIMATOR_EXACT, COUCH_EXACT}) == []
    (couch,) = checks(of, {COUCH_RULE})
    assert abs(couch.by_formula - couch.exact) > 2.0


@pytest.mark.parametrize("turned", ["UPPER", "LOWER"])
def test_the_jaws_of_the_textbook_angles_are_those_that_face_the_junction(turned: str) -> None:
    # Both have passed their axis, so the isocentres stand the other way round.
    up = 1 if turned == "UPPER" else -1
    laterals = [beam("lateral", 90, (0, -8, -up * 2.0), ssd_cm=92.0)]
    spine_beam = [beam("spine", 180, (0, 0, up * 3.0), ssd_cm=100.0)]
    of = pair(
        *(laterals, spine_beam)[::up],
        junction("J", (0, 0, 0), 5.0, turned_field=turned),
    )
    exact = checks(of, {COLLIMATOR_EXACT, COUCH_EXACT})
    assert len(exact) == 2
    for check in exact:
        assert check.by_formula == pytest.approx(check.exact, abs=1e-6)
    for check in checks(of, {COLLIMATOR_RULE, COUCH_RULE}):
        assert check.by_formula == pytest.approx(check.exact, abs=0.25)


def test_no_formula_is_said_to_be_exact_for_a_collimator_that_stands_askew() -> None:
    spine_beam = [beam("spine", 180, (3, 0, -14), collimator_deg=8.0, ssd_cm=100.0)]
    lateral = [beam("lateral", 90, (0, -8, 9), ssd_cm=92.0)]
    between = junction("J", (0, 0, 0), 5.0, turned_field="UPPER")
    assert checks(pair(lateral, spine_beam, between)) == []


def test_the_gap_rule_takes_the_beams_that_enter_the_entrance_skin() -> None:
    fields = (
        [
            beam(f"{name} front", 0, (0, -8, z), ssd_cm=92.0),
            beam(f"{name} back", 180, (0, -8, z), ssd_cm=92.0),
        ]
        for name, z in (("u", 12), ("l", -15))
    )
    (gap,) = checks(pair(*fields, junction("J", (0, 0, 0), 5.0, thickness_cm=16.0)), {GAP_RULE})
    assert gap.subject == "gap on the posterior skin at J"
    assert gap.by_formula == pytest.approx(gap.exact, abs=1e-6)


@pytest.mark.parametrize("gantry", [0.0, 150.0])
def test_the_gap_rule_is_not_offered_where_no_beam_enters_squarely(gantry: float) -> None:
    fields = ([beam(name, gantry, (0, -8, z), ssd_cm=92.0)] for name, z in (("u", 12), ("l", -15)))
    between = junction(
        "J", (0, 0, 0), 5.0, thickness_cm=16.0, technique=Technique.HALF_BEAM, critical_depth_cm=8.0
    )
    assert checks(pair(*fields, between), {GAP_RULE, OVERLAP_RULE}) == []


def half_beams(
    *gantries: float, depth_cm: float = 4.0, offset_cm: float = 2.0, **more: Any
) -> Course:
    """Give half beams of one isocentre 4 cm deep, moved; the first is the upper field's."""
    upper, *lower = (beam(f"g{at:g}", at, (0, -4, 0), ssd_cm=96.0) for at in gantries)
    half = junction("J", (0, 0, 0), depth_cm, technique=Technique.HALF_BEAM, **more)
    return pair([upper], lower, half, offsets_cm=(0.0, offset_cm))


def test_opposed_half_beams_part_by_the_offset_times_their_distances_past_the_isocentre() -> None:
    first, moved = checks(half_beams(0, 180, lateral_limits_cm=(0, 0)), {HALF_BEAM_RULE})
    assert (first.by_formula, first.exact) == (0.0, 0.0)
    # On the posterior skin: 4 cm past the isocentre from the front, 4 cm short of it from behind.
    assert moved.subject == "g0 and g180 at entrance skin (x 0.0, y 0.0)"
    assert moved.numbers == "2.000 / 100.0 × (4.000 − (−4.000))"
    assert (moved.by_formula, moved.exact) == pytest.approx((0.16, 0.16))


@pytest.mark.parametrize("gantries", [(350, 305, 125), (10, 235, 55), (180, 0)])
@pytest.mark.parametrize("offset_cm", [0.5, -0.5])
@pytest.mark.parametrize("depth_cm", [4.0, 9.0])
def test_half_beams_of_different_gantry_by_hand_to_first_order(
    gantries: tuple[float, ...], offset_cm: float, depth_cm: float
) -> None:
    # With the match point off the isocentre the rest is of second order: a tenth at 10 cm.
    of = half_beams(*gantries, depth_cm=depth_cm, offset_cm=offset_cm, thickness_cm=18.0)
    _, moved = checks(of, {HALF_BEAM_RULE})
    assert abs(moved.exact) > 0.02
    assert moved.by_formula == pytest.approx(moved.exact, rel=0.1)


def test_half_beams_without_a_formula_of_their_own() -> None:
    one_gantry = half_beams(180, 180, lateral_limits_cm=(0, 0))
    planned = half_beams(0, 180, separation_cm=0.2)
    upper, lower = half_beams(0, 180).fields
    two_isocentres = replace(
        half_beams(0, 180),
        fields=(upper, replace(lower, beams=(beam("g180", 180, (0, -4, -1)),))),
    )
    for of in (one_gantry, planned, two_isocentres):
        assert checks(of, {HALF_BEAM_RULE}) == []


def test_ssd_skin_and_isocentre_that_disagree_are_warned_of_once() -> None:
    of = deep_spine()
    _, upper, _ = of.fields
    wrong = replace(upper, beams=(replace(upper.beams[0], ssd_cm=98.0),))
    said = plan_course(replace(of, fields=(of.fields[0], wrong, of.fields[2])), machine()).warnings
    about = [sentence for sentence in said if "disagree" in sentence]
    assert about == [
        (
            "upper, jaw Y2 toward J1: SSD and match depth give 13.59 cm by hand, the isocentre "
            "gives 13.33 cm; SSD, skin point and isocentre disagree"
        ),
        (
            "upper, jaw Y1 toward J2: SSD and match depth give 15.38 cm by hand, the isocentre "
            "gives 15.09 cm; SSD, skin point and isocentre disagree"
        ),
    ]
    assert not any("disagree" in sentence for sentence in plan_course(of, machine()).warnings)
