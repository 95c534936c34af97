"""Laws that matched fields keep, whatever the numbers."""

from __future__ import annotations

from dataclasses import dataclass, replace
from math import cos, radians, sin
from typing import TYPE_CHECKING

import pytest
from hypothesis import given
from hypothesis import strategies as st
from spine_course import FFS, HFP, HFS, beam, junction, machine, pair

from featherlog.junction.design import Technique
from featherlog.junction.machine import Jaw
from featherlog.junction.solve import solve

if TYPE_CHECKING:
    from featherlog.geometry.patient import PatientPosition
    from featherlog.junction.design import Course
    from featherlog.junction.plan import PositionSettings

SAD = 100.0
WITHIN_CM = 1e-9
OTHER_SIDE = {Jaw.X1: Jaw.X2, Jaw.X2: Jaw.X1, Jaw.Y1: Jaw.Y2, Jaw.Y2: Jaw.Y1}
offset = st.floats(-4, 4)
depth = st.floats(1, 12)
height = st.floats(-12, 6)
far = st.floats(6, 20)
angle = st.floats(-14, 14)
gantry = st.floats(0, 359)


@dataclass(frozen=True)
class Posterior:
    """A posterior beam by how far its isocentre lies from the junction, and at what height."""

    far_cm: float
    y_cm: float


posterior = st.builds(Posterior, far, height)


def posterior_pair(upper: Posterior, lower: Posterior, depth_cm: float, **more: object) -> Course:
    return pair(
        [beam("u", 180, (0, upper.y_cm, upper.far_cm))],
        [beam("l", 180, (0, lower.y_cm, -lower.far_cm))],
        junction("J", (0, 0, 0), depth_cm, critical_depth_cm=depth_cm + 3),
        **more,
    )


def solved(of: Course) -> list[PositionSettings]:
    return list(solve(of, machine()))


def skin_gap(settings: PositionSettings) -> float:
    return settings.junction("J").skin_gaps[0].exact_cm


@given(posterior, posterior, depth, offset)
def test_edges_part_in_proportion_to_the_distance_from_the_match_depth(
    upper: Posterior, lower: Posterior, match_cm: float, move: float
) -> None:
    settings = solved(posterior_pair(upper, lower, match_cm, offsets_cm=(0.0, move)))[1]
    (above,), (below,) = (each.beams for each in settings.fields)
    toward = below.exact_jaw_cm[Jaw.Y2] - above.exact_jaw_cm[Jaw.Y1]
    depths = {"entrance skin": 0.0, "match depth": match_cm, "cord": match_cm + 3}
    for found in settings.junction("J").mismatches:
        expected = -toward / SAD * (depths[found.place] - match_cm)
        assert found.exact_cm == pytest.approx(expected, abs=WITHIN_CM)


@given(st.floats(6, 20), st.floats(6, 20), height, depth, offset)
def test_moved_by_jaws_at_equal_distance_the_skin_gap_stays(
    upper: float, lower: float, y: float, match_cm: float, move: float
) -> None:
    fields = Posterior(upper, y), Posterior(lower, y)
    still, moved = solved(posterior_pair(*fields, match_cm, offsets_cm=(0.0, move)))
    assert skin_gap(moved) == pytest.approx(skin_gap(still), abs=WITHIN_CM)


@given(posterior, posterior, depth, offset)
def test_moved_by_the_couch_over_flat_skin_nothing_at_the_junction_changes(
    upper: Posterior, lower: Posterior, match_cm: float, move: float
) -> None:
    of = posterior_pair(upper, lower, match_cm, offsets_cm=(0.0, move), follows="J")
    still, moved = solved(of)
    for before, after in zip(still.fields, moved.fields, strict=True):
        for jaw, jaw_cm in before.beams[0].exact_jaw_cm.items():
            assert after.beams[0].exact_jaw_cm[jaw] == pytest.approx(jaw_cm, abs=WITHIN_CM)
    assert skin_gap(moved) == pytest.approx(skin_gap(still), abs=WITHIN_CM)


@given(posterior, posterior, depth)
def test_a_skin_gap_gives_the_match_depth_that_gives_the_gap(
    upper: Posterior, lower: Posterior, match_cm: float
) -> None:
    gap = skin_gap(solved(posterior_pair(upper, lower, match_cm))[0])
    of = replace(
        posterior_pair(upper, lower, match_cm),
        junctions=(junction("J", (0, 0, 0), None, skin_gap_cm=gap, thickness_cm=20.0),),
    )
    (settings,) = solved(of)
    assert settings.junction("J").match_depth_cm == pytest.approx(match_cm, abs=1e-7)
    assert skin_gap(settings) == pytest.approx(gap, abs=1e-7)


@dataclass(frozen=True)
class Aim:
    """Angles (degrees) and isocentre height of a beam whose ends face the junction axis."""

    gantry_deg: float
    collimator_deg: float
    couch_deg: float
    y_cm: float


aim = st.builds(Aim, gantry, angle, angle, height)


