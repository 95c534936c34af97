"""Looking at a database's health: every line is one check, and none of them writes anything.

Each check has a transaction of its own, so that one that fails leaves the others to speak.
"""

from __future__ import annotations

from datetime import datetime
from typing import TYPE_CHECKING

from sqlalchemy import select

from featherlog.errors import FeatherlogError
from featherlog.store import health_file, health_postgresql, health_sqlite, queries
from featherlog.store.engine import open_engine, reading, sqlite_file
from featherlog.store.schema import REVISIONS
from featherlog.store.tables import ledger_entry, metadata
from featherlog.store.verify import verify
from featherlog.views.health import FAIL, OK, WARN, HealthLine

if TYPE_CHECKING:
    from collections.abc import Callable, Iterator

    from sqlalchemy import Connection

    Check = Callable[[Connection], HealthLine]

_RESTORE = (
    "stop recording, keep the file, and restore a backup with `featherlog database restore`; "
    "call the physicist"
)


def examine(url: str, now: datetime) -> Iterator[HealthLine]:
    """Yield one line for each thing looked at, in an order that makes sense to read.

    Args:
        url: which database.
        now: the time, to find entries from the future.

    Raises:
        StoreError: there is no such database, or its driver is missing.
    """
    engine = open_engine(url)
    file = sqlite_file(url)
    own = health_sqlite.CHECKS if file is not None else health_postgresql.CHECKS
    common: tuple[tuple[str, Check], ...] = (
        ("purpose", _purpose),
        ("schema", _schema),
        ("ledger", _ledger),
        ("clock", lambda connection: _clock(connection, now)),
    )
    for name, check in (*own, *common):
        try:
            with reading(engine) as connection:
                yield check(connection)
        except FeatherlogError as error:
            yield HealthLine(name, FAIL, str(error), _RESTORE)
        except Exception as error:  # noqa: BLE001 - damaged rows fail in any way; the rest is to speak
            found = f"cannot be read: damaged ({type(error).__name__})"
            yield HealthLine(name, FAIL, found, _RESTORE)
    if file is not None:
        yield from health_file.examine(file)


def _purpose(connection: Connection) -> HealthLine:
    told = queries.properties(connection)
    if told not in ({"demo": "yes"}, {"demo": "no"}):
        found = "whether the database is for practice is no longer known"
        return HealthLine("purpose", FAIL, found, _RESTORE)
    found = "for practice only" if told["demo"] == "yes" else "for treatment"
    return HealthLine("purpose", OK, found)


def _schema(connection: Connection) -> HealthLine:
    from alembic.autogenerate import compare_metadata  # noqa: PLC0415 - slow, and only needed here
    from alembic.migration import MigrationContext  # noqa: PLC0415 - as above

    differences = len(compare_metadata(MigrationContext.configure(connection), metadata))
    if connection.dialect.name == "sqlite":
        differences += health_sqlite.changed_statements(connection)
    if differences:
        found = f"{differences} difference(s) from revision {REVISIONS[-1]}"
        todo = "somebody changed tables or triggers; call the administrator"
        return HealthLine("schema", FAIL, found, todo)
    return HealthLine("schema", OK, f"revision {REVISIONS[-1]}, this program's")


def _ledger(connection: Connection) -> HealthLine:
    found = verify(connection)
    if found.fault:
        return HealthLine("ledger", FAIL, found.fault, _RESTORE)
    if not found.entries:
        return HealthLine("ledger", OK, "empty")
    number, _, digits = found.head.partition(":")
    text = f"{number} entries and {found.signatures} signatures hold, and every table is what they"
    return HealthLine("ledger", OK, f"{text} made; head {number}:{digits[:12]}")


def _clock(connection: Connection, now: datetime) -> HealthLine:
    query = select(ledger_entry.c.number, ledger_entry.c.at).order_by(ledger_entry.c.number)
    jumps, last = [], None
    for number, text in connection.execute(query):
        at = datetime.fromisoformat(text)
        if last is not None and at < last:
            jumps.append(number)
        last = at
    if last is not None and last > now:
        found = f"the last entry is from {last.isoformat()}, which is after now"
        return HealthLine("clock", WARN, found, "set this computer's clock")
    if jumps:
        found = f"{len(jumps)} time(s) the clock went back, first at entry {jumps[0]}"
        return HealthLine("clock", WARN, found, "find out whose clock was wrong")
    return HealthLine("clock", OK, "no entry is earlier than the one before it")
