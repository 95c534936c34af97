from __future__ import annotations

from typing import TYPE_CHECKING

from deliveries import deliver

from featherlog.sequence.gate import fractions_given, unequal_sides
from featherlog.sequence.progress import fraction_states

if TYPE_CHECKING:
    from featherlog.junction.plan import Plan
    from featherlog.sequence.progress import DeliveredBeam, FractionState


def states(plan: Plan, *given: list[DeliveredBeam]) -> dict[int, FractionState]:
    return fraction_states(plan, [row for rows in given for row in rows], 2.0)


def test_equal_sides_may_shift(plan: Plan) -> None:
    assert unequal_sides(plan, states(plan, deliver(plan, 1), deliver(plan, 2)), 3) == ()


def test_an_unfinished_fraction_stops_the_shift(plan: Plan) -> None:
    given = states(plan, deliver(plan, 1), deliver(plan, 2, part=0.9))
    assert unequal_sides(plan, given, 3) == ("fraction 2 was begun and not finished",)


def test_a_field_left_out_stops_the_shift_with_both_counts(plan: Plan) -> None:
    given = states(plan, deliver(plan, 1), deliver(plan, 2, LOWER=None))
    assert unequal_sides(plan, given, 3) == (
        "fraction 2 was begun and not finished",
        "fields UPPER and LOWER have had 2.00 and 1.00 fractions",
    )


def test_a_fraction_begun_at_the_new_position_does_not_stop_its_own_remainder(plan: Plan) -> None:
    begun = deliver(plan, 3, LOWER=None)
    assert unequal_sides(plan, states(plan, deliver(plan, 1), deliver(plan, 2), begun), 3) == ()


def test_fractions_given_weigh_each_beam(plan: Plan) -> None:
    only_left = [row for row in deliver(plan, 2) if row.beam != "right lateral"]
    given = fractions_given(plan, states(plan, deliver(plan, 1), only_left))
    assert given == {"BRAIN": 1.5, "UPPER": 2.0, "LOWER": 2.0}
