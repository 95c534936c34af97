"""The projections against the ledger: made again in a scratch database, and compared row by row."""

from __future__ import annotations

import sqlite3
from contextlib import contextmanager
from itertools import zip_longest
from typing import TYPE_CHECKING, Any

import sqlalchemy
from sqlalchemy import StaticPool, Text, select

from featherlog.store.tables import PROJECTIONS, metadata

if TYPE_CHECKING:
    from collections.abc import Iterator

    from sqlalchemy import Connection, Table


_BATCH = 500


def differences(live: Connection, made: Connection) -> Iterator[tuple[int, str]]:
    """Yield the first difference of each table: the entry that its row tells of, and a sentence."""
    for table in reversed(PROJECTIONS):
        difference = _difference(live, made, table)
        if difference is not None:
            yield difference


@contextmanager
def scratch_database() -> Iterator[Connection]:
    """Give an empty database with all tables, gone at the end."""
    # A database without a name lives in a private, nameless temporary file; it is no second truth.
    engine = sqlalchemy.create_engine(
        "sqlite://", creator=lambda: sqlite3.connect(""), poolclass=StaticPool
    )
    try:
        with engine.connect() as connection:
            metadata.create_all(connection)
            yield connection
    finally:
        engine.dispose()


def _difference(live: Connection, made: Connection, table: Table) -> tuple[int, str] | None:
    for found, expected in zip_longest(_rows(live, table), _rows(made, table)):
        if found == expected:
            continue
        if found is None or (expected is not None and _key(table, expected) < _key(table, found)):
            said = f"{_name(table, expected)} is missing, but the ledger made it."
            return _entry(table, expected), said
        if expected is None or _key(table, found) < _key(table, expected):
            said = f"{_name(table, found)} is there, but no ledger entry made it."
            return _entry(table, found), said
        columns = table.columns.keys()
        other = [n for n, a, b in zip(columns, found, expected, strict=True) if a != b]
        said = f"{_name(table, found)} differs from what the ledger made, in {', '.join(other)}."
        return _entry(table, expected), said
    return None


def _rows(connection: Connection, table: Table) -> Iterator[tuple[Any, ...]]:
    # Both databases then order by code points, and not one of them by the rules of a language.
    collation = "C" if connection.dialect.name == "postgresql" else "BINARY"
    order = [
        key.collate(collation) if isinstance(key.type, Text) else key for key in table.primary_key
    ]
    options = {"yield_per": _BATCH}
    with connection.execute(select(table).order_by(*order), execution_options=options) as rows:
        yield from map(tuple, rows)


def _entry(table: Table, row: tuple[Any, ...]) -> int:
    """Return the entry that a row tells of, in whichever column it stands."""
    columns = table.columns.keys()
    name = "entry" if "entry" in columns else "from_entry"
    return int(row[columns.index(name)])


def _key(table: Table, row: tuple[Any, ...]) -> tuple[Any, ...]:
    return tuple(row[table.columns.keys().index(column.name)] for column in table.primary_key)


def _name(table: Table, row: tuple[Any, ...]) -> str:
    return f"The row of {table.name} {'/'.join(map(str, _key(table, row)))}"
