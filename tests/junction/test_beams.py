"""Beams away from the midline, from any side, from other distances, with either jaw pair."""

from __future__ import annotations

from typing import TYPE_CHECKING

import pytest
from rays import Setting, edge_z
from spine_course import beam, junction, machine, pair

from featherlog.errors import RefusedError
from featherlog.junction.design import Side, Technique
from featherlog.junction.machine import Jaw
from featherlog.junction.solve import solve

if TYPE_CHECKING:
    from featherlog.junction.design import Course
    from featherlog.junction.plan import BeamSetting

WITHIN_CM = 1e-9


def edge_of(one: BeamSetting, jaw: Jaw, at: tuple[float, float]) -> float:
    angles = (one.gantry_deg, one.exact_collimator_deg, one.exact_couch_deg)
    traced = Setting("HFS", *angles, one.isocentre_cm, one.sad_cm)
    return edge_z(traced, jaw, one.exact_jaw_cm[jaw], *at)


@pytest.mark.parametrize("sads", [(100.0, 100.0), (80.0, 100.0), (100.0, 130.0)])
@pytest.mark.parametrize("collimator", [0.0, 90.0, -90.0, 12.0])
def test_oblique_beams_off_the_midline_meet_at_the_match_point(
    sads: tuple[float, float], collimator: float
) -> None:
    of = pair(
        [beam("u", 150, (3, -2, 11), collimator_deg=collimator, sad_cm=sads[0])],
        [beam("l", 205, (-4, 1, -13), sad_cm=sads[1])],
        junction("J", (2, 0, 0), 5.0, technique=Technique.HALF_BEAM),
        offsets_cm=(0.0, -1.2),
    )
    (upper,), (lower,) = (each.beams for each in solve(of, machine())[1].fields)
    assert edge_of(upper, upper.inferior_jaw, (2, -5)) == pytest.approx(-1.2, abs=WITHIN_CM)
    assert edge_of(lower, lower.superior_jaw, (2, -5)) == pytest.approx(-1.2, abs=WITHIN_CM)
    expected = {0.0: Jaw.Y1, 12.0: Jaw.Y1, 90.0: Jaw.X1, -90.0: Jaw.X2}[collimator]
    assert upper.inferior_jaw == expected


@pytest.mark.parametrize("sad", [80.0, 100.0, 130.0])
def test_the_gap_counts_each_beam_with_its_own_distance(sad: float) -> None:
    of = pair(
        [beam("u", 180, (0, 0, 12), sad_cm=sad)],
        [beam("l", 180, (0, 0, -15))],
        junction("J", (0, 0, 0), 5.0),
    )
    (gap,) = solve(of, machine())[0].junction("J").skin_gaps
    # gap = d·(j1/SAD1 + j2/SAD2), with j = z·SAD/(SAD + d) for isocentres on the skin.
    assert gap.exact_cm == pytest.approx(5 * (12 / (sad + 5) + 15 / 105))


@pytest.mark.parametrize("collimator", [0.0, 90.0, -90.0])
def test_a_turned_beam_may_form_its_edge_with_either_jaw_pair(collimator: float) -> None:
    laterals = [beam(f"at {g}", g, (0, -8, 9), collimator_deg=collimator) for g in (90.0, 270.0)]
    of = pair(
        laterals,
        [beam("l", 180, (0, 0, -14))],
        junction("J", (0, 0, 0), 5.0, turned_field="UPPER"),
    )
    settings = solve(of, machine())[0]
    for one, side in zip(settings.fields[0].beams, (-1, 1), strict=True):
        # The known answer of collimator 0, on either pair.
        assert one.exact_collimator_deg - collimator == pytest.approx(side * 7.6226, abs=0.0005)
        assert one.exact_couch_deg == pytest.approx(side * -4.9335, abs=0.0005)
        assert abs(one.exact_jaw_cm[one.inferior_jaw]) == pytest.approx(8.5557, abs=0.0005)
    for place in settings.junction("J").mismatches:
        assert place.exact_cm == pytest.approx(0.0, abs=WITHIN_CM)


