"""Many copies of a course, put into a SQLite file straight, for measuring how time grows.

Each copy has ledger entries of its own, chained and hashed as the program does, and the projections
made from them. Signatures and content hashes are those of the course copied: nothing here is for
verifying, only for reading and writing beside.
"""

from __future__ import annotations

import re
import sqlite3
from contextlib import closing
from dataclasses import fields
from typing import TYPE_CHECKING, Any

from featherlog.store.entry import Entry, hash_of
from featherlog.store.tables import PROJECTIONS, ledger_entry

if TYPE_CHECKING:
    from collections.abc import Iterator
    from pathlib import Path

    from sqlalchemy import Table

_HASH = re.compile("[0-9a-f]{64}")
_AT_ONCE = 200
_WITH_COURSE = [
    table for table in reversed(PROJECTIONS) if "course" in table.c or table.name == "course"
]


class Copier:
    """Copies one course of a file again and again, under other keys of the same length."""

    def __init__(self, connection: sqlite3.Connection, key: str) -> None:
        self._connection, self._key = connection, key
        self._entries = _rows(connection, ledger_entry, key)
        self._projected = {table: _rows(connection, table, key) for table in _WITH_COURSE}
        query = "SELECT number, hash FROM ledger_entry ORDER BY number DESC LIMIT 1"
        self._number, self._hash = connection.execute(query).fetchone()

    def copy(self, keys: list[str]) -> None:
        """Add one copy under each key, a few hundred in each statement."""
        for start in range(0, len(keys), _AT_ONCE):
            rows: dict[str, list[dict[str, Any]]] = {}
            for key in keys[start : start + _AT_ONCE]:
                for table, row in self._copied(key):
                    rows.setdefault(table, []).append(row)
            for table, found in rows.items():
                names = ", ".join(f'"{name}"' for name in found[0])
                marks = ", ".join(f":{name}" for name in found[0])
                self._connection.executemany(
                    f"INSERT INTO {table} ({names}) VALUES ({marks})",  # noqa: S608 - our own names
                    found,
                )

    def _copied(self, key: str) -> Iterator[tuple[str, dict[str, Any]]]:
        numbers: dict[int, int] = {}
        hashes: dict[str, str] = {}
        for row in self._entries:
            new = self._chained(row, key, hashes)
            numbers[row["number"]], hashes[row["hash"]] = new["number"], new["hash"]
            yield "ledger_entry", new
        for table, rows in self._projected.items():
            to_entry = {
                column.name
                for column in table.c
                if any(one.column.table is ledger_entry for one in column.foreign_keys)
            }
            for row in rows:
                new = {
                    name: numbers.get(value, value) if name in to_entry else value
                    for name, value in row.items()
                }
                new["key" if table.name == "course" else "course"] = key
                if "state_hash" in new:
                    new["state_hash"] = hashes.get(row["state_hash"], row["state_hash"])
                if "design" in new:
                    new["design"] = new["design"].replace(self._key, key)
                yield table.name, new

    def _chained(self, row: dict[str, Any], key: str, hashes: dict[str, str]) -> dict[str, Any]:
        self._number += 1
        content = row["content"].replace(self._key, key)
        content = _HASH.sub(lambda found: hashes.get(found[0], found[0]), content)
        new = row | {
            "number": self._number,
            "course": key,
            "content": content,
            "previous_hash": self._hash,
            "hash": "",
        }
        said = {one.name: new.get(one.name) for one in fields(Entry)}
        said |= {"content": {}, "text": content, "signatures": new["signatures"]}
        self._hash = new["hash"] = hash_of(Entry(**said))
        return new


def add_copies(file: Path, key: str, copies: list[str]) -> None:
    """Add copies of course ``key`` under other keys."""
    with closing(sqlite3.connect(file, isolation_level=None)) as connection:
        # It is thrown away if this stops half-way; the program's own settings come back later.
        connection.execute("PRAGMA synchronous = OFF")
        connection.execute("PRAGMA journal_mode = OFF")
        connection.execute("BEGIN")
        Copier(connection, key).copy(copies)
        connection.execute("COMMIT")


def _rows(connection: sqlite3.Connection, table: Table, key: str) -> list[dict[str, Any]]:
    column = "key" if table.name == "course" else "course"
    order = "number" if table is ledger_entry else "1"
    query = f'SELECT * FROM {table.name} WHERE "{column}" = ? ORDER BY {order}'  # noqa: S608 - ours
    found = connection.execute(query, (key,))
    names = [one[0] for one in found.description]
    return [dict(zip(names, row, strict=True)) for row in found]
