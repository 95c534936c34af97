"""How often each strip of a junction was covered: a count, not a dose.

The match points of all positions cut the junction into strips. In a complete fraction every strip
between the outermost positions is covered exactly once, at match depth and to the planned
separation; a strip covered by no field, or by both, is what an incoherent fraction leaves behind.
"""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Iterable

    from featherlog.junction.plan import Plan
    from featherlog.sequence.progress import DeliveredBeam


@dataclass(frozen=True, slots=True)
class Strip:
    """One strip between neighbouring match points, ``low_cm`` to ``high_cm`` along the axis.

    ``expected`` is how many fractions' worth of field should have covered it so far: one for every
    fraction begun, by its meterset. ``covered`` is how many did.
    """

    junction: str
    low_cm: float
    high_cm: float
    expected: float
    covered: float


def strip_counts(plan: Plan, delivered: Iterable[DeliveredBeam]) -> tuple[Strip, ...]:
    """Return every strip of every junction with what has covered it, parts of fractions counted.

    Each delivery counts its beam's weight times the delivered part of its meterset: half of it to
    each junction's expectation, so that a fraction of both fields expects one.
    """
    rows = list(delivered)
    first = plan.positions[0]
    weight = {beam.beam: beam.weight for field in first.fields for beam in field.beams}
    strips = []
    for setting, (upper, lower) in zip(first.junctions, pairwise(first.fields), strict=True):
        if upper.earlier_course or lower.earlier_course:
            continue
        at = {p.label: p.junction(setting.junction).match_point_cm[2] for p in plan.positions}
        given = [
            (row.field == upper.field, at[row.position], weight[row.beam] * row.part)
            for row in rows
            if row.field in (upper.field, lower.field)
        ]
        expected = sum(part for _, _, part in given) / 2
        for low, high in pairwise(sorted(set(at.values()))):
            covered = sum(
                part for above, edge, part in given if (edge <= low if above else edge >= high)
            )
            strips.append(Strip(setting.junction, low, high, expected, covered))
    return tuple(strips)