def over_opposed(matched: str | None) -> Course:
    laterals = [beam(f"at {g}", g, (0, -8, 9)) for g in (90.0, 270.0)]
    opposed = [beam("front", 0, (0, -8, -14)), beam("back", 180, (0, -8, -14))]
    between = junction(
        "J", (0, -16, 0), 8.0, entrance=Side.ANTERIOR, turned_field="UPPER", matched_beam=matched
    )
    return pair(laterals, opposed, between)


@pytest.mark.parametrize("matched", ["front", "back", None])
def test_laterals_over_opposed_fields_match_the_beam_that_is_named(matched: str | None) -> None:
    settings = solve(over_opposed(matched), machine())[0]
    laterals, opposed = (each.beams for each in settings.fields)
    by_name = {one.beam: one for one in opposed}
    wanted = by_name.pop(matched or "front")
    (other,) = by_name.values()
    for lateral in laterals:
        for at in ((6.0, -3.0), (-6.0, -14.0)):
            edge = edge_of(lateral, lateral.inferior_jaw, at)
            assert edge == pytest.approx(edge_of(wanted, wanted.superior_jaw, at), abs=WITHIN_CM)
            # The opposed beam's edge leans the other way, so off the match depth it is apart.
            assert abs(edge - edge_of(other, other.superior_jaw, at)) > 1.0


def test_front_and_back_turn_the_collimator_opposite_ways() -> None:
    front, back = (
        solve(over_opposed(name), machine())[0].fields[0].beams[0] for name in ("front", "back")
    )
    assert front.exact_collimator_deg == pytest.approx(-back.exact_collimator_deg)
    assert front.exact_couch_deg == pytest.approx(back.exact_couch_deg)


def tangents(nodal_jaw_cm: float) -> Course:
    """Give a nodal field above two tangents; its inferior jaw stands that far from its axis."""
    nodal = [beam("nodal", 350.0, (6, -2, nodal_jaw_cm))]
    breast = [beam("medial", 310.0, (8, -4, -9)), beam("lateral", 130.0, (8, -4, -9))]
    between = junction("J", (7, -8, 0), 4.0, entrance=Side.ANTERIOR, turned_field="LOWER")
    return pair(nodal, breast, between, offsets_cm=(0.0, -1.0))


@pytest.mark.parametrize("nodal_jaw_cm", [0.0, 7.0])
def test_tangents_below_a_half_beam_or_a_divergent_nodal_field(nodal_jaw_cm: float) -> None:
    for settings in solve(tangents(nodal_jaw_cm), machine()):
        for place in settings.junction("J").mismatches:
            assert place.exact_cm == pytest.approx(0.0, abs=WITHIN_CM)
        medial, lateral = settings.fields[1].beams
        # Each has its own couch angle, to opposite sides.
        assert medial.exact_couch_deg * lateral.exact_couch_deg < 0


def test_a_turned_beam_that_finds_no_couch_angle_is_named() -> None:
    of = pair(
        [beam("steep", 2.0, (0, -8, 9))],
        [beam("l", 180, (0, 0, -14))],
        junction("J", (0, 0, 0), 5.0, turned_field="UPPER"),
    )
    with pytest.raises(RefusedError, match="position A: beam steep: no couch angle puts its"):
        solve(of, machine())


def test_a_couch_that_cannot_turn_so_far_is_refused_by_angle_and_range() -> None:
    of = pair(
        [beam("lateral", 90.0, (0, -8, 9))],
        [beam("l", 180, (0, 0, -14))],
        junction("J", (0, 0, 0), 5.0, turned_field="UPPER"),
    )
    message = (
        r"beam lateral: the couch would have to turn to \+4\.9 or \+175\.1 degrees, outside "
        r"-3\.0 to \+3\.0"
    )
    with pytest.raises(RefusedError, match=message):
        solve(of, machine(couch_deg=(-3, 3)))
