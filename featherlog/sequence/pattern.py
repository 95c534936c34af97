"""Which position each fraction gets, and what that makes of the course."""

from __future__ import annotations

from collections import Counter
from dataclasses import dataclass
from itertools import cycle, groupby, islice
from typing import TYPE_CHECKING

from featherlog.junction.design import Pattern

if TYPE_CHECKING:
    from collections.abc import Sequence

    from featherlog.junction.design import SequencePattern


@dataclass(frozen=True, slots=True)
class Block:
    """Consecutive fractions, first to last, at one position."""

    first: int
    last: int
    position: str


def assign(sequence: SequencePattern, fractions: int) -> tuple[str, ...]:
    """Return the position of every fraction, counted from 1.

    Blocks and daily cycling start again at the first position when the order is used up.
    """
    if sequence.pattern is Pattern.LIST:
        return sequence.positions
    length = sequence.block_fractions if sequence.pattern is Pattern.BLOCKS else 1
    order = (label for label in cycle(sequence.positions) for _ in range(length or 1))
    return tuple(islice(order, fractions))


def blocks(positions: Sequence[str]) -> tuple[Block, ...]:
    """Return the runs of consecutive fractions at one position."""
    found = []
    first = 1
    for label, run in groupby(positions):
        last = first + len(list(run)) - 1
        found.append(Block(first, last, label))
        first = last + 1
    return tuple(found)


def shift_fractions(positions: Sequence[str]) -> tuple[int, ...]:
    """Return the fractions whose position differs from the one before (the shift days)."""
    return tuple(block.first for block in blocks(positions)[1:])


def shares(positions: Sequence[str]) -> dict[str, int]:
    """Return how many fractions each position gets, in order of first use."""
    return dict(Counter(positions))


def even_block(positions: Sequence[str]) -> int | None:
    """Return the longest block length that gives every position the same share, if there is one."""
    count = len(set(positions))
    return len(positions) // count if len(positions) % count == 0 else None
