"""What a record holds that differs from the plan, each with its figures.

Position is a fact of each field in each fraction. When all fields went to another position
together the departure is coherent and only the shares change; when one stayed behind it is
incoherent, and a strip as wide as the difference gets none or twice that fraction's dose for
ideal edges. The two are graded differently.
"""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise
from typing import TYPE_CHECKING

from featherlog.sequence.calendar import too_soon
from featherlog.words import figure, meterset, signed

if TYPE_CHECKING:
    from collections.abc import Iterable, Mapping, Sequence
    from datetime import datetime

    from featherlog.junction.plan import Plan
    from featherlog.sequence.progress import DeliveredBeam

COHERENT, INCOHERENT, MINOR = "coherent", "incoherent", "for review"
# A value at its tolerance is within it, whatever binary fractions make of it.
_NOISE = 1e-9


@dataclass(frozen=True, slots=True)
class Departure:
    """One departure: its kind, its grade and a sentence with its figures."""

    kind: str
    grade: str
    detail: str


@dataclass(frozen=True, slots=True)
class MeasuredGap:
    """A gap as measured (cm, + gap), beside what was expected at the delivered position."""

    junction: str
    side: str
    gap_cm: float
    expected_cm: float
    tolerance_cm: float


def position_departures(
    plan: Plan, planned: str, field_position: Mapping[str, str], shares: Mapping[str, float]
) -> tuple[Departure, ...]:
    """Return the departures of where the fields of one fraction were treated.

    ``shares`` are the fractions that each position gets in the end, this one counted.
    """
    given = set(field_position.values())
    if given <= {planned}:
        return ()
    if len(given) == 1:
        place = next(iter(given))
        become = ", ".join(f"{label} {figure(share, least=0)}" for label, share in shares.items())
        return (
            Departure(
                "other position",
                COHERENT,
                f"all fields treated at {place}, planned {planned}: shares become {become}",
            ),
        )
    where = ", ".join(f"{field} at {place}" for field, place in field_position.items())
    strips = _strips(plan, field_position)
    return (
        Departure(
            "fields apart",
            INCOHERENT,
            f"{where}, planned {planned}" + (f": {strips}" if strips else ""),
        ),
    )


def _strips(plan: Plan, field_position: Mapping[str, str]) -> str:
    fields = [field.field for field in plan.positions[0].fields]
    found = []
    for (upper, lower), junction in zip(pairwise(fields), plan.positions[0].junctions, strict=True):
        if upper not in field_position or lower not in field_position:
            continue
        above, below = (
            plan.position(field_position[name]).junction(junction.junction).offset_cm
            for name in (upper, lower)
        )
        if above != below:
            what = "no dose" if above > below else "twice the dose"
            found.append(
                f"a strip of {figure(abs(above - below))} cm at {junction.junction} got {what} of "
                "this fraction (ideal edges)"
            )
    return "; ".join(found)


def meterset_departures(
    parts: Mapping[str, float], planned_mu: Mapping[str, float], meterset_percent: float
) -> tuple[Departure, ...]:
    """Return the departures of the meterset each beam has had in this fraction so far."""
    found = []
    for beam, part in parts.items():
        percent = 100 * (part - 1)
        if abs(percent) <= meterset_percent + _NOISE:
            continue
        kind = "meterset short" if percent < 0 else "meterset over"
        planned = planned_mu[beam]
        found.append(
            Departure(
                kind,
                MINOR,
                f"beam {beam} has had {figure(part * planned, 1, 1)} of {figure(planned, 1, 1)} MU "
                f"({signed(percent, 1, 1)} %)",
            )
        )
    return tuple(found)


def expected_gap_cm(
    plan: Plan, junction: str, side: str, superior: str, inferior: str
) -> float | None:
    """Return the skin gap (cm, + gap) with the junction's two fields each at its own position.

    Each edge lies its own part of the gap from the match point, which moves with the position: for
    fields apart the gap is both parts and how far the match points are apart (derived). None where
    that skin's gap is not known at one of the positions.
    """
    above, below = (plan.position(label).junction(junction) for label in (superior, inferior))
    upper, lower = (
        next((gap for gap in setting.skin_gaps if gap.side == side), None)
        for setting in (above, below)
    )
    if upper is None or lower is None:
        return None
    parts = upper.superior_part_cm + lower.inferior_part_cm
    return parts + above.offset_cm - below.offset_cm


