"""Making and keeping the database."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from sqlalchemy import make_url

from featherlog.actions.desk import at_desk
from featherlog.store import ledger, migrate, queries
from featherlog.store.engine import masked, resolve_url

if TYPE_CHECKING:
    from pathlib import Path


@dataclass(frozen=True, slots=True)
class DatabaseStatus:
    """What the database is: where, for practice or not, how much it holds, whether it fits."""

    database: str
    demo: bool
    ledger_entries: int
    ledger_head: str
    first_fault: str
    courses: int


def where(database: str | None) -> str:
    """Return the database that is used, without its password."""
    return masked(make_url(resolve_url(database)))


def create(database: str | None, *, demo: bool) -> str:
    """Create an empty database; return where. Raises RefusedError where there is one already."""
    migrate.create(resolve_url(database), demo=demo)
    return where(database)


def upgrade(database: str | None) -> Path | None:
    """Bring the database to this program's schema; return the backup made before, if any."""
    return migrate.upgrade(resolve_url(database))


def status(database: str | None) -> DatabaseStatus:
    """Return what the database holds, with its ledger chain walked from the first entry."""
    with at_desk(database) as desk:
        head = ledger.head(desk.connection)
        return DatabaseStatus(
            database=where(database),
            demo=desk.demo,
            ledger_entries=head.number if head else 0,
            ledger_head=head.hash if head else "",
            first_fault=ledger.first_fault(desk.connection) or "",
            courses=len(queries.courses(desk.connection)),
        )
