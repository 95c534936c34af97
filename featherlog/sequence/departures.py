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

from featherlog.words import figure

if TYPE_CHECKING:
    from collections.abc import Iterable, Mapping, Sequence

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
    plan: Plan, planned: str, field_position: Mapping[str, str]
) -> tuple[Departure, ...]:
    """Return the departures of where the fields of one fraction were treated."""
    given = set(field_position.values())
    if given <= {planned}:
        return ()
    if len(given) == 1:
        place = next(iter(given))
        return (
            Departure(
                "other position",
                COHERENT,
                f"all fields treated at {place}, planned {planned}: the shares change",
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
                f"beam {beam} has had {part * planned:.1f} of {planned:.1f} MU ({percent:+.1f} %)",
            )
        )
    return tuple(found)


def gap_departures(gaps: Iterable[MeasuredGap]) -> tuple[Departure, ...]:
    """Return a departure for every measured gap outside its tolerance."""
    return tuple(
        Departure(
            "skin gap",
            MINOR,
            f"gap on the {gap.side} skin at {gap.junction} measured {gap.gap_cm:+.2f} cm, expected "
            f"{gap.expected_cm:+.2f} ± {gap.tolerance_cm:.2f} cm",
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
        found.append(
            Departure("not approved", MINOR, f"fraction {fraction} was treated before approval")
        )
    if fraction > prescribed:
        found.append(
            Departure(
                "extra fraction",
                MINOR,
                f"fraction {fraction} is beyond the {prescribed} prescribed",
            )
        )
    elif fraction != expected:
        due = "no fraction was due" if expected is None else f"fraction {expected} was due"
        found.append(Departure("fraction order", MINOR, f"fraction {fraction} recorded, {due}"))
    if not confirmed:
        found.append(
            Departure(
                "not confirmed", MINOR, f"fraction {fraction} was treated without a confirmation"
            )
        )
    return tuple(found)


def beams_by_field(delivered: Sequence[DeliveredBeam]) -> dict[str, str]:
    """Return the position of each field that received any meterset."""
    return {row.field: row.position for row in delivered if row.meterset_mu > 0}
