"""Projections of what else happens in a course: events, pauses, corrections and decisions."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

from sqlalchemy import and_, delete, insert, select, update

from featherlog.store import projecting_delivery
from featherlog.store.changes import change_course, change_one
from featherlog.store.tables import course, delivery, departure, event, observation

if TYPE_CHECKING:
    from sqlalchemy import Connection

    from featherlog.store.entry import Entry


def noted(connection: Connection, entry: Entry) -> None:
    """Note an event that changes nothing of what is due; printed pages stay valid."""
    connection.execute(
        insert(event).values(
            entry=entry.number,
            course=entry.course,
            fraction=entry.content.get("fraction"),
            kind=entry.kind,
            who=entry.who,
            at=entry.at,
            content=entry.text,
        )
    )


def changed(connection: Connection, entry: Entry) -> None:
    """Note an event that printed pages do not know of yet."""
    noted(connection, entry)
    change_course(connection, entry)


def missed(connection: Connection, entry: Entry) -> None:
    """Note a day without treatment: fraction numbers stay, dates move."""
    noted(connection, entry)
    change_course(connection, entry, next_date=entry.content["next_date"])


def paused(connection: Connection, entry: Entry) -> None:
    """Stop the course until it is released."""
    noted(connection, entry)
    change_course(connection, entry, paused_reason=entry.content["reason"])


def released(connection: Connection, entry: Entry) -> None:
    """Let a paused course go on."""
    noted(connection, entry)
    next_date = entry.content["next_date"]
    change_course(connection, entry, paused_reason=None, next_date=next_date)


def ended(connection: Connection, entry: Entry) -> None:
    """End the course before its prescribed fractions are complete."""
    noted(connection, entry)
    change_course(
        connection,
        entry,
        state="complete",
        ended_reason=entry.content["reason"],
        next_fraction=None,
        next_position=None,
        next_date=None,
        part_delivered=False,
    )


def machine_changed(connection: Connection, entry: Entry) -> None:
    """Move the course to another machine of the same type."""
    noted(connection, entry)
    change_course(connection, entry, machine=entry.content["machine"])


def corrected(connection: Connection, entry: Entry) -> None:
    """Put a corrected record in the place of the one it corrects; the ledger keeps both."""
    noted(connection, entry)
    content = entry.content
    number = content["corrects"]
    for table in (delivery, observation):
        connection.execute(delete(table).where(table.c.entry == number))
    replaced = and_(departure.c.course == entry.course, departure.c.entry == number)
    connection.execute(update(departure).where(replaced).values(status="corrected"))
    # Who signs a correction need not have treated.
    performer, verifier = content.get("treated_by", (content["performer"], content["verifier"]))
    treated = content | {"performer": performer, "verifier": verifier}
    projecting_delivery.recorded(connection, replace(entry, content=treated))
    if not content["after"]["complete"]:
        query = select(course.c.approved_revision).where(course.c.key == entry.course)
        if connection.execute(query).scalar() is not None:
            change_course(connection, entry, state="approved")


def decided(connection: Connection, entry: Entry) -> None:
    """Close a departure with a decision."""
    noted(connection, entry)
    which = and_(
        departure.c.course == entry.course, departure.c.number == entry.content["departure"]
    )
    values = {
        "decision": entry.content["decision"],
        "status": "decided",
        "decided_entry": entry.number,
    }
    change_one(connection, entry, departure, which, values)
    change_course(
        connection,
        entry,
        open_departures=projecting_delivery.open_departures(connection, entry),
    )
