"""Projections of treatment: what was confirmed, what was delivered, and what differed."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from sqlalchemy import and_, func, insert, select

from featherlog.store.changes import change_course, change_one
from featherlog.store.tables import confirmation, delivery, departure, observation

if TYPE_CHECKING:
    from sqlalchemy import Connection, Table

    from featherlog.store.entry import Entry


def confirmed(connection: Connection, entry: Entry) -> None:
    """Note the check before the beam; it does not change the course's state."""
    columns = ("fraction", "position", "state_hash", "performer", "verifier")
    values = {column: entry.content[column] for column in columns}
    _add(connection, entry, confirmation, [values | {"at": entry.at}])


def recorded(connection: Connection, entry: Entry) -> None:
    """Note what was delivered, what differed, and where the course stands after it."""
    content, after = entry.content, entry.content["after"]
    fraction = {"fraction": content["fraction"]}
    people = {
        "performer": content["performer"],
        "verifier": content["verifier"],
        "at": content.get("treated_at", entry.at),
        "late": content.get("late", False),
    }
    _add(connection, entry, delivery, [fraction | people | beam for beam in content["beams"]])
    _add(connection, entry, observation, [fraction | gap for gap in content["gaps"]])
    _add_departures(connection, entry)
    change_course(
        connection,
        entry,
        next_fraction=after["next_fraction"],
        next_position=after["next_position"],
        next_date=after["next_date"],
        part_delivered=after["part_delivered"],
        fractions_complete=after["fractions_complete"],
        **_recounted(connection, entry),
        **({"state": "complete"} if after["complete"] else {}),
    )


def explained(connection: Connection, entry: Entry) -> None:
    """Note the reason for a departure; it stays open until somebody decides on it."""
    number = entry.content["departure"]
    which = and_(departure.c.course == entry.course, departure.c.number == number)
    values = {
        "reason": entry.content["reason"],
        "status": "explained",
        "explained_entry": entry.number,
    }
    change_one(connection, entry, departure, which, values)
    change_course(connection, entry, open_departures=open_departures(connection, entry))


def _add(connection: Connection, entry: Entry, table: Table, rows: list[dict[str, Any]]) -> None:
    if rows:
        owner = {"course": entry.course, "entry": entry.number}
        connection.execute(insert(table), [owner | row for row in rows])


def _add_departures(connection: Connection, entry: Entry) -> None:
    if not entry.content["departures"]:
        return
    query = select(func.count()).where(departure.c.course == entry.course)
    first = connection.execute(query).scalar_one() + 1
    rows = [
        {
            "number": number,
            "fraction": entry.content["fraction"],
            "status": "explained" if found["reason"] else "open",
            "explained_entry": entry.number if found["reason"] else None,
        }
        | found
        for number, found in enumerate(entry.content["departures"], start=first)
    ]
    _add(connection, entry, departure, rows)


def _recounted(connection: Connection, entry: Entry) -> dict[str, int]:
    # Most records add no departure and take none away; counting took a third of verifying.
    if entry.content["departures"] or "corrects" in entry.content:
        return {"open_departures": open_departures(connection, entry)}
    return {}


def open_departures(connection: Connection, entry: Entry) -> int:
    """Return how many departures of the entry's course nobody has decided on."""
    query = (
        select(func.count())
        .where(departure.c.course == entry.course)
        .where(departure.c.status.in_(("open", "explained")))
    )
    return connection.execute(query).scalar_one()
