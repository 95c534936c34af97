"""A revised plan goes on from what was delivered, or says why it cannot."""

from __future__ import annotations

from typing import TYPE_CHECKING

import pytest
from deliveries import deliver
from spine_course import beam, junction, machine, pair, sequence, spine

from featherlog.sequence.planning import plan_course
from featherlog.sequence.progress import FractionState, fraction_states
from featherlog.sequence.revision import continued, revision_faults, unfinished_faults

if TYPE_CHECKING:
    from featherlog.junction.plan import Plan


def revised(
    positions: str = "ABC", *, offsets_cm: tuple[float, ...] = (0.0, -1.0, -2.0), fractions: int = 6
) -> Plan:
    order = sequence(positions=positions, block_fractions=2)
    return plan_course(spine(offsets_cm=offsets_cm, fractions=fractions, order=order), machine())


def states(plan: Plan, *numbers: int, **at: str | None) -> dict[int, FractionState]:
    rows = [row for number in numbers for row in deliver(plan, number, **at)]
    return fraction_states(plan, rows, 2.0)


def test_begun_fractions_stay_as_they_were_planned(plan: Plan) -> None:
    merged = continued(plan, revised("CBA"), states(plan, 1, 2, 3))
    assert "".join(fraction.position for fraction in merged.fractions) == "AABBAA"
    assert [position.label for position in merged.positions] == ["A", "B", "C"]


@pytest.mark.parametrize("at", [{}, {"BRAIN": "A", "UPPER": "A", "LOWER": "A"}])
def test_a_position_that_is_dropped_is_kept_for_its_fractions(
    plan: Plan, at: dict[str, str]
) -> None:
    """Planned at C, whether or not it was treated there."""
    done, new = states(plan, 5, **at), revised("AB", offsets_cm=(0.0, -1.0))
    assert [*revision_faults(plan, new, done)] == []
    merged = continued(plan, new, done)
    assert merged.fraction(5).position == "C"
    assert merged.position("C") == plan.position("C")


def test_a_label_keeps_its_place_once_treated(plan: Plan) -> None:
    moved = revised(offsets_cm=(0.0, -1.5, -2.0))
    assert [*revision_faults(plan, moved, states(plan, 1))] == []
    (fault,) = revision_faults(plan, moved, states(plan, 3))
    assert fault == (
        "position B of the fractions begun so far has other settings; give the new position a "
        "label of its own"
    )


def test_a_course_is_not_cut_below_what_was_treated(plan: Plan) -> None:
    assert [
        *revision_faults(plan, revised("AB", offsets_cm=(0.0, -1.0), fractions=4), states(plan, 5))
    ] == ["fraction 5 has been treated, but the revised design prescribes only 4"]


def test_other_fields_are_another_course(plan: Plan) -> None:
    fewer = plan_course(
        pair(
            [beam("upper", 180, (0, 0, 14))],
            [beam("lower", 180, (0, 0, -15))],
            junction("J", (0, 0, 0), 5.0),
        ),
        machine(),
    )
    (fault,) = revision_faults(plan, fewer, states(plan, 1))
    assert fault.startswith("a course that has begun keeps its fields and beams")


def test_a_begun_fraction_is_finished_first(plan: Plan) -> None:
    assert [*unfinished_faults(states(plan, 1))] == []
    assert [*unfinished_faults(states(plan, 2, LOWER=None))] == [
        "fraction 2 was begun and not finished; finish it before revising"
    ]
