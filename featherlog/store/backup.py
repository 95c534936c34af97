"""Backups of a database, verified once written, and restoring one, verified before it replaces.

SQLite is copied and put back here. PostgreSQL has its own tools for both; its backup is made by
calling ``pg_dump``, and restoring into an empty database is left to ``pg_restore``.
"""

from __future__ import annotations

import os
import sqlite3
from contextlib import closing, contextmanager
from dataclasses import dataclass
from datetime import UTC, datetime
from itertools import takewhile
from pathlib import Path
from tempfile import TemporaryDirectory
from typing import TYPE_CHECKING

from featherlog.errors import (
    FeatherlogError,
    IntegrityError,
    NotFoundError,
    RefusedError,
    StoreError,
)
from featherlog.store import engine, migrate
from featherlog.store.copying import copy_file
from featherlog.store.engine import open_engine, reading, resolve_url
from featherlog.store.verify import verify as verify_ledger

if TYPE_CHECKING:
    from collections.abc import Iterator

_COMPANIONS = ("-journal", "-wal", "-shm")
_UNREADABLE = frozenset({sqlite3.SQLITE_CORRUPT, sqlite3.SQLITE_NOTADB, sqlite3.SQLITE_ERROR})
_PRACTICE = "SELECT value FROM store_property WHERE name = 'demo'"
_HASHES = "SELECT number, hash FROM ledger_entry ORDER BY number"
_ENTRIES = "SELECT number, kind, course, who, at FROM ledger_entry WHERE number > ? ORDER BY number"


@dataclass(frozen=True, slots=True)
class DroppedEntry:
    """An entry of the present database that a restore would leave out; ``course`` may be empty."""

    number: int
    kind: str
    course: str
    who: str
    at: str


@dataclass(frozen=True, slots=True)
class Restored:
    """What a restore did; ``kept`` is where the replaced file is now, None where there was none."""

    kept: Path | None
    dropped: tuple[DroppedEntry, ...]


def back_up(file: Path, target: Path | None) -> Path:
    """Copy a SQLite database, verify the copy, and only then give it its name.

    Args:
        file: the database; others may be using it.
        target: the copy; None for a dated name beside the database.

    Returns:
        The copy, readable by its owner alone.

    Raises:
        RefusedError: there is a file of that name already.
        IntegrityError: the copy, and so the database, does not fit together.
        StoreError: the database cannot be read, or the copy cannot be written.
    """
    target = target or dated(file, "backup")
    part = free(target).with_name(f"{target.name}.part")
    copy_file(file, part)
    try:
        verify(part)
    except FeatherlogError as error:
        part.unlink()
        raise type(error)(f"No backup was made, for the database is not sound: {error}") from error
    part.rename(target)
    return target


def verify(file: Path) -> None:
    """Check that a SQLite file is a sound database of this program or of an older one.

    Raises:
        IntegrityError: the file is damaged, its ledger does not fit together, or its projections
            are not what the ledger made.
        StoreError: it cannot be opened, is newer than this program, or is not featherlog's.
    """
    with _as_current(file, folder=file.parent):
        pass


def restore(
    file: Path, source: Path, *, acknowledged: int = 0, unreadable: bool = False
) -> Restored:
    """Put a backup in the place of a SQLite database, which is kept beside it.

    Args:
        file: the database to replace; it may be missing or damaged.
        source: the backup; it is only read.
        acknowledged: how many entries the person knows this drops.
        unreadable: whether the person knows that what it drops cannot be read.

    Raises:
        NotFoundError: there is no backup of that name.
        RefusedError: another number of entries would be dropped, or one of the two databases is
            for practice and the other is not.
        IntegrityError: the backup is not sound, as for ``verify``.
        StoreError: a file cannot be used. Whatever is raised, nothing was replaced.
    """
    if not source.is_file():
        raise NotFoundError(f"there is no file {source}")
    try:
        file.parent.mkdir(mode=0o700, parents=True, exist_ok=True)
        with _as_current(source, folder=file.parent) as ready, _present(file) as present:
            dropped = _dropped(present, ready) if present else ()
            if present is None and file.exists() and not unreadable:
                raise RefusedError(
                    f"what {file} holds cannot be read, so what the restore would drop is not "
                    "known; nothing was done: give --drop-unreadable if it may go"
                )
            if len(dropped) != acknowledged:
                raise RefusedError(_not_acknowledged(dropped, acknowledged))
            return Restored(_replace(file, ready), dropped)
    except OSError as error:
        raise StoreError(f"{source} cannot be put in the place of {file}: {error}.") from error


