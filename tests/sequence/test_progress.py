from __future__ import annotations

from typing import TYPE_CHECKING

import pytest
from deliveries import FIELDS, deliver

from featherlog.sequence.progress import (
    Progress,
    due_in,
    fraction_states,
    last_positions,
    progress,
)

if TYPE_CHECKING:
    from featherlog.junction.plan import Plan
    from featherlog.sequence.progress import DeliveredBeam

PERCENT = 2.0


def standing(plan: Plan, *given: list[DeliveredBeam]) -> Progress:
    rows = [row for rows in given for row in rows]
    return progress(plan, fraction_states(plan, rows, PERCENT), PERCENT)


def due(
    complete: int, number: int | None, position: str | None, *, part_delivered: bool = False
) -> tuple[int, int | None, str | None, bool]:
    return complete, number, position, part_delivered


def told(now: Progress) -> tuple[int, int | None, str | None, bool]:
    return now.complete, now.next_fraction, now.position, now.part_delivered


def test_a_course_begins_at_its_first_fraction(plan: Plan) -> None:
    assert told(standing(plan)) == due(0, 1, "A")


def test_the_next_fraction_is_at_its_planned_position(plan: Plan) -> None:
    given = [deliver(plan, number) for number in (1, 2)]
    assert told(standing(plan, *given)) == due(2, 3, "B")


def test_a_broken_fraction_keeps_its_number_and_the_position_where_it_began(plan: Plan) -> None:
    broken = deliver(plan, 3, part=0.4, **dict.fromkeys(FIELDS, "A"))
    given = [deliver(plan, 1), deliver(plan, 2), broken]
    assert told(standing(plan, *given)) == due(2, 3, "A", part_delivered=True)


def test_the_remainder_stays_where_the_fraction_began_wherever_it_went_on(plan: Plan) -> None:
    gone_on = deliver(plan, 1, part=0.25, **dict.fromkeys(FIELDS, "B"))
    given = [deliver(plan, 1, part=0.25), gone_on]
    assert told(standing(plan, *given)) == due(0, 1, "A", part_delivered=True)


def test_parts_that_add_up_complete_a_fraction(plan: Plan) -> None:
    first, rest = deliver(plan, 1, part=0.4), deliver(plan, 1, part=0.6)
    assert told(standing(plan, first, rest)) == due(1, 2, "A")


def test_one_beam_left_out_leaves_a_fraction_incomplete(plan: Plan) -> None:
    assert standing(plan, deliver(plan, 1, LOWER=None)).part_delivered


@pytest.mark.parametrize(("parts", "complete"), [((0.98,), 1), ((0.979,), 0), ((0.7, 0.28), 1)])
def test_complete_within_the_meterset_tolerance(
    plan: Plan, parts: tuple[float, ...], complete: int
) -> None:
    assert standing(plan, *(deliver(plan, 1, part=part) for part in parts)).complete == complete


def test_a_missed_fraction_is_next_though_later_ones_were_given(plan: Plan) -> None:
    given = [deliver(plan, number) for number in (1, 3)]
    assert told(standing(plan, *given)) == due(2, 2, "A")


def test_a_finished_course_has_no_next_fraction(plan: Plan) -> None:
    given = [deliver(plan, number) for number in range(1, 7)]
    assert told(standing(plan, *given)) == due(6, None, None)


def test_each_field_counts_where_it_received_dose(plan: Plan) -> None:
    (state,) = fraction_states(plan, deliver(plan, 3, LOWER="A"), PERCENT).values()
    assert state.field_positions == {"BRAIN": ("B",), "UPPER": ("B",), "LOWER": ("A",)}
    assert state.last_position == {"BRAIN": "B", "UPPER": "B", "LOWER": "A"}


def test_a_field_keeps_every_position_at_which_it_received_dose(plan: Plan) -> None:
    rows = [*deliver(plan, 3, part=0.5), *deliver(plan, 3, part=0.5, UPPER="C")]
    (state,) = fraction_states(plan, rows, PERCENT).values()
    assert state.field_positions["UPPER"] == ("B", "C")
    assert (state.began_at, state.last_position["UPPER"]) == ("B", "C")


def _stands(plan: Plan, fraction: int, *given: list[DeliveredBeam]) -> dict[str, str]:
    states = fraction_states(plan, [row for rows in given for row in rows], PERCENT)
    due = due_in(plan, fraction, states.get(fraction), PERCENT)
    return last_positions(plan, states, due)


def test_fields_stand_where_they_were_treated_else_where_they_were_planned(plan: Plan) -> None:
    late = deliver(plan, 3, **dict.fromkeys(FIELDS, "A"))
    assert _stands(plan, 1, late) == {}
    assert _stands(plan, 4, late) == dict.fromkeys(FIELDS, "A")
    assert _stands(plan, 6, late) == dict.fromkeys(FIELDS, "C")


def test_a_field_that_stayed_behind_stands_where_it_stayed(plan: Plan) -> None:
    assert _stands(plan, 4, deliver(plan, 3, UPPER="A")) == {
        "BRAIN": "B",
        "UPPER": "A",
        "LOWER": "B",
    }


def test_a_field_begun_in_a_fraction_stands_at_it_and_the_others_where_they_were(
    plan: Plan,
) -> None:
    begun = deliver(plan, 3, BRAIN=None, LOWER=None)
    assert _stands(plan, 3, deliver(plan, 2), begun) == {"BRAIN": "A", "UPPER": "B", "LOWER": "A"}


def test_the_remainder_is_due_where_its_own_field_was_begun(plan: Plan) -> None:
    now = standing(plan, *[deliver(plan, n) for n in (1, 2)], deliver(plan, 3, part=0.5, BRAIN="A"))
    assert now.begun_at == {"BRAIN": "A", "UPPER": "B", "LOWER": "B"}
