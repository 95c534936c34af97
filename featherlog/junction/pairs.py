"""The mismatch of two fields at a point, over every pair of their beams."""

from __future__ import annotations

from itertools import product
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Iterable

    from featherlog.geometry.patient import Point
    from featherlog.junction.placing import PlacedField


def pair_mismatches(upper: PlacedField, lower: PlacedField, point: Point) -> list[float]:
    """Return the mismatch (cm, + gap) at a point for every pair of a superior and inferior beam."""
    x, y = point[:2]
    ends = [beam.inferior_edge.z_at(x, y) for beam in upper.beams]
    starts = [beam.superior_edge.z_at(x, y) for beam in lower.beams]
    return [end - start for end, start in product(ends, starts)]


def worst(values: Iterable[float]) -> float:
    """Return the value farthest from zero, with its sign; a tie goes to the gap."""
    return max(values, key=lambda value: (round(abs(value), 9), value))
