"""However a course is broken off and taken up again, its counts add up."""

from __future__ import annotations

from collections import Counter

from deliveries import FIELDS, deliver
from hypothesis import given
from hypothesis import strategies as st
from spine_course import machine, sequence, spine

from featherlog.sequence.gate import unequal_sides
from featherlog.sequence.planning import plan_course
from featherlog.sequence.progress import DeliveredBeam, fraction_states, progress

PLAN = plan_course(
    spine(fractions=6, order=sequence(positions="ABC", block_fractions=2)), machine()
)
# What is delivered of the next fraction before it is broken off, and at which position it begins.
session = st.tuples(st.sampled_from([0.25, 0.5, 1.0]), st.sampled_from("ABC"))


@given(st.lists(session, max_size=20))
def test_position_counts_add_up_to_the_fractions_delivered(
    sessions: list[tuple[float, str]],
) -> None:
    rows: list[DeliveredBeam] = []
    begun: dict[int, tuple[str, float]] = {}
    for part, asked in sessions:
        states = fraction_states(PLAN, rows, 2.0)
        now = progress(PLAN, states, 2.0)
        if now.next_fraction is None:
            break
        before, had = begun.get(now.next_fraction, (asked, 0.0))
        assert now.part_delivered == (had > 0)
        if had > 0:
            assert now.position == before
        given_part = min(part, 1 - had)
        begun[now.next_fraction] = (before, had + given_part)
        where = dict.fromkeys(FIELDS, before)
        rows += deliver(PLAN, now.next_fraction, part=given_part, **where)
    states = fraction_states(PLAN, rows, 2.0)
    now = progress(PLAN, states, 2.0)
    counts = Counter(state.began_at for state in states.values() if state.complete)
    assert sum(counts.values()) == now.complete <= len(PLAN.fractions)
    assert now.complete == sum(had == 1 for _, had in begun.values())
    # Fields that were always treated together never stop a shift.
    assert now.part_delivered or unequal_sides(PLAN, states, now.complete + 1, 2.0) == ()
