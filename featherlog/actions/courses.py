"""The list of courses."""

from __future__ import annotations

from dataclasses import dataclass

from featherlog.actions.desk import at_desk
from featherlog.store import queries


@dataclass(frozen=True, slots=True)
class CourseLine:
    """One course in the list."""

    course: str
    patient_name: str
    site: str
    machine: str
    state: str
    fractions: int
    fractions_complete: int
    open_departures: int


def list_courses(database: str | None) -> tuple[CourseLine, ...]:
    """Return every course, by key."""
    with at_desk(database) as desk:
        rows = queries.courses(desk.connection)
    return tuple(
        CourseLine(
            row.key,
            row.patient_name,
            row.site,
            row.machine,
            row.state,
            row.fractions,
            row.fractions_complete,
            row.open_departures,
        )
        for row in rows
    )
