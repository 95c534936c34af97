"""A field of a finished course as a fixed neighbour: the new edge is placed against its edge."""

from __future__ import annotations

from dataclasses import replace
from math import radians, tan
from typing import TYPE_CHECKING

import pytest
from rays import Setting, edge_z
from spine_course import FFS, HFS, beam, course, field, junction, machine, reach

from featherlog.dose.amounts import delivered_amounts, earlier_amounts, planned_amounts
from featherlog.junction.design import EarlierCourse, Technique
from featherlog.junction.hand_check import JAW_RULE, hand_checks
from featherlog.junction.machine import Jaw, Range, Steps
from featherlog.junction.solve import solve
from featherlog.sequence.planning import plan_course
from featherlog.sequence.progress import fraction_states, progress

if TYPE_CHECKING:
    from featherlog.geometry.patient import PatientPosition
    from featherlog.junction.design import Course, Junction

GIVEN = EarlierCourse("2029", dose_gy=30.0, fractions=15, junction_reach_cm=7.0)
MILLIMETRE = Steps(jaw_cm=0.1, table_cm=0.1, angle_deg=1.0)
BETWEEN = junction("J", (0, 0, 0), 5.0)


def against(
    between: Junction = BETWEEN,
    *offsets_cm: float,
    earlier_above: bool = True,
    position: PatientPosition = HFS,
) -> Course:
    """Give an earlier posterior field, its edge 7 cm from its axis, and a new one beside it."""
    up = 1 if earlier_above else -1
    earlier = field("OLD", beam("old", 180, (0, -1, up * 7.3)), earlier=GIVEN)
    new = field("NEW", beam("new", 180, (0, -3, -up * 11.0)))
    return course(
        position,
        (earlier, new)[::up],
        (between,),
        (reach(12.0), reach(12.0)),
        offsets_cm=offsets_cm or (0.0,),
    )


@pytest.mark.parametrize("position", [HFS, FFS])
@pytest.mark.parametrize("earlier_above", [True, False])
@pytest.mark.parametrize("separation_cm", [0.0, 0.3])
def test_the_new_edge_meets_the_old_one_at_the_match_depth(
    position: PatientPosition,
    earlier_above: bool,
    separation_cm: float,
) -> None:
    between = replace(BETWEEN, separation_cm=separation_cm, borne_by="NEW")
    of = against(between, earlier_above=earlier_above, position=position)
    (settings,) = solve(of, machine())
    old = next(each.beams[0] for each in settings.fields if each.field == "OLD")
    new = next(each.beams[0] for each in settings.fields if each.field == "NEW")
    own, theirs = (
        (new.superior_jaw, old.inferior_jaw)
        if earlier_above
        else (new.inferior_jaw, old.superior_jaw)
    )
    assert abs(old.jaw_cm[theirs]) == 7.0
    edges = [
        edge_z(Setting(position, 180, 0, 0, each.isocentre_cm), jaw, each.exact_jaw_cm[jaw], 0, -5)
        for each, jaw in ((old, theirs), (new, own))
    ]
    toward = 1 if earlier_above else -1
    assert edges[0] - edges[1] == pytest.approx(toward * separation_cm, abs=1e-9)


def old_edge_z(y_cm: float) -> float:
    """Return where the old edge lies, 7 cm below its axis at z 7.3, y -1: similar triangles."""
    return 7.3 - 7.0 * (100.0 - 1.0 - y_cm) / 100.0


@pytest.mark.parametrize("separation_cm", [0.0, 0.3])
def test_the_match_point_lies_on_the_old_edge(separation_cm: float) -> None:
    between = replace(BETWEEN, separation_cm=separation_cm, borne_by="NEW", thickness_cm=16.0)
    of = against(between)
    found = solve(of, machine())[0].junction("J")
    assert found.match_point_cm == pytest.approx((0.0, -5.0, old_edge_z(-5.0)))
    assert found.match_point_cm[2] != pytest.approx(0.0, abs=0.01)
    # The old field's part of the gap runs from there to where its edge meets the skin.
    (gap,) = found.skin_gaps
    assert gap.superior_part_cm == pytest.approx(old_edge_z(0.0) - old_edge_z(-5.0))
    assert gap.superior_part_cm + gap.inferior_part_cm == pytest.approx(gap.expected_cm)


