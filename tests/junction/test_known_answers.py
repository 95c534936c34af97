"""Settings of a craniospinal course, derived apart from the program.

The spine fields follow from the point rule p = q·SAD/(SAD - q_z), the laterals from turning their
edge plane onto UPPER's.
"""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING, NamedTuple

import pytest
from spine_course import FFP, FFS, HFP, HFS, free, held, machine, reach, spine

from featherlog.junction.machine import Jaw
from featherlog.junction.solve import solve

if TYPE_CHECKING:
    from collections.abc import Callable

    from featherlog.geometry.patient import PatientPosition
    from featherlog.junction.design import Border
    from featherlog.junction.plan import BeamSetting, PositionSettings

WITHIN_CM = 0.0005
Follows = tuple[str | None, str | None]
BOTH_JAWS, BOTH_COUCH, LOWER_COUCH = (None, None), ("J1", "J2"), (None, "J2")


class Row(NamedTuple):
    """Head first: offset, followed junctions, jaws of UPPER and LOWER, skin gap at junction 2."""

    offset_cm: float
    follows: Follows
    upper_cm: tuple[float, float]
    lower_cm: tuple[float, float]
    gap_cm: float


ROWS = [
    Row(0.0, BOTH_JAWS, (13.3333, -15.0943), (13.2075, -11.3208), 1.6981),
    Row(-1.0, BOTH_JAWS, (12.3810, -16.0377), (12.2642, -11.3208), 1.6981),
    Row(-2.0, BOTH_JAWS, (11.4286, -16.9811), (11.3208, -11.3208), 1.6981),
    Row(-1.0, BOTH_COUCH, (13.3333, -15.0943), (13.2075, -10.3774), 1.6981),
    Row(-1.0, LOWER_COUCH, (12.3810, -16.0377), (13.2075, -10.3774), 1.7547),
]


def at(offset_cm: float, position: PatientPosition, follows: Follows) -> PositionSettings:
    upper, lower = follows
    course = spine(position, upper_follows=upper, lower_follows=lower, offsets_cm=(0.0, offset_cm))
    return solve(course, machine())[1]


def exact_ends(beam: BeamSetting) -> tuple[float, float]:
    return beam.exact_jaw_cm[beam.superior_jaw], beam.exact_jaw_cm[beam.inferior_jaw]


@pytest.mark.parametrize("row", ROWS)
@pytest.mark.parametrize("position", [HFS, HFP, FFS, FFP])
def test_spine_settings(position: PatientPosition, row: Row) -> None:
    settings = at(row.offset_cm, position, row.follows)
    # Feet first the same edges are formed by the other jaws, on the other side of the axis.
    hand = 1 if position in {HFS, HFP} else -1
    names = (Jaw.Y2, Jaw.Y1) if hand == 1 else (Jaw.Y1, Jaw.Y2)
    for field, jaws in zip(settings.fields[1:], (row.upper_cm, row.lower_cm), strict=True):
        (beam,) = field.beams
        assert (beam.superior_jaw, beam.inferior_jaw) == names
        assert exact_ends(beam) == pytest.approx([hand * jaw for jaw in jaws], abs=WITHIN_CM)
    (skin,) = settings.junction("J2").skin_gaps
    assert skin.exact_cm == pytest.approx(row.gap_cm, abs=WITHIN_CM)


class Laterals(NamedTuple):
    """Offset, what BRAIN, UPPER and LOWER follow, and the border's kind.

    Then of the beam at gantry 270, head first supine: collimator and couch angle, inferior jaw,
    superior jaw.
    """

    offset_cm: float
    follows: tuple[str | None, str | None, str | None]
    border: Callable[[float, float, float], Border]
    angles_deg: tuple[float, float]
    jaws_cm: tuple[float, float]


STILL, SPINE, BRAIN = (None, None, None), (None, "J1", "J2"), ("J1", None, None)
LATERALS = [
    Laterals(0.0, STILL, held, (7.6226, -4.9335), (-8.5557, 10.7606)),
    Laterals(-1.0, STILL, held, (7.0905, -5.5253), (-9.5995, 10.7513)),
    Laterals(-2.0, STILL, held, (6.5568, -6.1177), (-10.6481, 10.7399)),
    Laterals(-1.0, SPINE, held, (7.6295, -5.5089), (-9.5592, 10.7389)),
    Laterals(-1.0, BRAIN, free, (7.0840, -4.9500), (-8.5948, 10.7731)),
    Laterals(-1.0, BRAIN, held, (7.0840, -4.9500), (-8.5948, 11.7424)),
]