def gap_departures(gaps: Iterable[MeasuredGap]) -> tuple[Departure, ...]:
    """Return a departure for every measured gap outside its tolerance."""
    return tuple(
        Departure(
            "skin gap",
            MINOR,
            f"gap on the {gap.side} skin at {gap.junction} measured {signed(gap.gap_cm, 2)} cm, "
            f"expected {signed(gap.expected_cm, 2)} ± {figure(gap.tolerance_cm, 2)} cm",
        )
        for gap in gaps
        if abs(gap.gap_cm - gap.expected_cm) > gap.tolerance_cm + _NOISE
    )


def order_departures(
    fraction: int, expected: int | None, prescribed: int, *, confirmed: bool, approved: bool
) -> tuple[Departure, ...]:
    """Return the departures of which fraction was recorded and whether it was confirmed before."""
    found = []
    if not approved:
        found.append(_minor("not approved", f"fraction {fraction} was treated before approval"))
    if fraction > prescribed:
        beyond = f"fraction {fraction} is beyond the {prescribed} prescribed"
        found.append(_minor("extra fraction", beyond))
    elif fraction != expected:
        due = "no fraction was due" if expected is None else f"fraction {expected} was due"
        found.append(_minor("fraction order", f"fraction {fraction} recorded, {due}"))
    if not confirmed:
        without = f"fraction {fraction} was treated without a confirmation"
        found.append(_minor("not confirmed", without))
    return tuple(found)


def again_departures(fraction: int, delivered: Iterable[DeliveredBeam]) -> tuple[Departure, ...]:
    """Return the departure of what was delivered of a fraction that was complete already."""
    given = ", ".join(
        f"{row.beam} {meterset(row.meterset_mu)} MU" for row in delivered if row.meterset_mu
    )
    detail = f"fraction {fraction} was complete and was delivered again: {given}"
    return (_minor("extra delivery", detail),)


def halt_departures(fraction: int, halted: str) -> tuple[Departure, ...]:
    """Return the departure of a treatment while the course was ``halted``: paused or ended."""
    if not halted:
        return ()
    return (
        _minor("not to be treated", f"fraction {fraction} was treated with the course {halted}"),
    )


def interval_departures(
    fraction: int, at: datetime, others: Iterable[tuple[int, datetime]], hours: float
) -> tuple[Departure, ...]:
    """Return the departure of a fraction too near to another one, with the nearest one's figures.

    ``others`` are the number and time of every delivery; ``hours`` is the least interval.
    """
    near = [
        (between, number, when)
        for number, when in others
        if number != fraction and (between := too_soon(when, at, hours)) is not None
    ]
    if not near:
        return ()
    between, number, when = min(near)
    order = "after" if when <= at else "before"
    detail = (
        f"fraction {fraction} was treated {figure(between)} h {order} fraction {number}, at least "
        f"{figure(hours)} h are asked"
    )
    return (_minor("interval too short", detail),)


def table_departures(
    plan: Plan,
    readings_cm: Mapping[str, float],
    field_position: Mapping[str, str],
    tolerance_cm: float,
) -> tuple[Departure, ...]:
    """Return where the table moved otherwise between two fields than their isocentres lie apart.

    ``readings_cm`` are longitudinal readings of one session by field: only differences count, for
    image guidance shifts all of them alike.
    """
    planned = {name: _table_cm(plan, name, field_position[name]) for name in readings_cm}
    found = []
    for first, second in pairwise(readings_cm):
        moved = readings_cm[second] - readings_cm[first]
        asked = planned[second] - planned[first]
        if abs(moved - asked) > tolerance_cm + _NOISE:
            found.append(
                _minor(
                    "table",
                    f"from {first} to {second} the table moved {signed(moved)} cm "
                    f"(longitudinal), planned {signed(asked)} ± {figure(tolerance_cm)} cm",
                )
            )
    return tuple(found)


def _table_cm(plan: Plan, field: str, label: str) -> float:
    """Return a field's longitudinal table value at a position, from the first field's at A."""
    at_a, here = (
        next(one for one in position.fields if one.field == field)
        for position in (plan.positions[0], plan.position(label))
    )
    return at_a.table_from_first_field_cm[1] + here.table_from_a_cm[1]


def _minor(kind: str, detail: str) -> Departure:
    return Departure(kind, MINOR, detail)


def beams_by_field(delivered: Sequence[DeliveredBeam]) -> dict[str, str]:
    """Return the position of each field that received any meterset."""
    return {row.field: row.position for row in delivered if row.meterset_mu > 0}
