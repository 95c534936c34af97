"""Keeping the database safe: backup, restore, and a look at its health."""

from __future__ import annotations

from datetime import datetime
from pathlib import Path

from featherlog.actions.database import where
from featherlog.errors import RefusedError
from featherlog.store import backup as sqlite_backup
from featherlog.store import health as store_health
from featherlog.store import postgresql_backup
from featherlog.store.backup import Restored
from featherlog.store.engine import resolve_url, sqlite_file
from featherlog.views.health import FAIL, OK, WARN, HealthView

__all__ = ["HealthView", "Restored", "back_up", "health", "restore"]


def back_up(database: str | None, output: Path | None) -> Path:
    """Make a verified backup and return its file.

    Args:
        database: which one.
        output: where to; None for a dated name beside a SQLite file, or in the present folder.

    Raises:
        RefusedError: there is a file of that name already.
        IntegrityError: the database is not sound.
        StoreError: it cannot be read, or the backup cannot be written.
    """
    url = resolve_url(database)
    file = sqlite_file(url)
    if file is not None:
        return sqlite_backup.back_up(file, output)
    target = output or sqlite_backup.dated(Path("featherlog"), "dump")
    return postgresql_backup.back_up(url, target)


def restore(database: str | None, backup: Path, *, acknowledged: int, unreadable: bool) -> Restored:
    """Put a backup in the database's place; see ``store.backup.restore`` for what is refused."""
    file = sqlite_file(resolve_url(database))
    if file is None:
        raise RefusedError(postgresql_backup.HOW_TO_RESTORE)
    return sqlite_backup.restore(file, backup, acknowledged=acknowledged, unreadable=unreadable)


def health(database: str | None) -> HealthView:
    """Look at everything that can go wrong with a database, changing nothing.

    Raises StoreError where there is none.
    """
    # The computer's own clock, whatever a practice database is told: it is what is judged here.
    lines = tuple(store_health.examine(resolve_url(database), datetime.now().astimezone()))
    grades = {line.grade for line in lines}
    worst = next(grade for grade in (FAIL, WARN, OK) if grade in grades)
    return HealthView(where(database), worst, lines)
