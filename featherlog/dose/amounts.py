"""How much dose each beam gives at each position: planned, delivered, predicted, unfeathered.

A course has few distinct geometries, so its dose is each geometry's profile weighted by the sum
kept here. Nothing is scaled by a mean: a field that stayed behind keeps its own sum.
"""

from __future__ import annotations

from collections import defaultdict
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Iterable, Iterator, Mapping

    from featherlog.junction.plan import BeamSetting, Plan
    from featherlog.sequence.progress import DeliveredBeam

Amounts = dict[tuple[str, str], float]
"""Gy through each beam at each position, keyed by position label and beam name."""

_Part = tuple[tuple[str, str], float]


def prescribed_dose_gy(plan: Plan, fraction: int) -> float:
    """Return a fraction's dose (Gy); one beyond the prescribed number has the last one's dose."""
    return plan.fraction(min(fraction, len(plan.fractions))).dose_gy


def fraction_amounts(plan: Plan, position: str, dose_gy: float) -> Amounts:
    """Return what a fraction of ``dose_gy`` at one position gives through each beam.

    A field with its own dose per fraction gets that; one of an earlier course gets nothing.
    """
    return {
        (position, beam.beam): (
            dose_gy if field.dose_per_fraction_gy is None else field.dose_per_fraction_gy
        )
        * beam.weight
        for field in plan.position(position).treated
        for beam in field.beams
    }


def earlier_amounts(plan: Plan) -> Amounts:
    """Return what the fields of an earlier course gave, whole; they never move."""
    first = plan.positions[0]
    return {
        (first.label, beam.beam): field.earlier_dose_gy * beam.weight
        for field in first.fields
        if field.earlier_course
        for beam in field.beams
    }


def planned_amounts(plan: Plan) -> Amounts:
    """Return what the plan gives when every fraction is delivered as planned."""
    return _total(
        (key, step.weight * dose_gy)
        for fraction in plan.fractions
        for step in fraction.steps
        for key, dose_gy in fraction_amounts(plan, step.position, fraction.dose_gy).items()
    )


def unfeathered_amounts(plan: Plan) -> Amounts:
    """Return what the same fractions give when the junctions never leave the first position."""
    first = plan.positions[0].label
    return _total(
        part
        for fraction in plan.fractions
        for part in fraction_amounts(plan, first, fraction.dose_gy).items()
    )


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
    complete = _complete(plan, _parts_by_fraction(deliveries), meterset_tolerance_percent)
    return sum(fraction.dose_gy for fraction in plan.fractions if fraction.number in complete)


def has_unfinished(
    plan: Plan, deliveries: Iterable[DeliveredBeam], meterset_tolerance_percent: float
) -> bool:
    """Tell whether a fraction was begun and is not complete, prescribed or not."""
    parts = _parts_by_fraction(deliveries)
    begun = {number for number, _ in parts}
    return begun != _complete(plan, parts, meterset_tolerance_percent)


def _complete(
    plan: Plan, parts: Mapping[tuple[int, str], float], meterset_tolerance_percent: float
) -> set[int]:
    enough = 1.0 - meterset_tolerance_percent / 100.0 - 1e-9
    return {
        number
        for number in {number for number, _ in parts}
        if all(parts.get((number, beam.beam), 0.0) >= enough for beam in _beams(plan))
    }


def _delivered_parts(plan: Plan, deliveries: Iterable[DeliveredBeam]) -> Iterator[_Part]:
    for given in deliveries:
        key = (given.position, given.beam)
        whole = fraction_amounts(plan, given.position, prescribed_dose_gy(plan, given.fraction))
        yield key, whole[key] * given.part


def _remaining_parts(plan: Plan, deliveries: tuple[DeliveredBeam, ...]) -> Iterator[_Part]:
    parts = _parts_by_fraction(deliveries)
    began = {given.fraction: given.position for given in reversed(deliveries)}
    for fraction in plan.fractions:
        end = 0.0
        for step in fraction.steps:
            start, end = end, end + step.weight
            # A whole fraction once begun is finished where it began.
            whole = len(fraction.steps) == 1
            position = began.get(fraction.number, step.position) if whole else step.position
            for key, dose_gy in fraction_amounts(plan, position, fraction.dose_gy).items():
                given = parts[fraction.number, key[1]]
                yield key, dose_gy * max(0.0, end - max(start, given))


def _parts_by_fraction(deliveries: Iterable[DeliveredBeam]) -> defaultdict[tuple[int, str], float]:
    parts: defaultdict[tuple[int, str], float] = defaultdict(float)
    for given in deliveries:
        parts[given.fraction, given.beam] += given.part
    return parts


def _beams(plan: Plan) -> Iterator[BeamSetting]:
    return (beam for field in plan.positions[0].treated for beam in field.beams)


def _total(parts: Iterable[_Part]) -> Amounts:
    total: Amounts = {}
    for key, dose_gy in parts:
        total[key] = total.get(key, 0.0) + dose_gy
    return total
