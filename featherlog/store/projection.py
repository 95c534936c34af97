"""What each kind of entry changes in the projections.

``apply`` runs in the transaction that appends the entry; a rebuild runs it over the whole ledger.
Neither looks at a clock, at settings, or at anything but the entry and the projections before it.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

from sqlalchemy import delete, exc, insert, update

from featherlog.errors import IntegrityError
from featherlog.store import (
    projecting_delivery,
    projecting_designs,
    projecting_life,
    projecting_staff,
)
from featherlog.store.entry import Kind, canonical
from featherlog.store.tables import PROJECTIONS, machine

if TYPE_CHECKING:
    from collections.abc import Callable

    from sqlalchemy import Connection

    from featherlog.store.entry import Entry


def apply(connection: Connection, entry: Entry) -> None:
    """Write what ``entry`` changes.

    Raises:
        IntegrityError: the kind is unknown, or the content does not fit the projections.
    """
    project = _PROJECTORS.get(entry.kind)
    if project is None:
        raise IntegrityError(
            f"Ledger entry {entry.number} is of the kind {entry.kind!r}, which this program does "
            f"not know; allowed: {', '.join(_PROJECTORS)}."
        )
    try:
        project(connection, entry)
        projecting_staff.signed(connection, entry)
    except KeyError as missing:
        raise IntegrityError(
            f"Ledger entry {entry.number} ({entry.kind}) lacks {missing} in its content."
        ) from missing
    except exc.IntegrityError as error:
        raise IntegrityError(
            f"Ledger entry {entry.number} ({entry.kind}) does not fit those before it: "
            f"{str(error.orig).splitlines()[0]}."
        ) from error


def empty(connection: Connection) -> None:
    """Delete every row of every projection."""
    for table in PROJECTIONS:
        connection.execute(delete(table))


def _machine_added(connection: Connection, entry: Entry) -> None:
    described = entry.content["machine"]
    values = {"content": canonical(described), "entry": entry.number}
    known = update(machine).where(machine.c.name == described["name"]).values(values)
    if connection.execute(known).rowcount == 0:
        connection.execute(insert(machine).values(name=described["name"], **values))


_PROJECTORS: dict[str, Callable[[Connection, Entry], None]] = {
    Kind.STAFF_ADDED: projecting_staff.added,
    Kind.KEY_REPLACED: projecting_staff.key_replaced,
    Kind.STAFF_LEFT: projecting_staff.left,
    Kind.ADMINISTRATOR_RESTORED: projecting_staff.added,
    Kind.SIGNING_FAILED: projecting_staff.signing_failed,
    Kind.POLICY_SET: projecting_staff.policy_set,
    Kind.MACHINE_ADDED: _machine_added,
    Kind.DESIGN_PREPARED: projecting_designs.prepared,
    Kind.DESIGN_CHECKED: projecting_designs.checked,
    Kind.DESIGN_APPROVED: projecting_designs.approved,
    Kind.DESIGN_RETURNED: projecting_designs.returned,
    Kind.FRACTION_CONFIRMED: projecting_delivery.confirmed,
    Kind.FRACTION_RECORDED: projecting_delivery.recorded,
    Kind.DEPARTURE_EXPLAINED: projecting_delivery.explained,
    Kind.DEPARTURE_DECIDED: projecting_life.decided,
    Kind.RECORD_CORRECTED: projecting_life.corrected,
    Kind.FRACTION_MISSED: projecting_life.missed,
    Kind.COURSE_PAUSED: projecting_life.paused,
    Kind.COURSE_RELEASED: projecting_life.released,
    Kind.COURSE_ENDED: projecting_life.ended,
    Kind.MACHINE_CHANGED: projecting_life.machine_changed,
    Kind.TABLE_READ: projecting_life.changed,
    Kind.MARKS_REDRAWN: projecting_life.changed,
    Kind.IMAGER_OUT: projecting_life.changed,
    Kind.IMAGER_BACK: projecting_life.changed,
    Kind.IMAGE_SHIFT: projecting_life.noted,
    Kind.PHYSICS_PRESENT: projecting_life.noted,
    Kind.POSITION_CHECKED: projecting_life.noted,
    Kind.REVIEW_SIGNED: projecting_life.noted,
}
