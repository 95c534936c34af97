"""What a departure did to the dose, for ideal edges: over the strips where fields were apart.

The match points of all positions cut a junction into strips. A strip has the dose of the superior
field wherever that field's edge lay at or below it, and of the inferior field wherever that one's
lay at or above it; fields that stood apart leave a strip between them with none or twice the dose.
No penumbra is counted, so these are bounds, not the dose at a point.
"""

from __future__ import annotations

from collections import defaultdict
from dataclasses import dataclass, replace
from itertools import pairwise
from typing import TYPE_CHECKING

from featherlog.dose.amounts import (
    delivered_amounts,
    planned_amounts,
    predicted_amounts,
    prescribed_dose_gy,
)

if TYPE_CHECKING:
    from collections.abc import Callable, Collection, Iterable, Iterator

    from featherlog.dose.amounts import Amounts
    from featherlog.junction.plan import Plan
    from featherlog.sequence.progress import DeliveredBeam

# Doses that differ by less are the same; metersets are read to 0.1 MU.
_SAME_GY = 1e-6


@dataclass(frozen=True, slots=True)
class PlaceDose:
    """The dose of one place in one fraction and in the course, given beside planned.

    ``width_cm`` is a strip's width along the axis, None for a whole field. ``fraction_percent`` is
    of what the fraction should have given, ``total_percent`` of the course's planned dose there,
    with the remaining fractions as planned. ``week_gy`` is how far the fractions of the same week
    have gone from their planned dose (+ too much).
    """

    place: str
    width_cm: float | None
    fraction_gy: float
    fraction_planned_gy: float
    fraction_percent: float
    week_gy: float
    total_gy: float
    total_planned_gy: float
    total_percent: float


@dataclass(frozen=True, slots=True)
class Given:
    """What was planned and given: in one fraction, in its week, in the whole course."""

    prescribed_gy: float
    fraction: Amounts
    fraction_planned: Amounts
    week: Amounts
    week_planned: Amounts
    total: Amounts
    total_planned: Amounts


def given_in(
    plan: Plan,
    deliveries: Collection[DeliveredBeam],
    fraction: int,
    week: Collection[int],
) -> Given:
    """Return what one fraction, the fractions of its week, and the course gave and should have."""

    def planned(numbers: Collection[int]) -> Amounts:
        kept = tuple(one for one in plan.fractions if one.number in numbers)
        return planned_amounts(replace(plan, fractions=kept))

    def delivered(numbers: Collection[int]) -> Amounts:
        return delivered_amounts(plan, (row for row in deliveries if row.fraction in numbers))

    return Given(
        prescribed_gy=prescribed_dose_gy(plan, fraction),
        fraction=delivered({fraction}),
        fraction_planned=planned({fraction}),
        week=delivered(week),
        week_planned=planned(week),
        total=predicted_amounts(plan, deliveries),
        total_planned=planned_amounts(plan),
    )


def strip_doses(
    plan: Plan, deliveries: Iterable[DeliveredBeam], fraction: int, given: Given
) -> tuple[PlaceDose, ...]:
    """Return the strips between the fields of a fraction whose dose differs from the planned."""
    stood: defaultdict[str, set[str]] = defaultdict(set)
    for row in deliveries:
        if row.fraction == fraction and row.meterset_mu > 0:
            stood[row.field].add(row.position)
    found: list[PlaceDose] = []
    for junction, (upper, lower) in zip(
        plan.positions[0].junctions, pairwise(plan.positions[0].fields), strict=True
    ):
        z_cm = {p.label: p.junction(junction.junction).match_point_cm[2] for p in plan.positions}
        ends = {z_cm[label] for name in (upper.field, lower.field) for label in stood[name]}
        between = {z for z in z_cm.values() if ends and min(ends) <= z <= max(ends)}
        beams = [{beam.beam for beam in field.beams} for field in (upper, lower)]
        found += _merged(
            _place(f"strip at {junction.junction}", high - low, _strip(z_cm, beams, low), given)
            for low, high in pairwise(sorted(between))
        )
    return tuple(found)


def field_doses(plan: Plan, given: Given) -> tuple[PlaceDose, ...]:
    """Return the fields whose dose in a fraction differs from the planned."""
    fields = plan.positions[0].treated
    places = (
        _place(field.field, None, _field({beam.beam for beam in field.beams}), given)
        for field in fields
    )
    return tuple(place for place in places if _differs(place))


def _strip(
    z_cm: dict[str, float], beams: list[set[str]], low_cm: float
) -> Callable[[Amounts], float]:
    upper, lower = beams

    def read(amounts: Amounts) -> float:
        return sum(
            dose_gy
            for (label, beam), dose_gy in amounts.items()
            if (beam in upper and z_cm[label] <= low_cm) or (beam in lower and z_cm[label] > low_cm)
        )

    return read


def _field(beams: set[str]) -> Callable[[Amounts], float]:
    def read(amounts: Amounts) -> float:
        return sum(dose_gy for (_, beam), dose_gy in amounts.items() if beam in beams)

    return read


def _place(
    name: str, width_cm: float | None, read: Callable[[Amounts], float], given: Given
) -> PlaceDose:
    fraction, planned = read(given.fraction), read(given.fraction_planned)
    total, total_planned = read(given.total), read(given.total_planned)
    return PlaceDose(
        place=name,
        width_cm=width_cm,
        fraction_gy=fraction,
        fraction_planned_gy=planned,
        fraction_percent=100 * fraction / (planned or given.prescribed_gy),
        week_gy=read(given.week) - read(given.week_planned),
        total_gy=total,
        total_planned_gy=total_planned,
        total_percent=100 * total / total_planned,
    )


def _differs(place: PlaceDose) -> bool:
    return abs(place.fraction_gy - place.fraction_planned_gy) > _SAME_GY


def _merged(places: Iterable[PlaceDose]) -> Iterator[PlaceDose]:
    """Yield strips that differ from the plan, neighbours with the same doses as one."""
    last: PlaceDose | None = None
    for place in places:
        if last is not None and replace(place, width_cm=last.width_cm) == last:
            last = replace(last, width_cm=(last.width_cm or 0.0) + (place.width_cm or 0.0))
            continue
        if last is not None and _differs(last):
            yield last
        last = place
    if last is not None and _differs(last):
        yield last
