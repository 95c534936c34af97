"""One byte of a SQLite file is another: what it says is unchanged, or the change is found.

Every byte of a small file in the long form, every 97th in the short one. "Unchanged" means every
row of every table, read through the tables and through their indexes, and the schema itself;
"found" means that the file cannot be read, or that the health report has a FAIL.
"""

from __future__ import annotations

import shutil
import sqlite3
from collections import Counter
from contextlib import closing
from pathlib import Path

import pytest
from department import BREAST, THIGH, department_file, treated
from sqlalchemy import select, text

from featherlog.actions.operations import health
from featherlog.errors import FeatherlogError
from featherlog.store import ledger
from featherlog.store.engine import open_engine, reading, resolve_url
from featherlog.store.tables import metadata
from featherlog.store.verify import verify

__all__ = ["department_file"]

MASKS = (0x01, 0xFF)
QUERIES = (
    "SELECT type, name, tbl_name, sql FROM sqlite_master ORDER BY name",
    "SELECT * FROM alembic_version",
    *(str(select(table).order_by(*table.primary_key)) for table in metadata.sorted_tables),
    *(
        str(select(table).where(table.c.course == text(f"'{key}'")))
        for table in metadata.sorted_tables
        for key in (THIGH, BREAST)
        if "course" in table.c
    ),
)


@pytest.fixture
def file(department_file: str, tmp_path: Path) -> Path:
    """Give a small department with two fractions treated."""
    copied = Path(shutil.copy(department_file, tmp_path))
    treated(str(copied), THIGH, "2026-03-02")
    treated(str(copied), THIGH, "2026-03-03", position="B")
    with closing(sqlite3.connect(copied, isolation_level=None)) as connection:
        connection.execute("PRAGMA page_size = 1024")
        connection.execute("VACUUM")
    return copied


def contents(file: Path) -> list[object] | None:
    """Return everything the file says; None where it cannot be read."""
    with closing(sqlite3.connect(file)) as connection:
        try:
            return [connection.execute(query).fetchall() for query in QUERIES]
        except (sqlite3.Error, UnicodeDecodeError):
            return None


def found(file: Path) -> bool:
    """Tell whether the program finds fault with the file; what is quick is looked at first."""
    try:
        with reading(open_engine(resolve_url(str(file)))) as connection:
            if ledger.first_fault(connection) or verify(connection).fault:
                return True
    except FeatherlogError:
        return True
    except Exception:  # noqa: BLE001, S110 - rows too damaged to walk; health says so
        pass
    return health(str(file)).grade == "FAIL"


@pytest.mark.parametrize(
    ("step", "first_mask"),
    [
        (97, 0),
        pytest.param(1, 0, marks=pytest.mark.long),
        pytest.param(1, 1, marks=pytest.mark.long),
    ],
)
def test_harmless_or_found(file: Path, step: int, first_mask: int) -> None:
    sound = contents(file)
    assert sound is not None
    assert not found(file)
    whole, counted, missed = file.read_bytes(), Counter[str](), []
    for offset in range(0, len(whole), step):
        with file.open("r+b") as stream:
            stream.seek(offset)
            stream.write(bytes([whole[offset] ^ MASKS[(offset // step + first_mask) % 2]]))
        now = contents(file)
        outcome = "unreadable" if now is None else "harmless" if now == sound else "found"
        if outcome == "found" and not found(file):
            outcome = "missed"
            missed.append(offset)
        counted[outcome] += 1
        file.write_bytes(whole)
    print(  # noqa: T201 - a harness prints its figures
        f"\none byte of a SQLite file of {len(whole)} bytes changed, every {step}, in turn in one "
        f"bit and in all: {counted.total()} substitutions: {dict(counted)}"
    )
    assert missed == []
