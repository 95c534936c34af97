"""Deliveries of a spine's fields written by hand."""

from __future__ import annotations

from typing import TYPE_CHECKING

from featherlog.sequence.progress import DeliveredBeam

if TYPE_CHECKING:
    from featherlog.junction.plan import Plan

FIELDS = ("BRAIN", "UPPER", "LOWER")


def deliver(
    plan: Plan, fraction: int, *, part: float = 1.0, **at: str | None
) -> list[DeliveredBeam]:
    """Deliver a part of every field where planned, or where ``at`` says; None omits a field."""
    planned = plan.fraction(fraction).position
    return [
        DeliveredBeam(
            fraction=fraction,
            field=field.field,
            beam=beam.beam,
            position=place,
            meterset_mu=part * plan.position(place).meterset(beam.beam),
            planned_mu=plan.position(place).meterset(beam.beam),
        )
        for field in plan.positions[0].fields
        for beam in field.beams
        if (place := at.get(field.field, planned)) is not None
    ]
