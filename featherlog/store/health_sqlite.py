"""Health of a SQLite database: version, settings read back, triggers, pages."""

from __future__ import annotations

import platform
import sqlite3
from contextlib import closing
from functools import cache
from pathlib import Path
from tempfile import TemporaryDirectory
from typing import TYPE_CHECKING, Any

from featherlog.store import engine, migrate
from featherlog.store.engine import resolve_url
from featherlog.views.health import FAIL, OK, HealthLine

if TYPE_CHECKING:
    from collections.abc import Iterable, Sequence

    from sqlalchemy import Connection

_STATEMENTS = "SELECT type, name, tbl_name, sql FROM sqlite_master"
_TRIGGERS = frozenset(
    f"{table}_no_{verb}"
    for table in ("ledger_entry", "store_property")
    for verb in ("update", "delete")
)


def changed_statements(connection: Connection) -> int:
    """Count the statements that made tables, indexes and triggers and are not the program's own."""
    return len(_own_statements() ^ _normal(connection.exec_driver_sql(_STATEMENTS)))


@cache
def _own_statements() -> frozenset[tuple[str, ...]]:
    with TemporaryDirectory() as folder:
        file = Path(folder) / "new.db"
        migrate.create(resolve_url(str(file)), demo=True)
        with closing(sqlite3.connect(file)) as connection:
            return _normal(connection.execute(_STATEMENTS))


def _normal(rows: Iterable[Sequence[Any]]) -> frozenset[tuple[str, ...]]:
    # A migration that rebuilds a table writes its constraints in an order of chance.
    return frozenset(
        (kind, name, table, *sorted(line.rstrip(", ") for line in (sql or "").split("\n")))
        for kind, name, table, sql in rows
    )


def _version(_connection: Connection) -> HealthLine:
    found = f"SQLite {sqlite3.sqlite_version}, through Python {platform.python_version()}"
    return HealthLine("database", OK, found)


def _settings(connection: Connection) -> HealthLine:
    wanted = {
        "journal_mode": "delete",
        "synchronous": 3,
        "foreign_keys": 1,
        "recursive_triggers": 1,
        "busy_timeout": int(engine.BUSY_SECONDS * 1000),
    }
    found = {name: connection.exec_driver_sql(f"PRAGMA {name}").scalar() for name in wanted}
    text = ", ".join(f"{name} {value}" for name, value in found.items())
    wrong = [name for name, value in wanted.items() if found[name] != value]
    if wrong:
        todo = f"should be {', '.join(f'{name} {wanted[name]}' for name in wrong)}; report this"
        return HealthLine("settings", FAIL, text, todo)
    return HealthLine("settings", OK, text)


def _guards(connection: Connection) -> HealthLine:
    rows = connection.exec_driver_sql("SELECT name FROM sqlite_master WHERE type = 'trigger'")
    missing = sorted(_TRIGGERS - {row[0] for row in rows})
    if missing:
        found = f"missing: {', '.join(missing)}"
        todo = "somebody took away what keeps the ledger append-only; call the administrator"
        return HealthLine("append-only", FAIL, found, todo)
    return HealthLine("append-only", OK, f"{len(_TRIGGERS)} triggers in place")


def _integrity(connection: Connection) -> HealthLine:
    pages = str(connection.exec_driver_sql("PRAGMA integrity_check").scalar())
    orphan = connection.exec_driver_sql("PRAGMA foreign_key_check").first()
    if pages == "ok" and orphan is None:
        return HealthLine("integrity", OK, "pages, indexes and references are sound")
    found = pages.splitlines()[0] if orphan is None else f"a row of {orphan[0]} refers to nothing"
    todo = "stop recording, keep the file, and restore a backup with `featherlog database restore`"
    return HealthLine("integrity", FAIL, found, todo)


CHECKS = (
    ("database", _version),
    ("settings", _settings),
    ("append-only", _guards),
    ("integrity", _integrity),
)
"""What is looked at in SQLite alone."""
