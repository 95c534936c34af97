"""Each line of the health report says FAIL or WARN for what it is there to find."""

from __future__ import annotations

import sqlite3
from contextlib import closing
from datetime import datetime
from pathlib import Path

import pytest
import store_scenario as scenario
from sqlalchemy import text

from featherlog.errors import StoreError
from featherlog.store import engine as engine_module
from featherlog.store import health_file
from featherlog.store.engine import migrating, open_engine, resolve_url, sqlite_file, writing
from featherlog.store.health import examine
from featherlog.store.ledger import append
from featherlog.views.health import FAIL, OK, WARN, HealthLine

NOW = datetime.fromisoformat("2025-03-10T08:00:00+01:00")
ALIKE = {"database", "purpose", "append-only", "schema", "ledger", "clock"}


def lines(url: str, now: datetime = NOW) -> dict[str, HealthLine]:
    return {line.name: line for line in examine(url, now)}


def change(url: str, *statements: str) -> None:
    with migrating(open_engine(url)) as connection:
        for statement in statements:
            connection.execute(text(statement))


def tell(url: str, *moments: str) -> None:
    with writing(open_engine(url)) as connection:
        for number, at in enumerate(moments):
            draft = scenario.staff(f"Person {number}")
            append(connection, type(draft)(**{**_fields(draft), "at": at}))


def _fields(draft: object) -> dict[str, object]:
    return {name: getattr(draft, name) for name in draft.__slots__}  # type: ignore[attr-defined] - a slotted dataclass


def test_a_sound_database_is_well(database_url: str) -> None:
    tell(database_url, "2025-03-03T08:00:00+01:00", "2025-03-03T08:00:00+01:00")
    found = lines(database_url)
    assert {name: found[name].grade for name in ALIKE} == dict.fromkeys(ALIKE, OK)
    assert not any(found[name].todo for name in ALIKE)


@pytest.mark.parametrize("backend", ["sqlite"])
def test_a_sqlite_file_is_well_throughout(database_url: str) -> None:
    found = lines(database_url)
    del found["disk"], found["place"]  # of the computer these tests run on
    assert {line.grade for line in found.values()} == {OK}
    assert "synchronous 3" in found["settings"].found
    assert sqlite3.sqlite_version in found["database"].found


@pytest.mark.parametrize("backend", ["postgresql"])
def test_postgresql_names_what_it_runs_with(database_url: str) -> None:
    found = lines(database_url)
    assert "psycopg" in found["database"].found
    assert found["role"].grade == WARN
    assert "fsync" in found["settings"].found
    assert found["encryption"].grade in (OK, WARN)


@pytest.mark.parametrize("backend", ["postgresql"])
def test_the_daily_role_is_no_owner(database_url: str) -> None:
    role = "featherlog_daily_health"
    change(database_url, f"CREATE ROLE {role}")
    try:
        change(database_url, f"GRANT SELECT ON ALL TABLES IN SCHEMA public TO {role}")
        found = lines(f"{database_url}&options=-crole%3D{role}")
        assert found["role"].grade == OK
        assert found["ledger"].grade == OK
    finally:
        change(database_url, f"DROP OWNED BY {role}", f"DROP ROLE {role}")


def test_a_changed_projection_fails(database_url: str) -> None:
    tell(database_url, "2025-03-03T08:00:00+01:00")
    change(database_url, "UPDATE staff SET role = 'physician'")
    found = lines(database_url)["ledger"]
    assert found.grade == FAIL
    assert "Person 0" in found.found


@pytest.mark.parametrize("backend", ["sqlite"])
def test_a_changed_trigger_fails(database_url: str) -> None:
    name = "ledger_entry_no_update"
    change(
        database_url,
        f"DROP TRIGGER {name}",
        f"CREATE TRIGGER {name} BEFORE UPDATE ON ledger_entry BEGIN SELECT 1; END",
    )
    found = lines(database_url)
    assert (found["append-only"].grade, found["schema"].grade) == (OK, FAIL)


def test_a_changed_table_fails(database_url: str) -> None:
    change(database_url, "DROP INDEX ix_delivery_course")
    assert lines(database_url)["schema"].grade == FAIL


def test_a_purpose_that_is_not_known_fails(database_url: str) -> None:
    change(database_url, "INSERT INTO store_property VALUES ('other', 'yes')")
    assert lines(database_url)["purpose"].grade == FAIL