def aimed(upper: Aim, lower: Aim, position: PatientPosition, move: float, x: float) -> Course:
    """Give two fields whose isocentres and match point lie at lateral ``x``."""
    sides = ((upper, 12.0), (lower, -12.0))
    first, second = (
        beam(
            "b",
            a.gantry_deg,
            (x, a.y_cm, z),
            collimator_deg=a.collimator_deg,
            couch_deg=a.couch_deg,
        )
        for a, z in sides
    )
    limits = (x - 3, x + 3)
    # A technique that asks for no gap on the skin, for the beams may enter anywhere.
    between = junction("J", (x, 0, 0), 5.0, lateral_limits_cm=limits, technique=Technique.HALF_BEAM)
    return pair([first], [second], between, position=position, offsets_cm=(0.0, move))


def junction_jaws(of: Course) -> list[tuple[Jaw, float]]:
    upper, lower = (each.beams[0] for each in solved(of)[1].fields)
    return [
        (upper.inferior_jaw, upper.exact_jaw_cm[upper.inferior_jaw]),
        (lower.superior_jaw, lower.exact_jaw_cm[lower.superior_jaw]),
    ]


def mismatch_over_x(of: Course) -> dict[tuple[str, float], float]:
    places = solved(of)[1].junction("J").mismatches
    return {(place.place, round(place.x_cm, 9)): place.exact_cm for place in places}


@given(aim, aim, offset, st.floats(-4, 4))
def test_a_mirrored_design_has_mirrored_settings(
    upper: Aim, lower: Aim, move: float, x: float
) -> None:
    here = aimed(upper, lower, HFS, move, x)
    there = aimed(*(mirrored(a) for a in (upper, lower)), HFS, move, -x)
    jaws = junction_jaws(here)
    assert [jaw for jaw, _ in junction_jaws(there)] == [jaw for jaw, _ in jaws]
    cms = [jaw_cm for _, jaw_cm in jaws]
    assert [jaw_cm for _, jaw_cm in junction_jaws(there)] == pytest.approx(cms, abs=WITHIN_CM)
    flipped = mismatch_over_x(there)
    for (place, at_x), gap in mismatch_over_x(here).items():
        assert flipped[place, -at_x + 0.0] == pytest.approx(gap, abs=WITHIN_CM)


def mirrored(of: Aim) -> Aim:
    return Aim(-of.gantry_deg % 360, -of.collimator_deg, -of.couch_deg, of.y_cm)


@given(aim, aim, offset)
def test_prone_the_same_beams_come_from_the_opposite_gantry_and_couch(
    upper: Aim, lower: Aim, move: float
) -> None:
    turned = [
        replace(a, gantry_deg=(a.gantry_deg + 180) % 360, couch_deg=-a.couch_deg)
        for a in (upper, lower)
    ]
    supine, prone = aimed(upper, lower, HFS, move, 0), aimed(*turned, HFP, move, 0)
    for (jaw, jaw_cm), (other, other_cm) in zip(
        junction_jaws(supine), junction_jaws(prone), strict=True
    ):
        assert (other, other_cm) == (jaw, pytest.approx(jaw_cm, abs=WITHIN_CM))


@given(aim, aim, offset)
def test_feet_first_the_same_edges_belong_to_the_opposite_jaws(
    upper: Aim, lower: Aim, move: float
) -> None:
    turned = [replace(a, gantry_deg=-a.gantry_deg % 360) for a in (upper, lower)]
    head_first, feet_first = aimed(upper, lower, HFS, move, 0), aimed(*turned, FFS, move, 0)
    for (jaw, jaw_cm), (other, other_cm) in zip(
        junction_jaws(head_first), junction_jaws(feet_first), strict=True
    ):
        assert (other, other_cm) == (OTHER_SIDE[jaw], pytest.approx(-jaw_cm, abs=WITHIN_CM))


def half_beams(upper_gantry: float, lower_gantry: float, move: float) -> PositionSettings:
    """Give two fields on one isocentre 7 cm deep, matched there on the axis, then moved."""
    isocentre = (0.0, -7.0, 0.0)
    between = junction("J", (0, 0, 0), 7.0, technique=Technique.HALF_BEAM, thickness_cm=20.0)
    of = pair(
        [beam("u", upper_gantry, isocentre)],
        [beam("l", lower_gantry, isocentre)],
        between,
        offsets_cm=(0.0, move),
    )
    return solved(of)[1]


@given(gantry, offset)
def test_half_beams_from_one_gantry_angle_match_everywhere(angle: float, move: float) -> None:
    for place in half_beams(angle, angle, move).junction("J").mismatches:
        assert place.exact_cm == pytest.approx(0, abs=WITHIN_CM)


@given(gantry, gantry, offset)
def test_half_beams_from_two_gantry_angles_part_away_from_the_axis(
    upper: float, lower: float, move: float
) -> None:
    for place in half_beams(upper, lower, move).junction("J").mismatches:
        past_upper, past_lower = (
            (place.y_cm + 7) * cos(radians(g)) - place.x_cm * sin(radians(g))
            for g in (upper, lower)
        )
        expected = move / SAD * (past_upper - past_lower)
        assert place.exact_cm == pytest.approx(expected, abs=WITHIN_CM)
