"""Full disk, read-only file, locked database, damage, lost connection, clock set back.

Each is one clear sentence, and the database is afterwards what it was before.
"""

from __future__ import annotations

import os
import shutil
import sqlite3
import subprocess
import sys
from contextlib import closing
from pathlib import Path

import pytest
from department import THIGH, build, department_file, recorded
from sqlalchemy import text

from featherlog.actions.operations import health
from featherlog.errors import StoreError
from featherlog.store import engine as engine_module
from featherlog.store import ledger
from featherlog.store.engine import open_engine, reading, resolve_url, writing
from featherlog.store.entry import Kind
from featherlog.store.verify import verify

__all__ = ["department_file"]

ONCE = Path(__file__).with_name("record_once.py")
# Root may write what is read-only; without this right it may not.
UNPRIVILEGED = (
    ("setpriv", "--bounding-set", "-dac_override", "--inh-caps", "-dac_override")
    if os.geteuid() == 0
    else ()
)


@pytest.fixture
def file(department_file: str, tmp_path: Path) -> Path:
    """Give a department with nothing treated yet."""
    return Path(shutil.copy(department_file, tmp_path))


@pytest.fixture
def department_url(empty_database_url: str) -> str:
    """Give the same on either database."""
    build(empty_database_url)
    return empty_database_url


def once(file: Path, *limit: object, prefix: tuple[str, ...] = ()) -> tuple[int, str]:
    done = subprocess.run(
        [*prefix, sys.executable, str(ONCE), resolve_url(str(file)), THIGH, *map(str, limit)],
        check=False,
        capture_output=True,
        text=True,
    )
    assert done.stderr == ""
    return done.returncode, done.stdout.strip()


def entries(url: str) -> list[ledger.Entry]:
    with reading(open_engine(url)) as connection:
        assert verify(connection).fault == ""
        return list(ledger.entries(connection))


def assert_one_sentence(said: str, *words: str) -> None:
    assert len(said.splitlines()) == 1
    assert said.startswith("The database ")
    assert said.endswith(".")
    assert any(word in said for word in words), said


@pytest.mark.parametrize("room", ["none", "a page of the journal", "the file as it is"])
def test_a_full_disk(file: Path, room: str) -> None:
    with closing(sqlite3.connect(file)) as connection:
        connection.execute("VACUUM")  # so that the record needs pages that are not there
    limit = {"none": 0, "a page of the journal": 5000, "the file as it is": file.stat().st_size}
    before = entries(resolve_url(str(file)))
    code, said = once(file, limit[room])
    assert code == StoreError.exit_code
    assert_one_sentence(said, "disk")
    assert entries(resolve_url(str(file))) == before
    assert once(file)[0] == 0


@pytest.mark.skipif(
    bool(UNPRIVILEGED) and not shutil.which("setpriv"),
    reason="root needs setpriv",
)
@pytest.mark.parametrize("what", ["file", "folder"])
def test_what_may_only_be_read(file: Path, what: str) -> None:
    before = entries(resolve_url(str(file)))
    locked = file if what == "file" else file.parent
    locked.chmod(0o500 if what == "folder" else 0o400)
    try:
        code, said = once(file, prefix=UNPRIVILEGED)
    finally:
        locked.chmod(0o700)
    assert code == StoreError.exit_code
    assert_one_sentence(said, "readonly", "unable to open")
    assert entries(resolve_url(str(file))) == before


def test_a_database_that_another_keeps_locked(
    department_url: str, monkeypatch: pytest.MonkeyPatch
) -> None:
    before = entries(department_url)
    monkeypatch.setattr(engine_module, "BUSY_SECONDS", 0.05)
    with writing(open_engine(department_url)), pytest.raises(StoreError) as failure:
        recorded(department_url, THIGH, "2026-03-02", position="A")
    assert_one_sentence(str(failure.value), "locked", "lock timeout")
    assert entries(department_url) == before


def test_a_damaged_file(file: Path) -> None:
    with closing(sqlite3.connect(file)) as connection:
        query = "SELECT rootpage FROM sqlite_master WHERE name = 'delivery'"
        root = connection.execute(query).fetchone()[0]
    damaged = bytearray(file.read_bytes())
    damaged[(root - 1) * 4096 : root * 4096] = b"\xff" * 4096
    file.write_bytes(damaged)
    with pytest.raises(StoreError) as failure:
        recorded(str(file), THIGH, "2026-03-02", position="A")
    assert_one_sentence(str(failure.value), "malformed")
    assert file.read_bytes() == damaged


@pytest.mark.parametrize("backend", ["postgresql"])
def test_a_connection_lost_in_the_middle(department_url: str) -> None:
    before = entries(department_url)
    again = next(_draft(entry) for entry in before if entry.kind == Kind.MACHINE_ADDED)
    engine = open_engine(department_url)
    end = text("SELECT pg_terminate_backend(:pid)")

    def lose() -> None:
        with writing(engine) as connection:
            ledger.append(connection, again)
            pid = connection.execute(text("SELECT pg_backend_pid()")).scalar_one()
            with open_engine(department_url).connect() as other:
                other.execute(end, {"pid": pid})
            connection.execute(text("SELECT 1"))

    with pytest.raises(StoreError) as failure:
        lose()
    assert_one_sentence(str(failure.value), "terminating connection")
    assert entries(department_url) == before
    assert recorded(department_url, THIGH, "2026-03-02", position="A").entry == len(before) + 1


def _draft(entry: ledger.Entry) -> ledger.Draft:
    names = ("course", "kind", "who", "role", "meaning", "at", "content")
    return ledger.Draft(**{name: getattr(entry, name) for name in names})


def test_a_clock_set_back_is_recorded_and_seen(department_url: str) -> None:
    recorded(department_url, THIGH, "2026-03-03", position="A")
    late = recorded(department_url, THIGH, "2026-03-02", position="A").entry
    entries(department_url)
    [line] = [line for line in health(department_url).lines if line.name == "clock"]
    assert line.grade == "WARN"
    assert line.found.endswith(f"first at entry {late}")