@pytest.mark.parametrize("backend", ["sqlite"])
def test_a_missing_trigger_fails(database_url: str) -> None:
    change(database_url, "DROP TRIGGER ledger_entry_no_update")
    found = lines(database_url)["append-only"]
    assert (found.grade, found.found) == (FAIL, "missing: ledger_entry_no_update")


@pytest.mark.parametrize("backend", ["postgresql"])
def test_a_disabled_trigger_fails(database_url: str) -> None:
    change(database_url, "ALTER TABLE ledger_entry DISABLE TRIGGER ledger_entry_no_change")
    found = lines(database_url)["append-only"]
    assert (found.grade, found.found) == (FAIL, "3 of 4 triggers in force")


@pytest.mark.parametrize("backend", ["sqlite"])
def test_settings_that_do_not_take_fail(database_url: str, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(engine_module, "_set_up_sqlite", lambda _connection, _record: None)
    found = lines(database_url)["settings"]
    assert found.grade == FAIL
    assert "foreign_keys 1" in found.todo


@pytest.mark.parametrize("backend", ["sqlite"])
def test_damage_fails_line_by_line(database_url: str) -> None:
    tell(database_url, *["2025-03-03T08:00:00+01:00"] * 60)
    file = sqlite_file(database_url)
    assert file is not None
    with closing(sqlite3.connect(file)) as connection:
        query = "SELECT rootpage FROM sqlite_master WHERE name = 'ledger_entry'"
        root = connection.execute(query).fetchone()[0]
        size = connection.execute("PRAGMA page_size").fetchone()[0]
    with file.open("r+b") as stream:
        stream.seek((root - 1) * size)
        stream.write(b"\xff" * size)
    found = lines(database_url)
    assert found["ledger"].grade == found["integrity"].grade == FAIL
    assert found["append-only"].grade == OK


@pytest.mark.parametrize(
    ("moments", "said"),
    [
        (("2025-03-03T09:00:00+01:00", "2025-03-03T09:30:00+02:00"), "first at entry 2"),
        (("2025-03-11T09:00:00+01:00",), "after now"),
    ],
)
def test_a_clock_that_jumped_is_seen(
    database_url: str, moments: tuple[str, ...], said: str
) -> None:
    tell(database_url, *moments)
    found = lines(database_url)["clock"]
    assert found.grade == WARN
    assert said in found.found


def test_no_database_is_a_sentence(tmp_path: Path) -> None:
    with pytest.raises(StoreError, match="There is no database"):
        lines(resolve_url(str(tmp_path / "none.db")))


@pytest.mark.parametrize(
    ("free_mb", "file_mb", "grade"),
    [(2000, 1, OK), (2000, 1001, WARN), (999, 1, WARN), (63, 1, FAIL)],
)
def test_free_space_is_judged_by_the_file(free_mb: int, file_mb: int, grade: str) -> None:
    assert health_file.disk(free_mb * 1_000_000, file_mb * 1_000_000).grade == grade


@pytest.mark.parametrize(
    ("mounts", "grade"),
    [
        ("/dev/sda / ext4 rw 0 0\n", OK),
        ("/dev/sda / ext4 rw 0 0\nserver:/x /data nfs4 rw 0 0\n", WARN),
        ("server:/x / nfs rw 0 0\n/dev/sda /data ext4 rw 0 0\n", OK),
        ("/dev/sda / ext4 rw 0 0\nremote /data fuse.sshfs rw 0 0\n", WARN),
        ("/dev/sda /data ext4 rw 0 0\n//server/x /data cifs rw 0 0\n", WARN),
        ("/dev/sda / ext4 rw 0 0\n//server/x /dat cifs rw 0 0\n", OK),
        ("", WARN),
    ],
)
def test_a_network_path_is_warned_of(tmp_path: Path, mounts: str, grade: str) -> None:
    (tmp_path / "mounts").write_text(mounts, encoding="utf-8")
    assert health_file.place(Path("/data/featherlog.db"), tmp_path / "mounts").grade == grade


@pytest.mark.parametrize(
    ("mode", "folder_mode", "grade"),
    [(0o600, 0o700, OK), (0o640, 0o700, WARN), (0o660, 0o700, FAIL), (0o600, 0o777, FAIL)],
)
def test_modes_are_judged(tmp_path: Path, mode: int, folder_mode: int, grade: str) -> None:
    file = tmp_path / "featherlog.db"
    file.touch()
    file.chmod(mode)
    tmp_path.chmod(folder_mode)
    assert health_file.modes(file).grade == grade