def dated(file: Path, ending: str) -> Path:
    """Return a name beside ``file`` that holds the time (UTC)."""
    stamp = datetime.now(UTC).strftime("%Y%m%dT%H%M%S%fZ")
    return file.with_name(f"{file.name}.{stamp}.{ending}")


def free(target: Path) -> Path:
    """Return ``target`` where there is no such file; RefusedError where there is one."""
    if target.exists():
        raise RefusedError(f"{target} is there already and is not written over; name another")
    return target


@contextmanager
def _as_current(file: Path, *, folder: Path) -> Iterator[Path]:
    """Give a copy of ``file``, verified and at this program's schema, while the block runs."""
    with TemporaryDirectory(prefix=".featherlog-", dir=folder) as work:
        copy = Path(work) / "copy.db"
        copy_file(file, copy)
        _check_file(copy)
        url = resolve_url(str(copy))
        migrate.upgrade(url)
        with reading(open_engine(url)) as connection:
            fault = verify_ledger(connection).fault
        if fault:
            raise IntegrityError(fault)
        yield copy


def _check_file(file: Path) -> None:
    try:
        with closing(sqlite3.connect(file)) as connection:
            pages = str(connection.execute("PRAGMA integrity_check").fetchone()[0])
            orphan = connection.execute("PRAGMA foreign_key_check").fetchone()
    except sqlite3.DatabaseError as error:
        pages, orphan = str(error), None
    if pages != "ok":
        raise IntegrityError(f"the file is damaged: {pages.splitlines()[0]}")
    if orphan is not None:
        raise IntegrityError(f"a row of {orphan[0]} refers to no {orphan[2]}")


@contextmanager
def _present(file: Path) -> Iterator[sqlite3.Connection | None]:
    """Keep others out of the present database; None where there is none that can be read."""
    if not file.is_file():
        yield None
        return
    connection = sqlite3.connect(file, timeout=engine.BUSY_SECONDS, isolation_level=None)
    with closing(connection) as present:
        try:
            present.execute("BEGIN EXCLUSIVE")
            present.execute("SELECT count(*) FROM ledger_entry").fetchone()
            readable = True
        except sqlite3.DatabaseError as error:
            if error.sqlite_errorcode not in _UNREADABLE:
                raise StoreError(f"{file} cannot be replaced: {error}.") from error
            readable = False
        yield present if readable else None


def _dropped(present: sqlite3.Connection, ready: Path) -> tuple[DroppedEntry, ...]:
    with closing(sqlite3.connect(ready)) as backup:
        if present.execute(_PRACTICE).fetchone() != backup.execute(_PRACTICE).fetchone():
            raise RefusedError(
                "one of the two databases is for practice and the other is not; nothing was done"
            )
        both = zip(present.execute(_HASHES), backup.execute(_HASHES), strict=False)
        common = [0, *(one[0] for one, other in takewhile(lambda pair: pair[0] == pair[1], both))]
    return tuple(
        DroppedEntry(number, kind, course or "", who, at)
        for number, kind, course, who, at in present.execute(_ENTRIES, (common[-1],))
    )


def _not_acknowledged(dropped: tuple[DroppedEntry, ...], acknowledged: int) -> str:
    lines = [
        f"entry {entry.number}: {entry.kind} {entry.course} by {entry.who}, {entry.at}"
        for entry in dropped
    ]
    lines.append(
        f"the restore would drop {len(dropped)} entries of the present database, but "
        f"{acknowledged} were acknowledged; nothing was done: give --drop-entries "
        f"{len(dropped)} if these may go"
    )
    return "\n".join(lines)


def _replace(file: Path, ready: Path) -> Path | None:
    """Put ``ready`` in place in one step, so that at no moment there is no database."""
    kept = free(dated(file, "replaced")) if file.exists() else None
    if kept is not None:
        # A journal that was left behind belongs to the old file and would be played into the new.
        for companion in _COMPANIONS:
            left = file.with_name(file.name + companion)
            if left.exists():
                left.rename(kept.with_name(kept.name + companion))
        os.link(file, kept)
    ready.replace(file)
    return kept
