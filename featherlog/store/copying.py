"""Private copies of a SQLite file, taken while others may be using it."""

from __future__ import annotations

import os
import sqlite3
from contextlib import closing
from typing import TYPE_CHECKING

from featherlog.errors import StoreError
from featherlog.store import engine

if TYPE_CHECKING:
    from pathlib import Path


def make_private(file: Path) -> bool:
    """Make an empty file that its owner alone can read; tell whether it was made."""
    file.parent.mkdir(mode=0o700, parents=True, exist_ok=True)
    try:
        os.close(os.open(file, os.O_CREAT | os.O_EXCL | os.O_RDWR, 0o600))
    except FileExistsError:
        return False
    return True


def copy_file(source: Path, target: Path) -> None:
    """Copy one moment of a SQLite file with SQLite's backup, and bring the copy to the disk.

    Raises:
        StoreError: the source cannot be read or stays busy, or the target is there already or
            cannot be written; no target is left then.
    """
    try:
        if not make_private(target):
            raise StoreError(f"{target} is there already; name another file.")
        try:
            _copy(source, target)
        except BaseException:
            target.unlink()
            raise
    except (OSError, sqlite3.Error) as error:
        raise StoreError(f"{source} cannot be copied to {target}: {error}.") from error


def _copy(source: Path, target: Path) -> None:
    # Without a mode of its own a file that is not there would be made.
    there = f"{source.absolute().as_uri()}?mode=rw"
    with (
        closing(sqlite3.connect(there, timeout=engine.BUSY_SECONDS, uri=True)) as old,
        closing(sqlite3.connect(target)) as new,
    ):
        # A lock of our own first: the backup itself would wait for a busy file without end.
        old.execute("BEGIN")
        old.execute("SELECT count(*) FROM sqlite_master")
        new.execute("PRAGMA synchronous = FULL")
        old.backup(new)
    _synchronise(target.parent)


def _synchronise(folder: Path) -> None:
    """Make a new name in ``folder`` lasting, where the system can."""
    try:
        descriptor = os.open(folder, os.O_RDONLY)
    except OSError:
        return
    try:
        os.fsync(descriptor)
    finally:
        os.close(descriptor)
