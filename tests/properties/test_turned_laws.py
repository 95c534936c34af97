"""Laws that turned fields and all solved jaws keep, whatever the numbers."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import pytest
from hypothesis import given
from hypothesis import strategies as st
from spine_course import FFS, HFP, HFS, beam, course, field, held, junction, machine

from featherlog.junction.design import Technique
from featherlog.junction.solve import solve

if TYPE_CHECKING:
    from featherlog.geometry.patient import PatientPosition, Point
    from featherlog.junction.design import Course
    from featherlog.junction.plan import BeamSetting, FieldSetting, PositionSettings

WITHIN = 1e-8
offset = st.floats(-3, 3)


@dataclass(frozen=True)
class Chain:
    """One beam turned onto the upper of two fields; gantry angles and isocentres of all three."""

    gantries_deg: tuple[float, float, float]
    isocentres_cm: tuple[Point, Point, Point]
    lying: PatientPosition = HFS


def isocentre(z_cm: float) -> st.SearchStrategy[Point]:
    return st.tuples(st.floats(-5, 5), st.floats(-10, 2), st.just(z_cm))


chains = st.builds(
    Chain,
    st.tuples(st.floats(50, 130), st.floats(150, 210), st.floats(150, 210)),
    st.tuples(isocentre(9.0), isocentre(-14.0), isocentre(-44.0)),
)


def design(of: Chain, *offsets_cm: float, x_sign: int = 1) -> Course:
    beams = [
        beam(name, gantry, at)
        for name, gantry, at in zip("tul", of.gantries_deg, of.isocentres_cm, strict=True)
    ]
    first = junction("J1", (x_sign * 1.0, 0, 0), 5.0, turned_field="T", lateral_limits_cm=(-4, 4))
    second = junction("J2", (0, 0, -30), 6.0, technique=Technique.HALF_BEAM)
    fields = [field(name, one) for name, one in zip("TUL", beams, strict=True)]
    borders = (held(x_sign * 2.0, -8, 20), held(0, -6, -56))
    return course(of.lying, fields, (first, second), borders, offsets_cm=offsets_cm)


def settings_at(of: Chain, move: float, *, x_sign: int = 1) -> PositionSettings:
    return solve(design(of, 0.0, move, x_sign=x_sign), machine())[1]


def only(each: FieldSetting) -> BeamSetting:
    (one,) = each.beams
    return one


def ends(one: BeamSetting) -> tuple[float, float]:
    return one.exact_jaw_cm[one.superior_jaw], one.exact_jaw_cm[one.inferior_jaw]


def mirrored(of: Chain) -> Chain:
    first, second, third = (-gantry % 360 for gantry in of.gantries_deg)
    left, middle, right = ((-x, y, z) for x, y, z in of.isocentres_cm)
    return replace(of, gantries_deg=(first, second, third), isocentres_cm=(left, middle, right))


def compare(
    here: PositionSettings,
    there: PositionSettings,
    *,
    collimator: int,
    couch: int,
    jaws: int = 1,
) -> None:
    """Check that angles and jaws are the same but for the given signs."""
    for each, other in zip(here.fields, there.fields, strict=True):
        one, two = only(each), only(other)
        assert two.exact_collimator_deg == pytest.approx(
            collimator * one.exact_collimator_deg, abs=WITHIN
        )
        assert two.exact_couch_deg == pytest.approx(couch * one.exact_couch_deg, abs=WITHIN)
        assert ends(two) == pytest.approx([jaws * jaw for jaw in ends(one)], abs=WITHIN)


@given(chains, offset)
def test_a_mirrored_design_turns_the_other_way(of: Chain, move: float) -> None:
    here, there = settings_at(of, move), settings_at(mirrored(of), move, x_sign=-1)
    compare(here, there, collimator=-1, couch=-1)


@given(chains, offset)
def test_prone_only_the_couch_of_the_opposite_gantry_turns_the_other_way(
    of: Chain, move: float
) -> None:
    # From the opposite gantry angle the same beam enters the same skin.
    first, second, third = ((gantry + 180) % 360 for gantry in of.gantries_deg)
    prone = replace(of, gantries_deg=(first, second, third), lying=HFP)
    compare(settings_at(of, move), settings_at(prone, move), collimator=1, couch=-1)


@given(chains, offset)
def test_feet_first_the_opposite_side_turns_the_same_way(of: Chain, move: float) -> None:
    first, second, third = (-gantry % 360 for gantry in of.gantries_deg)
    feet_first = replace(of, gantries_deg=(first, second, third), lying=FFS)
    compare(settings_at(of, move), settings_at(feet_first, move), collimator=1, couch=1, jaws=-1)


@given(chains, st.tuples(offset, offset).filter(lambda pair: abs(pair[0] - pair[1]) > 0.01))
def test_jaws_at_a_junction_rise_with_its_offset(of: Chain, moves: tuple[float, float]) -> None:
    low, high = solve(design(of, *sorted(moves)), machine())
    for before, after in zip(low.fields[1:], high.fields[1:], strict=True):
        one, two = only(before), only(after)
        assert two.exact_jaw_cm[two.superior_jaw] > one.exact_jaw_cm[one.superior_jaw]
    upper_before, upper_after = only(low.fields[1]), only(high.fields[1])
    jaw = upper_before.inferior_jaw
    assert upper_after.exact_jaw_cm[jaw] > upper_before.exact_jaw_cm[jaw]


@given(chains, offset)
def test_solved_edges_put_back_as_targets_give_the_same_settings(of: Chain, move: float) -> None:
    """The turned field goes back in at its solved angles, no longer turned."""
    fine = solve(design(of, 0.0, move), machine())[1]
    turned, upper, lower = (only(each) for each in fine.fields)
    fields = tuple(
        replace(
            each,
            beams=(
                replace(
                    each.beams[0],
                    collimator_deg=one.exact_collimator_deg,
                    couch_deg=one.exact_couch_deg,
                ),
            ),
        )
        for each, one in zip(design(of).fields, (turned, upper, lower), strict=True)
    )
    original = design(of, 0.0)
    moved_points = (
        upper.superior_edge.z_at(1.0, -5.0),
        lower.superior_edge.z_at(0.0, -6.0),
    )
    junctions = tuple(
        replace(
            each,
            skin_point_cm=(*each.skin_point_cm[:2], z),
            technique=Technique.HALF_BEAM,
            turned_field=None,
        )
        for each, z in zip(original.junctions, moved_points, strict=True)
    )
    borders = (
        held(2.0, -8, turned.superior_edge.z_at(2.0, -8.0)),
        held(0, -6, lower.inferior_edge.z_at(0.0, -6.0)),
    )
    again = replace(
        original,
        fields=fields,
        junctions=junctions,
        superior_border=borders[0],
        inferior_border=borders[1],
    )
    (found,) = solve(again, machine())
    for each, one in zip(found.fields, (turned, upper, lower), strict=True):
        # The edges that were put back are those of a machine that sets a millionth of a centimetre.
        assert ends(only(each)) == pytest.approx(ends(one), abs=1e-5)