def test_an_old_edge_away_from_the_design_is_no_fault_of_the_new_jaw() -> None:
    of = against()
    old, new = of.fields
    of = replace(of, fields=(old, replace(new, beams=(replace(new.beams[0], ssd_cm=97.0),))))
    (found,) = (
        check for check in hand_checks(of, solve(of, machine())) if check.formula == JAW_RULE
    )
    assert found.by_formula == pytest.approx(found.exact, abs=1e-9)
    assert not [said for said in plan_course(of, machine()).warnings if "disagree" in said]


def test_the_depth_on_a_slope_is_that_of_the_old_edge() -> None:
    of = against(replace(BETWEEN, skin_slope_deg=10.0))
    found = solve(of, machine())[0].junction("J")
    rise = tan(radians(10.0)) * old_edge_z(-5.0)
    assert found.depth_below_skin_cm == pytest.approx(5.0 + rise)


def test_opposed_old_beams_are_met_at_their_mean() -> None:
    old = (beam("old back", 180, (0, -1, 7.3)), beam("old front", 0, (0, -1, 7.3)))
    of = against()
    of = replace(of, fields=(field("OLD", *old, earlier=GIVEN), of.fields[1]))
    (settings,) = solve(of, machine())
    # One edge spreads with depth as the other closes: their mean is that of the isocentre plane.
    mean = 7.3 - 7.0
    found = settings.junction("J")
    assert found.match_point_cm[2] == pytest.approx(mean)
    at_match = next(place for place in found.mismatches if place.place == "match depth")
    assert (at_match.least_cm, at_match.most_cm) == pytest.approx((-0.28, 0.28), abs=1e-5)


def test_the_old_field_never_moves_is_never_rounded_and_never_limited() -> None:
    narrow = replace(GIVEN, junction_reach_cm=7.03)
    of = against(BETWEEN, 0.0, -1.0)
    old, new = of.fields
    on = machine(steps=MILLIMETRE, travel={Jaw.Y1: Range(-100, -7.5)})
    of = replace(
        of,
        fields=(replace(old, earlier=narrow), new),
        superior_border=reach(12.03),
        inferior_border=reach(12.0),
    )
    for settings in solve(of, on):
        fixed = settings.fields[0]
        assert fixed.moved_cm == 0.0
        assert fixed.beams[0].jaw_cm[Jaw.Y1] == -7.03
        assert fixed.beams[0].jaw_cm[Jaw.Y2] == 12.03


def test_a_beam_turned_onto_an_old_edge_shares_its_plane() -> None:
    between = junction("J", (0, 0, 0), 5.0, turned_field="NEW")
    laterals = (beam("left", 90, (0, -8, -11)), beam("right", 270, (0, -8, -11)))
    earlier = field("OLD", beam("old", 180, (0, -1, 7.3)), earlier=GIVEN)
    of = course(HFS, (earlier, field("NEW", *laterals)), (between,), (reach(12.0), reach(12.0)))
    for place in solve(of, machine())[0].junction("J").mismatches:
        assert place.exact_cm == pytest.approx(0.0, abs=1e-9)


def test_a_beam_turned_onto_one_of_two_old_beams_meets_it_at_that_edge() -> None:
    between = junction("J", (0, 0, 0), 5.0, turned_field="NEW", matched_beam="old back")
    old = (beam("old front", 0, (0, -1, 7.3)), beam("old back", 180, (0, -1, 7.3)))
    of = course(
        HFS,
        (field("OLD", *old, earlier=GIVEN), field("NEW", beam("left", 90, (0, -8, -11)))),
        (between,),
        (reach(12.0), reach(12.0)),
    )
    (settings,) = solve(of, machine())
    z = settings.junction("J").match_point_cm[2]
    assert z == pytest.approx(old_edge_z(-5.0))
    assert settings.fields[1].beams[0].superior_edge.z_at(0, -5) == pytest.approx(z, abs=1e-5)


def test_its_dose_counts_once_and_it_is_never_due() -> None:
    between = replace(BETWEEN, technique=Technique.HALF_BEAM)
    plan = plan_course(against(between, 0.0, -1.0), machine())
    assert earlier_amounts(plan) == {("A", "old"): 30.0}
    assert "old" not in {beam_name for _, beam_name in planned_amounts(plan)}
    assert delivered_amounts(plan, []) == {}
    now = progress(plan, fraction_states(plan, [], 2.0), 2.0)
    assert set(now.due) == {"new"}
    assert [each.field for each in plan.positions[0].treated] == ["NEW"]
    assert (plan.positions[0].fields[0].earlier_course, plan.positions[0].meterset("old")) == (
        "2029",
        100.0,
    )
