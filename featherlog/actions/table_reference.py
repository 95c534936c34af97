"""Where the table stands in figures: one read-out that two people took gives all the others.

The read-out belongs to one field at one position; the plan knows every other place by its table
move from there. Lengths in cm: lateral, longitudinal, vertical, IEC 61217 signs.
"""

from __future__ import annotations

import json
from dataclasses import dataclass
from typing import TYPE_CHECKING

from featherlog import words
from featherlog.store.entry import Kind

if TYPE_CHECKING:
    from collections.abc import Iterable

    from featherlog.junction.plan import Plan, PositionSettings, Triple
    from featherlog.store.rows import EventRow

# After each of these a read-out from before says nothing about where the patient lies now.
_VOIDED_BY = {
    Kind.MARKS_REDRAWN: "the marks were redrawn",
    Kind.MACHINE_CHANGED: "the machine was changed",
}


@dataclass(frozen=True, slots=True)
class TableReading:
    """A read-out of the table with one field set at one position, in one fraction."""

    field: str
    position: str
    fraction: int
    lateral_cm: float
    longitudinal_cm: float
    vertical_cm: float
    revision: int
    at: str
    read_by: tuple[str, ...]

    @property
    def table_cm(self) -> Triple:
        """Return the read-out as one."""
        return (self.lateral_cm, self.longitudinal_cm, self.vertical_cm)


@dataclass(frozen=True, slots=True)
class TableReference:
    """The read-out in force, None where moves are relative only, and a phrase that says which."""

    reading: TableReading | None
    words: str


def table_reference(events: Iterable[EventRow], revision: int) -> TableReference:
    """Return the read-out in force for a revision of the design, from the events of its course.

    Another revision may lay the isocentres elsewhere, so it asks for a read-out of its own.
    """
    reading, why = None, words.RELATIVE_ONLY
    for event in events:
        if event.kind in _VOIDED_BY:
            reading = None
            why = words.relative_only_since(_VOIDED_BY[Kind(event.kind)], event.at)
        elif event.kind == Kind.TABLE_READ:
            reading = _reading(event)
    if reading is None:
        return TableReference(None, why)
    if reading.revision != revision:
        return TableReference(None, words.relative_only_since("the design was revised", reading.at))
    return TableReference(
        reading,
        f"absolute, by the read-out of {reading.field} at {reading.position} in fraction "
        f"{reading.fraction} ({reading.at}, {' and '.join(reading.read_by)})",
    )


def targets_cm(
    plan: Plan, reading: TableReading | None, now: PositionSettings
) -> dict[str, Triple]:
    """Return where the table must stand (cm) for every field at a position; empty without one."""
    if reading is None:
        return {}
    return {one.field: target_cm(plan, reading, now, one.field) for one in now.treated}


def target_cm(plan: Plan, reading: TableReading, now: PositionSettings, field: str) -> Triple:
    """Return where the table must stand (cm) for a field at a position."""
    there = place_cm(plan.position(reading.position), reading.field)
    here = place_cm(now, field)
    lateral, longitudinal, vertical = (
        round(read + to - was, 9) + 0.0
        for read, to, was in zip(reading.table_cm, here, there, strict=True)
    )
    return (lateral, longitudinal, vertical)


def place_cm(position: PositionSettings, field: str) -> Triple:
    """Return where the table has a field, against the first field's place at position A (cm)."""
    setting = next(one for one in position.fields if one.field == field)
    x, y, z = (
        one + first
        for one, first in zip(
            setting.table_from_first_field_cm, position.fields[0].table_from_a_cm, strict=True
        )
    )
    return (x, y, z)


def _reading(event: EventRow) -> TableReading:
    content = json.loads(event.content)
    return TableReading(
        field=content["field"],
        position=content["position"],
        fraction=content["fraction"],
        lateral_cm=float(content["lateral_cm"]),
        longitudinal_cm=float(content["longitudinal_cm"]),
        vertical_cm=float(content["vertical_cm"]),
        revision=content["revision"],
        at=event.at,
        read_by=tuple(content["signed_by"]),
    )
