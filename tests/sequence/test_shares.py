"""What each position's share comes to after what was delivered."""

from __future__ import annotations

from typing import TYPE_CHECKING

import pytest
from deliveries import deliver
from hypothesis import given
from hypothesis import strategies as st
from spine_course import machine, sequence, spine

from featherlog.sequence.pattern import weighted_shares
from featherlog.sequence.planning import plan_course
from featherlog.sequence.shares import shares_to_be

if TYPE_CHECKING:
    from featherlog.junction.plan import Plan


def test_thirteen_fractions_one_late_become_6_4_3() -> None:
    """Blocks of five over three positions give 5/5/3; the sixth fraction stayed at A."""
    order = sequence(positions="ABC", block_fractions=5)
    plan = plan_course(spine(fractions=13, order=order), machine())
    given_so_far = [row for n in range(1, 6) for row in deliver(plan, n)]
    assert shares_to_be(plan, given_so_far) == {"A": 5.0, "B": 5.0, "C": 3.0}
    late = deliver(plan, 6, BRAIN="A", UPPER="A", LOWER="A")
    assert shares_to_be(plan, [*given_so_far, *late]) == {"A": 6.0, "B": 4.0, "C": 3.0}


def test_a_field_left_behind_counts_for_its_part(plan: Plan) -> None:
    found = shares_to_be(plan, deliver(plan, 3, LOWER="A"))
    assert found == pytest.approx({"A": 2 + 1 / 3, "B": 1 + 2 / 3, "C": 2.0}, abs=1e-3)


def test_the_remainder_belongs_where_the_fraction_began(plan: Plan) -> None:
    begun = deliver(plan, 3, part=0.4, BRAIN="C", UPPER=None, LOWER=None)
    assert shares_to_be(plan, begun) == {"A": 2.0, "B": 1.0, "C": 3.0}


def test_what_was_given_twice_counts_once(plan: Plan) -> None:
    assert sum(shares_to_be(plan, deliver(plan, 1) * 2).values()) == pytest.approx(6)


@given(st.dictionaries(st.integers(1, 6), st.sampled_from("ABC")), st.floats(0.1, 1.0))
def test_they_add_up_to_the_prescribed_fractions(
    plan: Plan, at: dict[int, str], part: float
) -> None:
    everywhere = {number: dict.fromkeys(("BRAIN", "UPPER", "LOWER"), at[number]) for number in at}
    rows = [row for number in at for row in deliver(plan, number, part=part, **everywhere[number])]
    assert sum(shares_to_be(plan, rows).values()) == pytest.approx(6, abs=0.01)


def test_as_planned_they_are_the_planned_ones(plan: Plan) -> None:
    assert shares_to_be(plan, []) == weighted_shares(plan.fractions)
