from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

import pytest
from spine_course import sequence, spine

from featherlog.junction.design import Pattern, Phase
from featherlog.junction.plan import FractionStep, PlannedFraction
from featherlog.sequence.pattern import (
    Block,
    assign,
    blocks,
    evener_blocks,
    shares,
    shift_fractions,
    weighted_shares,
)
from featherlog.sequence.planning import plan_fractions

if TYPE_CHECKING:
    from featherlog.junction.design import SequencePattern


def labels(order: SequencePattern, fractions: int) -> str:
    """Return the position of every fraction, each of one step."""
    return "".join(step.position for (step,) in assign(order, [1.8] * fractions))


@pytest.mark.parametrize(
    ("pattern", "positions", "length", "expected"),
    [
        (Pattern.BLOCKS, "ABC", 2, "AABBCCA"),
        (Pattern.DAILY, "ABC", None, "ABCABCA"),
        (Pattern.LIST, "ACCBABA", None, "ACCBABA"),
        (Pattern.NO_SHIFT, "B", None, "BBBBBBB"),
    ],
)
def test_each_pattern_assigns_every_fraction(
    pattern: Pattern, positions: str, length: int | None, expected: str
) -> None:
    assert labels(sequence(pattern, positions, length), 7) == expected


@pytest.mark.parametrize(
    ("fractions", "length", "expected"),
    [
        (13, 5, (5, 5, 3)),
        (13, None, (5, 4, 4)),
        (20, 5, (10, 5, 5)),
        (20, None, (7, 7, 6)),
        (21, 5, (10, 6, 5)),
        (21, 7, (7, 7, 7)),
    ],
)
def test_shares_of_three_positions(
    fractions: int, length: int | None, expected: tuple[int, ...]
) -> None:
    pattern = Pattern.BLOCKS if length else Pattern.DAILY
    counted = shares(labels(sequence(pattern, "ABC", length), fractions))
    assert counted == dict(zip("ABC", expected, strict=True))


def _fractions(*steps: str) -> list[PlannedFraction]:
    return [
        PlannedFraction(n, "one", 2.0, tuple(FractionStep(label, 1 / len(each)) for label in each))
        for n, each in enumerate(steps, start=1)
    ]


def test_a_split_fraction_shifts_within_itself() -> None:
    assert shift_fractions(_fractions("A", "A", "AB", "B", "BA")) == (3, 5)


def test_blocks_and_the_fractions_that_shift() -> None:
    assert blocks("AABBBA") == (Block(1, 2, "A"), Block(3, 5, "B"), Block(6, 6, "A"))
    assert shift_fractions(_fractions("A", "A", "B", "B", "B", "A")) == (3, 6)
    assert shift_fractions(_fractions("A", "A", "A")) == ()


@pytest.mark.parametrize(
    ("fractions", "length", "lengths"),
    [
        # 10/5/5 becomes 7/7/6: the first position keeps its two blocks.
        (20, 5, "A4 B7 C6 A3"),
        # 10/6/5 becomes 7/7/7.
        (21, 5, "A4 B4 C7 A3 B3"),
        (13, 5, "A5 B4 C4"),
        (21, 7, None),
        (20, 1, None),
    ],
)
def test_evener_blocks_of_as_many_shift_days(
    fractions: int, length: int, lengths: str | None
) -> None:
    given = labels(sequence(positions="ABC", block_fractions=length), fractions)
    found = evener_blocks(given)
    assert shown(found) == lengths
    if found is not None:
        assert len(found) == len(blocks(given))
        assert found[-1].last == fractions
        counts = shares("".join(b.position * (b.last - b.first + 1) for b in found)).values()
        assert max(counts) - min(counts) <= 1


def shown(found: tuple[Block, ...] | None) -> str | None:
    if found is None:
        return None
    return " ".join(f"{block.position}{block.last - block.first + 1}" for block in found)


@pytest.mark.parametrize(
    ("dose_gy", "block_gy", "length"),
    [
        (1.8, 9.0, 5),
        # A dose that does not divide is reached, not approached: 5 × 2 = 10 Gy before the move.
        (2.0, 9.0, 5),
        (1.5, 9.0, 6),
        (1.6, 9.0, 6),
        (0.1, 0.3, 3),
    ],
)
def test_by_dose_the_junction_moves_once_a_position_has_had_its_dose(
    dose_gy: float, block_gy: float, length: int
) -> None:
    order = replace(sequence(Pattern.DOSE, "ABC", None), block_dose_gy=block_gy)
    given = assign(order, [dose_gy] * (2 * length + 1))
    assert [step.position for (step,) in given] == [*"A" * length, *"B" * length, "C"]


def test_by_dose_each_fraction_counts_with_its_own_dose() -> None:
    order = replace(sequence(Pattern.DOSE, "AB", None), block_dose_gy=6.0)
    given = assign(order, [2.0, 2.0, 2.0, 3.0, 3.0, 3.0])
    assert "".join(step.position for (step,) in given) == "AAABBA"


def test_split_gives_every_fraction_at_every_position_by_weight() -> None:
    order = replace(sequence(Pattern.SPLIT, "ABC", None), weights=(1.0, 2.0, 1.0))
    steps = (FractionStep("A", 0.25), FractionStep("B", 0.5), FractionStep("C", 0.25))
    assert assign(order, [1.8] * 3) == [steps] * 3
    fractions = plan_fractions(spine(fractions=6, order=order))
    assert {fraction.position for fraction in fractions} == {"A+B+C"}
    assert weighted_shares(fractions) == pytest.approx({"A": 1.5, "B": 3.0, "C": 1.5})


@pytest.mark.parametrize(("restart", "expected"), [(False, "AABB" + "CC"), (True, "AABB" + "AA")])
def test_the_order_begins_again_with_a_phase_when_asked(restart: bool, expected: str) -> None:
    order = replace(sequence(positions="ABC", block_fractions=2), restart_each_phase=restart)
    phases = (Phase("first", 4, 1.8), Phase("boost", 2, 2.0))
    fractions = plan_fractions(replace(spine(order=order), phases=phases))
    assert "".join(fraction.position for fraction in fractions) == expected
    assert [(f.number, f.phase, f.dose_gy) for f in fractions[3:5]] == [
        (4, "first", 1.8),
        (5, "boost", 2.0),
    ]


def test_fraction_numbers_and_doses_run_through_the_course() -> None:
    fractions = plan_fractions(
        spine(fractions=6, order=sequence(positions="ABC", block_fractions=2))
    )
    assert [(f.number, f.position, f.dose_gy) for f in fractions] == [
        (number, position, 1.8) for number, position in enumerate("AABBCC", start=1)
    ]