def lateral_settings(row: Laterals, position: PatientPosition) -> dict[float, BeamSetting]:
    """Return both laterals by their gantry angle."""
    brain, upper, lower = row.follows
    course = spine(
        position,
        brain_follows=brain,
        upper_follows=upper,
        lower_follows=lower,
        borders=(row.border(0, -8, 20), held(0, -6, -56)),
        offsets_cm=(0.0, row.offset_cm),
    )
    field = solve(course, machine())[1].fields[0]
    return {beam.gantry_deg: beam for beam in field.beams}


@pytest.mark.parametrize("row", LATERALS)
@pytest.mark.parametrize(
    ("position", "collimator_sign", "couch_sign", "hand"),
    [(HFS, 1, 1, 1), (HFP, -1, 1, 1), (FFS, -1, -1, -1), (FFP, 1, -1, -1)],
)
def test_lateral_settings(
    position: PatientPosition, collimator_sign: int, couch_sign: int, hand: int, row: Laterals
) -> None:
    beams = lateral_settings(row, position)
    for gantry, side in ((270.0, 1), (90.0, -1)):
        beam = beams[gantry]
        collimator, couch = row.angles_deg
        found = (beam.exact_collimator_deg, beam.exact_couch_deg)
        expected = (side * collimator_sign * collimator, side * couch_sign * couch)
        assert found == pytest.approx(expected, abs=WITHIN_CM)
        superior, inferior = exact_ends(beam)
        assert (inferior, superior) == pytest.approx([hand * j for j in row.jaws_cm], abs=WITHIN_CM)


@pytest.mark.parametrize("gantry", [170.0, 190.0])
def test_with_an_oblique_neighbour_the_laterals_are_no_mirrored_pair(gantry: float) -> None:
    course = spine(offsets_cm=(0.0,))
    brain, upper, lower = course.fields
    oblique = replace(upper, beams=(replace(upper.beams[0], gantry_deg=gantry),))
    settings = solve(replace(course, fields=(brain, oblique, lower)), machine())[0]
    left, right = settings.fields[0].beams
    # The source distance and the plane's lean are the same for both, so only the couch differs.
    assert left.exact_collimator_deg == pytest.approx(-right.exact_collimator_deg)
    assert abs(left.exact_couch_deg + right.exact_couch_deg) > 2.0
    for place in settings.junction("J1").mismatches:
        assert place.exact_cm == pytest.approx(0.0, abs=1e-9)


def test_a_turned_field_meets_its_neighbour_at_every_stated_point() -> None:
    for settings in solve(spine(), machine()):
        for place in settings.junction("J1").mismatches:
            assert place.exact_cm == pytest.approx(0.0, abs=1e-9)


@pytest.mark.parametrize(
    ("position", "longitudinal"), [(HFS, 1.0), (HFP, 1.0), (FFS, -1.0), (FFP, -1.0)]
)
def test_a_couch_move_toward_the_feet_moves_the_table(
    position: PatientPosition, longitudinal: float
) -> None:
    _, upper, lower = at(-1.0, position, LOWER_COUCH).fields
    assert (upper.moved_cm, upper.table_from_a_cm) == (0, (0, 0, 0))
    assert (lower.moved_cm, lower.table_from_a_cm) == (-1, (0, longitudinal, 0))
    # The isocentres lie 23 and 53 cm below that of the laterals, and LOWER has moved 1 cm more.
    assert upper.table_from_first_field_cm[1] == pytest.approx(23 * longitudinal)
    assert lower.table_from_first_field_cm[1] == pytest.approx(54 * longitudinal)


def test_a_free_border_travels_with_the_isocentre() -> None:
    course = spine(lower_follows="J2", offsets_cm=(0.0, -1.0))
    travelling = replace(course, inferior_border=free(0, -6, -56))
    (lower,) = solve(travelling, machine())[1].fields[2].beams
    assert exact_ends(lower)[1] == pytest.approx(-11.3208, abs=WITHIN_CM)


def test_a_reach_is_the_jaw_of_the_outer_end() -> None:
    course = replace(spine(FFS), inferior_border=reach(11.0), superior_border=reach(-1.0))
    settings = solve(course, machine())[0]
    assert exact_ends(settings.fields[2].beams[0])[1] == pytest.approx(11.0)
    assert exact_ends(settings.fields[0].beams[0])[0] == pytest.approx(1.0)
