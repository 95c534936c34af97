"""Projections of a design's way: prepared, checked, then approved or returned."""

from __future__ import annotations

import json
from typing import TYPE_CHECKING, Any

from sqlalchemy import and_, insert, or_, select, update

from featherlog.errors import IntegrityError
from featherlog.store.changes import change_course, change_one
from featherlog.store.entry import canonical
from featherlog.store.tables import course, ledger_entry, revision

if TYPE_CHECKING:
    from sqlalchemy import Connection

    from featherlog.store.entry import Entry


def prepared(connection: Connection, entry: Entry) -> None:
    """Add a revision; while another one is approved, that one stays the course's."""
    number = entry.content["revision"]
    query = select(course.c.approved_revision).where(course.c.key == entry.course)
    row = connection.execute(query).one_or_none()
    if row is None:
        _open_course(connection, entry)
    elif row.approved_revision is None:
        described = _described(entry.content)
        change_course(connection, entry, revision=number, state="prepared", **described)
    else:
        change_course(connection, entry, revision=number)
    _add_revision(connection, entry)


def checked(connection: Connection, entry: Entry) -> None:
    """Note the independent check."""
    _change_revision(connection, entry, state="checked", checked_by=entry.who, checked_at=entry.at)
    _change_state_unless_approved(connection, entry, "checked")


def returned(connection: Connection, entry: Entry) -> None:
    """Note that the revision goes back to its author, and why."""
    reason = entry.content["reason"]
    _change_revision(connection, entry, state="returned", returned_reason=reason)
    _change_state_unless_approved(connection, entry, "returned")


def approved(connection: Connection, entry: Entry) -> None:
    """Make the revision the course's, in place of the one approved before."""
    content = entry.content
    _supersede(connection, entry)
    _change_revision(
        connection,
        entry,
        state="approved",
        code=content["code"],
        approved_by=entry.who,
        approved_at=entry.at,
    )
    change_course(
        connection,
        entry,
        state="approved",
        approved_revision=content["revision"],
        next_fraction=content["next_fraction"],
        next_position=content["next_position"],
        next_date=content["next_date"],
        **_described(_content_when_prepared(connection, entry)),
    )


def _open_course(connection: Connection, entry: Entry) -> None:
    if entry.content["course"] != entry.course:
        raise IntegrityError(
            f"Ledger entry {entry.number} ({entry.kind}) names two courses: {entry.course!r} and "
            f"{entry.content['course']!r}."
        )
    connection.execute(
        insert(course).values(
            key=entry.course,
            state="prepared",
            revision=entry.content["revision"],
            part_delivered=False,
            fractions_complete=0,
            open_departures=0,
            state_hash=entry.hash,
            entry=entry.number,
            **_described(entry.content),
        )
    )


def _add_revision(connection: Connection, entry: Entry) -> None:
    content = entry.content
    connection.execute(
        insert(revision).values(
            course=entry.course,
            number=content["revision"],
            code="",
            state="prepared",
            design=canonical(content["design"]),
            plan=canonical(content["plan"]),
            machine=canonical(content["machine"]),
            prepared_by=entry.who,
            prepared_at=entry.at,
            content_hash=content["content_hash"],
            entry=entry.number,
        )
    )


def _change_revision(connection: Connection, entry: Entry, **values: object) -> None:
    which = and_(revision.c.course == entry.course, revision.c.number == entry.content["revision"])
    change_one(connection, entry, revision, which, values)


def _change_state_unless_approved(connection: Connection, entry: Entry, state: str) -> None:
    query = select(course.c.approved_revision).where(course.c.key == entry.course)
    waiting = connection.execute(query).scalar() is not None
    change_course(connection, entry, **({} if waiting else {"state": state}))


def _supersede(connection: Connection, entry: Entry) -> None:
    # A revision that waited unapproved behind a later, approved one can no longer be meant.
    overtaken = and_(
        revision.c.number < entry.content["revision"], revision.c.state.in_(("prepared", "checked"))
    )
    connection.execute(
        update(revision)
        .where(revision.c.course == entry.course)
        .where(or_(revision.c.state == "approved", overtaken))
        .values(state="superseded")
    )


def _content_when_prepared(connection: Connection, entry: Entry) -> dict[str, Any]:
    query = (
        select(ledger_entry.c.content)
        .join(revision, revision.c.entry == ledger_entry.c.number)
        .where(revision.c.course == entry.course)
        .where(revision.c.number == entry.content["revision"])
    )
    content: dict[str, Any] = json.loads(connection.execute(query).scalar_one())
    return content


def _described(content: dict[str, Any]) -> dict[str, Any]:
    return {
        "patient_name": content["patient_name"],
        "site": content["site"],
        "machine": content["machine_name"],
        "fractions": content["fractions"],
    }
