"""Which position each fraction gets, and what that makes of the course."""

from __future__ import annotations

from collections import Counter
from dataclasses import dataclass
from itertools import cycle, groupby, islice
from typing import TYPE_CHECKING

from featherlog.junction.design import Pattern
from featherlog.junction.plan import FractionStep

if TYPE_CHECKING:
    from collections.abc import Iterator, Sequence

    from featherlog.junction.design import SequencePattern
    from featherlog.junction.plan import PlannedFraction


@dataclass(frozen=True, slots=True)
class Block:
    """Consecutive fractions, first to last, at one position."""

    first: int
    last: int
    position: str


def assign(sequence: SequencePattern, doses_gy: Sequence[float]) -> list[tuple[FractionStep, ...]]:
    """Return the steps of every fraction, given each fraction's dose (Gy).

    Blocks and daily cycling start again at the first position when the order is used up.
    """
    if sequence.pattern is Pattern.SPLIT:
        whole = sum(sequence.weights)
        steps = tuple(
            FractionStep(label, weight / whole)
            for label, weight in zip(sequence.positions, sequence.weights, strict=True)
        )
        return [steps] * len(doses_gy)
    return [(FractionStep(label, 1.0),) for label in _labels(sequence, doses_gy)]


def _labels(sequence: SequencePattern, doses_gy: Sequence[float]) -> Iterator[str]:
    if sequence.pattern is Pattern.LIST:
        return iter(sequence.positions)
    if sequence.pattern is Pattern.DOSE:
        return _by_dose(sequence.positions, doses_gy, sequence.block_dose_gy or 0.0)
    length = sequence.block_fractions if sequence.pattern is Pattern.BLOCKS else 1
    order = (label for label in cycle(sequence.positions) for _ in range(length or 1))
    return islice(order, len(doses_gy))


def _by_dose(order: Sequence[str], doses_gy: Sequence[float], block_gy: float) -> Iterator[str]:
    labels, given = cycle(order), 0.0
    label = next(labels)
    for dose in doses_gy:
        if given >= block_gy - 1e-9:
            label, given = next(labels), 0.0
        given += dose
        yield label


def blocks(positions: Sequence[str]) -> tuple[Block, ...]:
    """Return the runs of consecutive fractions at one position."""
    found = []
    first = 1
    for label, run in groupby(positions):
        last = first + len(list(run)) - 1
        found.append(Block(first, last, label))
        first = last + 1
    return tuple(found)


def shift_fractions(fractions: Sequence[PlannedFraction]) -> tuple[int, ...]:
    """Return the numbers of the fractions on which a position changes (the shift days).

    It changes against the fraction before, or within a fraction that is split over positions.
    """
    before = fractions[0].steps[0].position
    found = []
    for fraction in fractions:
        if any(step.position != before for step in fraction.steps):
            found.append(fraction.number)
        before = fraction.steps[-1].position
    return tuple(found)


def shares(positions: Sequence[str]) -> dict[str, int]:
    """Return how many fractions each position gets, in order of first use."""
    return dict(Counter(positions))


def weighted_shares(fractions: Sequence[PlannedFraction]) -> dict[str, float]:
    """Return how many fractions each position gets, parts of split fractions counted as such."""
    found: dict[str, float] = {}
    for fraction in fractions:
        for step in fraction.steps:
            found[step.position] = found.get(step.position, 0.0) + step.weight
    return found


def evener_blocks(positions: Sequence[str]) -> tuple[Block, ...] | None:
    """Return blocks in the same order, with as many shift days, whose shares are more even.

    Each position's share is made as equal as whole fractions allow and spread evenly over its
    blocks. None where no such blocks are more even than those given.
    """
    runs = [block.position for block in blocks(positions)]
    labels = list(dict.fromkeys(runs))
    share = dict(zip(labels, _spread(len(positions), len(labels)), strict=True))
    if any(share[label] < runs.count(label) for label in labels):
        return None
    lengths = {label: iter(_spread(share[label], runs.count(label))) for label in labels}
    better = [label for label in runs for _ in range(next(lengths[label]))]
    return blocks(better) if _unevenness(better) < _unevenness(positions) else None


def _spread(whole: int, parts: int) -> list[int]:
    return [whole // parts + (index < whole % parts) for index in range(parts)]


def _unevenness(positions: Sequence[str]) -> int:
    counts = shares(positions).values()
    return max(counts) - min(counts)
