"""Health of the file a SQLite database is in: its disk, where that is, and who can read it."""

from __future__ import annotations

import shutil
import stat
from pathlib import Path
from typing import TYPE_CHECKING

from featherlog.views.health import FAIL, OK, WARN, HealthLine

if TYPE_CHECKING:
    from collections.abc import Iterator

MOUNTS = Path("/proc/mounts")

_MB = 1_000_000
_SCARCE_MB, _LITTLE_MB = 64, 1000
_NETWORK = frozenset({"nfs", "nfs4", "cifs", "smb3", "smbfs", "9p", "afs", "ceph", "glusterfs"})


def examine(file: Path) -> Iterator[HealthLine]:
    """Yield the lines on a file that is there."""
    yield disk(shutil.disk_usage(file.parent).free, file.stat().st_size)
    yield place(file, MOUNTS)
    yield modes(file)


def disk(free_bytes: int, file_bytes: int) -> HealthLine:
    """Judge the free space: a backup needs as much as the file has."""
    found = f"{free_bytes // _MB} MB free, the file has {file_bytes / _MB:.1f} MB"
    if free_bytes < _SCARCE_MB * _MB:
        return HealthLine("disk", FAIL, found, "make room now: the next record may not fit")
    if free_bytes < max(_LITTLE_MB * _MB, 2 * file_bytes):
        return HealthLine("disk", WARN, found, "make room; a backup needs as much as the file has")
    return HealthLine("disk", OK, found)


def place(file: Path, mounts: Path) -> HealthLine:
    """Tell whether the file is on a network, where locks are not to be trusted."""
    kind = _file_system(file.resolve(), mounts)
    if kind is None:
        return HealthLine("place", WARN, "not known", "make sure it is a disk of this computer")
    if kind in _NETWORK or kind.startswith("fuse"):
        todo = "move the file to a disk of this computer, or use PostgreSQL"
        return HealthLine("place", WARN, f"a {kind} file system, shared or remote", todo)
    return HealthLine("place", OK, f"a {kind} file system of this computer")


def modes(file: Path) -> HealthLine:
    """Tell whether others can read or change the file, which holds names and identifiers."""
    mode = stat.S_IMODE(file.stat().st_mode)
    if mode & 0o022 or file.parent.stat().st_mode & 0o022 & ~_sticky(file.parent):
        found = f"mode {mode:04o}: others can change the file or its folder"
        return HealthLine("modes", FAIL, found, f"chmod 600 {file}; chmod go-w {file.parent}")
    if mode & 0o077:
        found = f"mode {mode:04o}: others can read names and identifiers"
        return HealthLine("modes", WARN, found, f"chmod 600 {file}")
    return HealthLine("modes", OK, f"mode {mode:04o}: its owner alone")


def _sticky(folder: Path) -> int:
    # In a sticky folder, such as /tmp, others cannot rename or remove what is not theirs.
    return 0o022 if folder.stat().st_mode & stat.S_ISVTX else 0


def _file_system(file: Path, mounts: Path) -> str | None:
    try:
        lines = mounts.read_text(encoding="utf-8", errors="replace").splitlines()
    except OSError:
        return None
    found = [
        (len(point.parts), kind)
        for _, where, kind, *_ in (line.split() for line in lines)
        if (point := Path(where.replace("\\040", " "))) in (file, *file.parents)
    ]
    # The longest mount point holds the file; of two on one point the later hides the earlier.
    return max(reversed(found), key=lambda pair: pair[0])[1] if found else None
