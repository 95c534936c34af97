"""Each warning with its figure, and silence when there is nothing to say."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

import pytest
from spine_course import beam, field, junction, machine, pair, reach, sequence, spine

from featherlog.junction.design import Angles, EarlierCourse, Pattern, Technique
from featherlog.junction.machine import Steps
from featherlog.sequence.planning import plan_course

if TYPE_CHECKING:
    from featherlog.junction.design import Course, Field, Junction

# A skin gap of 4·(10 + 10)/100 = 0.8 cm.
BETWEEN = junction("J", (0, 0, 0), 4.0)


def two_fields(
    between: Junction = BETWEEN, *offsets_cm: float, gantry_deg: float = 180.0
) -> Course:
    return pair(
        [beam("u", gantry_deg, (0, -4, 10), ssd_cm=96.0)],
        [beam("l", 180, (0, -4, -10), ssd_cm=96.0)],
        between,
        offsets_cm=offsets_cm or (0.0,),
    )


def said(of: Course) -> tuple[str, ...]:
    return plan_course(of, machine()).warnings


def test_nothing_to_say() -> None:
    assert said(two_fields(BETWEEN, 0.0, -1.0)) == ()


def test_uneven_shares() -> None:
    uneven = two_fields(BETWEEN, 0.0, -1.0, -2.0)
    (found,) = said(uneven)
    assert found == (
        "shares are uneven: A 10, B 5, C 5 of 20 fractions; as many shift days with blocks of "
        "A 4, B 7, C 6, A 3 would be more even"
    )
    helped = replace(uneven, phases=(replace(uneven.phases[0], fractions=21),))
    (found,) = said(helped)
    assert found == (
        "shares are uneven: A 10, B 6, C 5 of 21 fractions; as many shift days with blocks of "
        "A 4, B 4, C 7, A 3, B 3 would be more even"
    )


@pytest.mark.parametrize(("labels", "fractions"), [("AB", 15), ("ABC", 13), ("ABC", 14)])
def test_shares_as_even_as_whole_fractions_can_be(labels: str, fractions: int) -> None:
    offsets = [-float(number) for number in range(len(labels))]
    of = two_fields(BETWEEN, *offsets)
    phase = replace(of.phases[0], fractions=fractions)
    daily = sequence(Pattern.DAILY, labels, None)
    assert said(replace(of, phases=(phase,), sequence=daily)) == ()


def test_shares_that_could_be_more_even_though_every_five_fractions_is_usual() -> None:
    of = two_fields(BETWEEN, 0.0, -1.0, -2.0)
    (found,) = said(replace(of, phases=(replace(of.phases[0], fractions=13),)))
    assert found == (
        "shares are uneven: A 5, B 5, C 3 of 13 fractions; as many shift days with blocks of "
        "A 5, B 4, C 4 would be more even"
    )


def test_shares_of_split_fractions_within_one_that_could_be_equal() -> None:
    near = replace(sequence(Pattern.SPLIT, "AB", None), weights=(0.49, 0.51))
    (found,) = said(replace(two_fields(BETWEEN, 0.0, -1.0), sequence=near))
    assert found == "shares are uneven: A 9.8, B 10.2 of 20 fractions"


def on_millimetres(*fields: Field, turned: str | None = None) -> list[str]:
    between = junction("J", (0, 0, 0), 4.0, turned_field=turned)
    of = replace(two_fields(between), fields=fields)
    steps = Steps(jaw_cm=0.1, table_cm=0.1, angle_deg=0.5)
    return [each for each in plan_course(of, machine(steps=steps)).warnings if "steps" in each]


def test_what_is_typed_between_the_steps_of_the_machine() -> None:
    typed = replace(
        beam("u", 180.2, (0, -4, 10), collimator_deg=0.25, couch_deg=0.1, ssd_cm=96.0),
        side_jaws_cm=(-5.05, 5.0),
    )
    lower = field("LOWER", beam("l", 180.5, (0, -4, -10), ssd_cm=96.0))
    assert on_millimetres(field("UPPER", typed), lower) == [
        "beam u: gantry angle 180.2 degrees cannot be set in the machine's steps of 0.5 degrees",
        "beam u: collimator angle 0.25 degrees cannot be set in the machine's steps of 0.5 degrees",
        "beam u: couch angle 0.1 degrees cannot be set in the machine's steps of 0.5 degrees",
        "beam u: side jaw −5.05 cm cannot be set in the machine's steps of 0.1 cm",
    ]


def test_angles_that_are_solved_and_fields_that_are_not_set_need_no_steps() -> None:
    lateral = beam("lateral", 90, (0, -8, 9), collimator_deg=0.25, ssd_cm=92.0)
    lower = field("LOWER", beam("l", 180, (0, -4, -10), ssd_cm=96.0))
    assert on_millimetres(field("UPPER", lateral), lower, turned="UPPER") == []
    old = EarlierCourse("2029", dose_gy=30.0, fractions=15, junction_reach_cm=7.0)
    upper = field("UPPER", beam("u", 180.2, (0, -4, 7), ssd_cm=96.0), earlier=old)
    assert on_millimetres(upper, lower) == []


def test_a_skin_slope_that_is_not_entered() -> None:
    (found,) = said(two_fields(replace(BETWEEN, skin_slope_deg=None)))
    assert found.startswith("junction J: the skin slope is not entered")
    assert "7-9 mm of overlap and 140 %" in found


def test_a_half_beam_match_needs_no_skin_slope() -> None:
    between = junction("J", (0, 0, 0), 4.0, technique=Technique.HALF_BEAM, skin_slope_deg=None)
    both = [beam(name, 180, (0, -4, 0), ssd_cm=96.0) for name in "ul"]
    assert said(pair(both[:1], both[1:], between)) == ()


def test_a_gap_as_wide_as_the_step() -> None:
    (found,) = said(two_fields(BETWEEN, 0.0, -0.8))
    assert found == (
        "junction J: the gap on the posterior skin (+0.80 cm) is not smaller than the feather step "
        "(0.80 cm), so the cold bands of neighbouring positions overlap there"
    )


def test_an_overlap_as_wide_as_the_step_is_hot() -> None:
    # Both edges are over-travelled by 20 cm, so they overlap on the skin by 4·40/100 cm.
    crossed = pair(
        [beam("u", 180, (0, -4, -20), ssd_cm=96.0)],
        [beam("l", 180, (0, -4, 20), ssd_cm=96.0)],
        BETWEEN,
        borders=(reach(45.0), reach(45.0)),
        offsets_cm=(0.0, -1.0),
    )
    (found,) = said(crossed)
    assert "the gap on the posterior skin (-1.60 cm)" in found
    assert "the hot bands" in found


def test_a_step_smaller_than_the_penumbra() -> None:
    # The penumbra is 0.4 cm wide at the surface and grows by 0.6 cm in 30 cm of depth.
    half = junction("J", (0, 0, 0), 4.0, technique=Technique.HALF_BEAM)
    both = [beam(name, 180, (0, -4, 0), ssd_cm=96.0) for name in "ul"]
    (found,) = said(pair(both[:1], both[1:], half, offsets_cm=(0.0, -0.45)))
    assert found == (
        "junction J: the feather step (0.45 cm) is smaller than the 80-20 % penumbra of 6 MV at "
        "the match depth (0.48 cm), so the positions hardly smear the junction out"
    )


def test_half_beams_of_different_gantry_that_part_once_moved() -> None:
    # The posterior skin lies 4 cm past the isocentre along the anterior beam and 4 cm before it
    # along the posterior one: moved by 2 cm, they part by 2·(4 + 4)/100 cm.
    half = junction("J", (0, 0, 0), 4.0, technique=Technique.HALF_BEAM, lateral_limits_cm=(0, 0))
    opposed = [beam("u", 0, (0, -4, 0))], [beam("l", 180, (0, -4, 0), ssd_cm=96.0)]
    (found,) = said(pair(*opposed, half, offsets_cm=(0.0, 2.0)))
    assert found == (
        "junction J, position B: gap of 0.16 cm at entrance skin (x +0.0, y +0.0), more than the "
        "jaw tolerance of 0.10 cm"
    )


def test_the_same_meterset_with_different_jaws() -> None:
    course = two_fields(BETWEEN, 0.0, -1.0)
    first, second = course.positions
    same = replace(second, meterset_mu=first.meterset_mu | {"l": 200.0})
    (found,) = said(replace(course, positions=(first, same)))
    assert found == (
        "positions A and B have different jaws but the same MU for u: MU belong to a position"
    )


def test_held_angles_that_leave_more_than_a_jaw_may_be_off() -> None:
    held_angles = spine(angles=Angles.HELD, offsets_cm=(0.0, -3.0), fractions=6)
    found = [sentence for sentence in said(held_angles) if "J1, position B" in sentence]
    assert len(found) == 1
    # 0.1 cm for each cm at 10 cm to a side, so 0.3 × 3 / 10; less than that in depth.
    assert "of 0.23 cm with held angles at" in found[0]
    assert (
        "positions A and B have different jaws but the same angles for left lateral, "
        "right lateral: angles belong to a position"
    ) in said(held_angles)
    recomputed = said(spine(offsets_cm=(0.0, -3.0), fractions=6))
    assert not [sentence for sentence in recomputed if "angles" in sentence]


def test_the_collimator_of_a_field_that_is_not_turned_belongs_to_the_course() -> None:
    both = (
        [beam("u", 180, (0, -4, 10), collimator_deg=90, ssd_cm=96.0)],
        [beam("l", 180, (0, -4, -10), ssd_cm=96.0)],
    )
    assert said(pair(*both, BETWEEN, offsets_cm=(0.0, -1.0))) == ()


def test_a_planned_separation_is_no_residual() -> None:
    planned = replace(BETWEEN, separation_cm=0.4, borne_by="LOWER")
    assert not [sentence for sentence in said(two_fields(planned)) if "tolerance" in sentence]


def test_what_is_left_beside_a_planned_separation_is_named_as_such() -> None:
    half = junction(
        "J",
        (0, 0, 0),
        4.0,
        technique=Technique.HALF_BEAM,
        lateral_limits_cm=(0, 0),
        separation_cm=0.4,
        borne_by="LOWER",
    )
    opposed = [beam("u", 0, (0, -4, 0))], [beam("l", 180, (0, -4, 0), ssd_cm=96.0)]
    found = said(pair(*opposed, half, offsets_cm=(0.0, 2.0)))
    assert any("cm beyond the planned separation at entrance skin" in each for each in found)


def test_a_pair_short_of_the_planned_gap_is_not_hidden_by_one_that_keeps_it() -> None:
    # Jaws at -2 and -2.4 cm, seen 4 cm past the isocentre and 4 cm before it: a gap of 0.22 cm,
    # while the edges of the other pair keep 0.42.
    half = junction(
        "J",
        (0, 0, 0),
        4.0,
        technique=Technique.HALF_BEAM,
        lateral_limits_cm=(0, 0),
        separation_cm=0.4,
        borne_by="LOWER",
    )
    lower = [beam("l front", 0, (0, -4, 0)), beam("l back", 180, (0, -4, 0), ssd_cm=96.0)]
    found = said(pair([beam("u", 0, (0, -4, 0))], lower, half, offsets_cm=(0.0, -2.0)))
    (about,) = [each for each in found if "position B" in each and "tolerance" in each]
    assert "overlap of 0.18 cm beyond the planned separation at entrance skin" in about


def test_shares_of_split_fractions_are_counted_in_parts() -> None:
    even = replace(sequence(Pattern.SPLIT, "AB", None), weights=(1.0, 1.0))
    of = two_fields(BETWEEN, 0.0, -1.0)
    assert said(replace(of, sequence=even)) == ()
    uneven = replace(even, weights=(1.0, 3.0))
    assert said(replace(of, sequence=uneven)) == ("shares are uneven: A 5, B 15 of 20 fractions",)
