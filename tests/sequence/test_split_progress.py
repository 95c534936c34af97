"""Fractions that are split over positions: one step after another, each tied to its position."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

import pytest
from deliveries import FIELDS, deliver
from spine_course import machine, sequence, spine

from featherlog.junction.design import Pattern
from featherlog.sequence.planning import plan_course
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
# A quarter, a half and a quarter of every fraction at A, B and C.
ENDS = {"A": 0.25, "B": 0.75, "C": 1.0}


@pytest.fixture(scope="module")
def split() -> Plan:
    order = replace(sequence(Pattern.SPLIT, "ABC", None), weights=(1.0, 2.0, 1.0))
    return plan_course(spine(fractions=3, order=order), machine())


def step(plan: Plan, position: str, part: float, fraction: int = 1) -> list[DeliveredBeam]:
    """Deliver a part of the whole meterset through every field at one position."""
    return deliver(plan, fraction, part=part, **dict.fromkeys(FIELDS, position))


def only(plan: Plan, field: str, position: str, part: float) -> list[DeliveredBeam]:
    """Deliver through one field alone."""
    places = dict.fromkeys(FIELDS) | {field: position}
    return deliver(plan, 1, part=part, **places)


def standing(plan: Plan, *given: list[DeliveredBeam]) -> Progress:
    rows = [row for rows in given for row in rows]
    return progress(plan, fraction_states(plan, rows, PERCENT), PERCENT)


def told(now: Progress) -> tuple[int | None, int, str | None, bool]:
    return now.next_fraction, now.step, now.position, now.part_delivered


def test_steps_come_in_their_order(split: Plan) -> None:
    a, b, c = step(split, "A", 0.25), step(split, "B", 0.5), step(split, "C", 0.25)
    assert told(standing(split)) == (1, 1, "A", False)
    assert told(standing(split, a)) == (1, 2, "B", False)
    assert told(standing(split, a, b)) == (1, 3, "C", False)
    assert told(standing(split, a, b, c)) == (2, 1, "A", False)
    assert {standing(split, *given).steps for given in ([], [a], [a, b])} == {3}


def test_what_is_due_is_the_steps_part_of_every_beam(split: Plan) -> None:
    now = standing(split, step(split, "A", 0.25))
    assert now.due == pytest.approx(dict.fromkeys(now.due, 0.5))
    assert now.expected == 0.75
    assert len(now.due) == 4


def test_a_step_that_was_broken_off_stays_where_it_is(split: Plan) -> None:
    now = standing(split, step(split, "A", 0.1))
    assert told(now) == (1, 1, "A", True)
    assert now.due == pytest.approx(dict.fromkeys(now.due, 0.15))
    later = standing(split, step(split, "A", 0.25), step(split, "B", 0.2))
    assert told(later) == (1, 2, "B", True)
    assert later.due == pytest.approx(dict.fromkeys(later.due, 0.3))


@pytest.mark.parametrize("first", FIELDS)
def test_a_step_begun_with_any_one_field_is_finished_at_that_position(
    split: Plan, first: str
) -> None:
    now = standing(split, step(split, "A", 0.25), only(split, first, "B", 0.5))
    assert told(now) == (1, 2, "B", True)
    still_due = {name for name, part in now.due.items() if part > 0}
    assert len(still_due) == (2 if first == "BRAIN" else 3)


def test_a_step_begun_elsewhere_is_finished_there(split: Plan) -> None:
    now = standing(split, step(split, "A", 0.25), only(split, "BRAIN", "C", 0.5))
    assert told(now) == (1, 2, "C", True)


def test_a_fraction_is_complete_by_the_sum_of_its_steps(split: Plan) -> None:
    short = standing(split, step(split, "A", 0.25), step(split, "B", 0.5), step(split, "C", 0.22))
    assert (short.complete, told(short)) == (0, (1, 3, "C", True))
    within = standing(split, step(split, "A", 0.25), step(split, "B", 0.5), step(split, "C", 0.24))
    assert within.complete == 1


def test_each_field_keeps_all_its_positions(split: Plan) -> None:
    rows = [*step(split, "A", 0.25), *step(split, "B", 0.5)]
    state = fraction_states(split, rows, PERCENT)[1]
    assert state.field_positions == dict.fromkeys(FIELDS, ("A", "B"))
    assert set(state.last_position.values()) == {"B"}


def test_fields_stand_at_the_step_before(split: Plan) -> None:
    def stands(fraction: int, *given: list[DeliveredBeam]) -> set[str]:
        states = fraction_states(split, [row for rows in given for row in rows], PERCENT)
        due = due_in(split, fraction, states.get(fraction), PERCENT)
        return set(last_positions(split, states, due).values())

    assert stands(1) == set()
    assert stands(1, step(split, "A", 0.25)) == {"A"}
    assert stands(1, step(split, "A", 0.25), step(split, "B", 0.5)) == {"B"}
    assert stands(2) == {"C"}
