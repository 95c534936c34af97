"""What each position's share comes to, once what was delivered differs from the plan."""

from __future__ import annotations

from collections import defaultdict
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Iterable, Mapping

    from featherlog.junction.plan import Plan, PlannedFraction
    from featherlog.sequence.progress import DeliveredBeam


def shares_to_be(plan: Plan, delivered: Iterable[DeliveredBeam]) -> dict[str, float]:
    """Return how many prescribed fractions each position gets: as delivered, the rest as planned.

    Every field of a fraction counts alike, and a beam by its weight in its field. The remainder of
    a broken fraction belongs where the fraction began. Extra fractions do not count.
    """
    treated = plan.positions[0].treated
    weight = {beam.beam: beam.weight / len(treated) for field in treated for beam in field.beams}
    given: dict[int, dict[str, float]] = defaultdict(dict)
    for row in delivered:
        parts = given[row.fraction]
        parts[row.position] = parts.get(row.position, 0.0) + row.part * weight[row.beam]
    found = dict.fromkeys((position.label for position in plan.positions), 0.0)
    for fraction in plan.fractions:
        for label, part in _parts(fraction, given.get(fraction.number, {})).items():
            found[label] += part
    return {label: round(part, 3) for label, part in found.items() if round(part, 3) > 0}


def _parts(fraction: PlannedFraction, given: Mapping[str, float]) -> dict[str, float]:
    total = sum(given.values())
    parts = {label: part / max(1.0, total) for label, part in given.items()}
    end = 0.0
    for step in fraction.steps:
        end += step.weight
        missing = min(step.weight, max(0.0, end - total))
        split = len(fraction.steps) > 1
        place = step.position if split else next(iter(given), step.position)
        parts[place] = parts.get(place, 0.0) + missing
    return parts
