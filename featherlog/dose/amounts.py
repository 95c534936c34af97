"""How much dose each beam gives at each position: planned, delivered, predicted, unfeathered.

A course has few distinct geometries, so its dose is each geometry's profile weighted by the sum
kept here. Nothing is scaled by a mean: a field that stayed behind keeps its own sum.
"""

from __future__ import annotations

from collections import defaultdict
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Iterable, Iterator

    from featherlog.junction.plan import BeamSetting, Plan
    from featherlog.sequence.progress import DeliveredBeam

Amounts = dict[tuple[str, str], float]
"""Gy through each beam at each position, keyed by position label and beam name."""

_Part = tuple[tuple[str, str], float]


def prescribed_dose_gy(plan: Plan, fraction: int) -> float:
    """Return a fraction's dose (Gy); one beyond the prescribed number has the last one's dose."""
    return plan.fraction(min(fraction, len(plan.fractions))).dose_gy


def fraction_amounts(plan: Plan, position: str, dose_gy: float) -> Amounts:
    """Return what ``dose_gy`` to every field at one position gives through each beam."""
    return {(position, beam.beam): dose_gy * beam.weight for beam in _beams(plan, position)}


def planned_amounts(plan: Plan) -> Amounts:
    """Return what the plan gives when every fraction is delivered as planned."""
    return _total(
        part
        for fraction in plan.fractions
        for part in fraction_amounts(plan, fraction.position, fraction.dose_gy).items()
    )


def unfeathered_amounts(plan: Plan) -> Amounts:
    """Return what the same fractions give when the junctions never leave the first position."""
    whole_gy = sum(fraction.dose_gy for fraction in plan.fractions)
    return fraction_amounts(plan, plan.positions[0].label, whole_gy)


def delivered_amounts(plan: Plan, deliveries: Iterable[DeliveredBeam]) -> Amounts:
    """Return what was delivered so far, each beam at the position it was truly delivered at.

    Fractions beyond the prescribed number add their dose too.
    """
    return _total(_delivered_parts(plan, deliveries))


def predicted_amounts(plan: Plan, deliveries: Iterable[DeliveredBeam]) -> Amounts:
    """Return what was delivered and what remains of the plan.

    What is missing from a beam in a prescribed fraction is still to come, at the planned position;
    a fraction once begun is finished at the position of its first delivery.
    """
    given = tuple(deliveries)
    return _total((*_delivered_parts(plan, given), *_remaining_parts(plan, given)))


def completed_dose_gy(
    plan: Plan, deliveries: Iterable[DeliveredBeam], meterset_tolerance_percent: float
) -> float:
    """Return the prescribed dose (Gy) of the prescribed fractions that are complete.

    A fraction is complete when each of its beams has its planned meterset within the tolerance.
    """
    parts = _parts_by_fraction(deliveries)
    enough = 1.0 - meterset_tolerance_percent / 100.0 - 1e-9
    return sum(
        fraction.dose_gy
        for fraction in plan.fractions
        if all(
            parts[fraction.number, beam.beam] >= enough for beam in _beams(plan, fraction.position)
        )
    )


def _delivered_parts(plan: Plan, deliveries: Iterable[DeliveredBeam]) -> Iterator[_Part]:
    for given in deliveries:
        key = (given.position, given.beam)
        whole = fraction_amounts(plan, given.position, prescribed_dose_gy(plan, given.fraction))
        yield key, whole[key] * given.part


def _remaining_parts(plan: Plan, deliveries: tuple[DeliveredBeam, ...]) -> Iterator[_Part]:
    parts = _parts_by_fraction(deliveries)
    began = {given.fraction: given.position for given in reversed(deliveries)}
    for fraction in plan.fractions:
        position = began.get(fraction.number, fraction.position)
        for key, whole_gy in fraction_amounts(plan, position, fraction.dose_gy).items():
            missing = max(0.0, 1.0 - parts[fraction.number, key[1]])
            yield key, whole_gy * missing


def _parts_by_fraction(deliveries: Iterable[DeliveredBeam]) -> defaultdict[tuple[int, str], float]:
    parts: defaultdict[tuple[int, str], float] = defaultdict(float)
    for given in deliveries:
        parts[given.fraction, given.beam] += given.part
    return parts


def _beams(plan: Plan, position: str) -> Iterator[BeamSetting]:
    return (beam for field in plan.position(position).fields for beam in field.beams)


def _total(parts: Iterable[_Part]) -> Amounts:
    total: Amounts = {}
    for key, dose_gy in parts:
        total[key] = total.get(key, 0.0) + dose_gy
    return total
