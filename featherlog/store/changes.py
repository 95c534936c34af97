"""Changes of one row that has to be there."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from sqlalchemy import update

from featherlog.errors import IntegrityError
from featherlog.store.tables import course

if TYPE_CHECKING:
    from sqlalchemy import ColumnElement, Connection, Table

    from featherlog.store.entry import Entry


def change_one(
    connection: Connection,
    entry: Entry,
    table: Table,
    which: ColumnElement[bool],
    values: dict[str, Any],
) -> None:
    """Set ``values`` in the one row of ``table`` that ``which`` picks.

    Raises:
        IntegrityError: there is no such row.
    """
    if connection.execute(update(table).where(which).values(values)).rowcount != 1:
        raise IntegrityError(
            f"Ledger entry {entry.number} ({entry.kind}) speaks of a {table.name} of course "
            f"{entry.course!r} that no entry before it made."
        )


def change_course(connection: Connection, entry: Entry, **values: object) -> None:
    """Set ``values`` in the entry's course, whose state this entry then is."""
    change_one(
        connection,
        entry,
        course,
        course.c.key == entry.course,
        values | {"state_hash": entry.hash, "entry": entry.number},
    )
