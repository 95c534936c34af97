"""Settings of a spine worked out by hand from the point rule p = q·SAD/(SAD - q_z) (derived)."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING, NamedTuple

import pytest
from spine_course import FFP, FFS, HFP, HFS, free, machine, reach, spine

from featherlog.junction.machine import Jaw
from featherlog.junction.solve import solve

if TYPE_CHECKING:
    from featherlog.geometry.patient import PatientPosition
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
