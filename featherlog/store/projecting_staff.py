"""Projections of the department: its people, their keys, wrong passphrases, its policy."""

from __future__ import annotations

from typing import TYPE_CHECKING

from sqlalchemy import and_, bindparam, delete, insert, select, update

from featherlog.errors import IntegrityError
from featherlog.store.entry import canonical, signed_by
from featherlog.store.tables import failed_signing, policy, staff, staff_key

if TYPE_CHECKING:
    from sqlalchemy import Connection

    from featherlog.store.entry import Entry

# Built once, as it runs with every entry.
_FORGET = delete(failed_signing).where(
    failed_signing.c.name.in_(bindparam("names", expanding=True))
)


def added(connection: Connection, entry: Entry) -> None:
    """Put a person on the list, again, or in another role; with a key unless signing is to come."""
    name = entry.content["name"]
    values = {"role": entry.content["role"], "entry": entry.number, "left_entry": None}
    known = update(staff).where(staff.c.name == name).values(values)
    if connection.execute(known).rowcount == 0:
        connection.execute(insert(staff).values(name=name, **values))
    if "key" in entry.content:
        key_replaced(connection, entry)


def key_replaced(connection: Connection, entry: Entry) -> None:
    """Give a person a key; the one before stays good for what it signed up to here."""
    name, key = entry.content["name"], entry.content["key"]
    _require(connection, entry, name)
    _end_key(connection, entry, name)
    connection.execute(
        insert(staff_key).values(
            public=key["public"], name=name, wrapped=canonical(key), from_entry=entry.number
        )
    )


def left(connection: Connection, entry: Entry) -> None:
    """End a person's key: they stay on the list, as somebody who has left."""
    name = entry.content["name"]
    _require(connection, entry, name)
    _end_key(connection, entry, name)
    connection.execute(update(staff).where(staff.c.name == name).values(left_entry=entry.number))


def signing_failed(connection: Connection, entry: Entry) -> None:
    """Note a wrong passphrase."""
    connection.execute(
        insert(failed_signing).values(entry=entry.number, name=entry.content["name"])
    )


def signed(connection: Connection, entry: Entry) -> None:
    """Forget the wrong passphrases of everyone who signed."""
    if names := signed_by(entry):
        connection.execute(_FORGET, {"names": names})


def policy_set(connection: Connection, entry: Entry) -> None:
    """Put a policy in force."""
    values = {"content": canonical(entry.content["policy"]), "entry": entry.number}
    connection.execute(insert(policy).values(version=entry.content["version"], **values))


def _require(connection: Connection, entry: Entry, name: str) -> None:
    if connection.execute(select(staff.c.name).where(staff.c.name == name)).first() is None:
        raise IntegrityError(
            f"Ledger entry {entry.number} ({entry.kind}) speaks of {name!r}, whom no entry before "
            "it put on the staff list."
        )


def _end_key(connection: Connection, entry: Entry, name: str) -> None:
    present = and_(staff_key.c.name == name, staff_key.c.to_entry.is_(None))
    connection.execute(update(staff_key).where(present).values(to_entry=entry.number))
