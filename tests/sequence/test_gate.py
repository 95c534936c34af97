from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

from deliveries import deliver

from featherlog.sequence.gate import unequal_sides, whole_fractions
from featherlog.sequence.progress import fraction_states

if TYPE_CHECKING:
    from featherlog.junction.plan import Plan
    from featherlog.sequence.progress import DeliveredBeam, FractionState


PERCENT = 2.0


def states(plan: Plan, *given: list[DeliveredBeam]) -> dict[int, FractionState]:
    return fraction_states(plan, [row for rows in given for row in rows], PERCENT)


def reasons(plan: Plan, *given: list[DeliveredBeam]) -> tuple[str, ...]:
    """Return what keeps fraction 3 from being the first of a new position."""
    return unequal_sides(plan, states(plan, *given), 3, PERCENT)


def test_equal_sides_may_shift(plan: Plan) -> None:
    assert reasons(plan, deliver(plan, 1), deliver(plan, 2)) == ()


def test_metersets_within_tolerance_are_whole_however_many_they_are(plan: Plan) -> None:
    short = [
        [replace(row, meterset_mu=0.98 * row.meterset_mu) if row.field == "LOWER" else row]
        for number in (1, 2)
        for row in deliver(plan, number)
    ]
    assert reasons(plan, *short) == ()


def test_an_unfinished_fraction_stops_the_shift(plan: Plan) -> None:
    given = deliver(plan, 1), deliver(plan, 2, part=0.9)
    assert reasons(plan, *given) == ("fraction 2 was begun and not finished",)


def test_a_field_left_out_stops_the_shift_with_both_counts(plan: Plan) -> None:
    assert reasons(plan, deliver(plan, 1), deliver(plan, 2, LOWER=None)) == (
        "fraction 2 was begun and not finished",
        "fields UPPER and LOWER have had 2 and 1 whole fractions",
    )


def test_a_quarter_of_a_field_left_out_stops_the_shift_with_both_counts(plan: Plan) -> None:
    quarter = [row for row in deliver(plan, 2, part=0.75) if row.field == "LOWER"]
    given = deliver(plan, 1), deliver(plan, 2, LOWER=None), quarter
    assert "fields UPPER and LOWER have had 2 and 1 whole fractions" in reasons(plan, *given)


def test_a_field_given_twice_stops_the_shift(plan: Plan) -> None:
    again = [row for row in deliver(plan, 2) if row.field == "UPPER"]
    assert reasons(plan, deliver(plan, 1), deliver(plan, 2), again) == (
        "fields BRAIN and UPPER have had 2 and 3 whole fractions",
        "fields UPPER and LOWER have had 3 and 2 whole fractions",
    )


def test_a_fraction_begun_at_the_new_position_does_not_stop_its_own_remainder(plan: Plan) -> None:
    begun = deliver(plan, 3, LOWER=None)
    assert reasons(plan, deliver(plan, 1), deliver(plan, 2), begun) == ()


def test_a_field_has_had_a_fraction_when_every_beam_has(plan: Plan) -> None:
    only_left = [row for row in deliver(plan, 2) if row.beam != "right lateral"]
    had = whole_fractions(plan, states(plan, deliver(plan, 1), only_left), PERCENT)
    assert had == {"BRAIN": 1, "UPPER": 2, "LOWER": 2}
