from __future__ import annotations

import pytest
from deliveries import deliver
from hypothesis import given
from hypothesis import strategies as st
from spine_course import machine, spine

from featherlog.sequence.planning import plan_course
from featherlog.sequence.strips import strip_counts

PLAN = plan_course(spine(), machine())
LABELS = [position.label for position in PLAN.positions]


@given(st.lists(st.sampled_from(LABELS), min_size=1, max_size=8))
def test_fields_that_go_together_cover_every_strip_once_in_each_fraction(labels: list[str]) -> None:
    rows = [
        row
        for number, label in enumerate(labels, start=1)
        for row in deliver(PLAN, number, BRAIN=label, UPPER=label, LOWER=label)
    ]
    for strip in strip_counts(PLAN, rows):
        assert strip.covered == pytest.approx(len(labels))
        assert strip.expected == pytest.approx(len(labels))


def test_a_field_left_behind_leaves_a_strip_uncovered_or_covered_twice() -> None:
    first, second = LABELS[:2]
    behind = deliver(PLAN, 1, BRAIN=first, UPPER=second, LOWER=second)
    ahead = deliver(PLAN, 1, BRAIN=second, UPPER=first, LOWER=first)
    offsets = [p.junctions[0].match_point_cm[2] for p in PLAN.positions[:2]]
    between = (min(offsets), max(offsets))

    def counts(rows: list[object]) -> dict[tuple[float, float], float]:
        name = PLAN.positions[0].junctions[0].junction
        return {
            (s.low_cm, s.high_cm): s.covered
            for s in strip_counts(PLAN, rows)  # type: ignore[arg-type] - rows of the helper above
            if s.junction == name
        }

    assert sorted((counts(behind)[between], counts(ahead)[between])) == pytest.approx([0.0, 2.0])
