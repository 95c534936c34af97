"""Backups are verified copies; a restore is verified, acknowledged, and keeps what it replaces."""

from __future__ import annotations

import shutil
import sqlite3
import stat
from contextlib import closing
from pathlib import Path

import pytest
import store_scenario as scenario

from featherlog.errors import IntegrityError, NotFoundError, RefusedError, StoreError
from featherlog.store import engine as engine_module
from featherlog.store.backup import back_up, restore, verify
from featherlog.store.engine import open_engine, reading, resolve_url, writing
from featherlog.store.ledger import append, entries
from featherlog.store.migrate import create


def tell(file: Path, *names: str) -> None:
    with writing(open_engine(resolve_url(str(file)))) as connection:
        for name in names:
            append(connection, scenario.staff(name))


def told(file: Path) -> list[str]:
    with reading(open_engine(resolve_url(str(file)))) as connection:
        return [entry.content["name"] for entry in entries(connection)]


def tamper(file: Path, *statements: str) -> None:
    with closing(sqlite3.connect(file)) as connection, connection:
        for (trigger,) in connection.execute("SELECT name FROM sqlite_master WHERE type='trigger'"):
            connection.execute(f"DROP TRIGGER {trigger}")
        for statement in statements:
            connection.execute(statement)


@pytest.fixture
def file(sqlite_template: Path, tmp_path: Path) -> Path:
    """Give a database with two people in its ledger."""
    copied = Path(shutil.copy(sqlite_template, tmp_path / "featherlog.db"))
    tell(copied, "Rowan Finch", "Hazel Wren")
    return copied


@pytest.fixture
def backup(file: Path, tmp_path: Path) -> Path:
    """Give a backup of it."""
    return back_up(file, tmp_path / "monday.backup")


def names(folder: Path) -> set[str]:
    return {path.name for path in folder.iterdir()}


class TestBackup:
    """Making a copy."""

    def test_it_holds_everything_and_is_private(self, file: Path, backup: Path) -> None:
        assert told(backup) == told(file) == ["Rowan Finch", "Hazel Wren"]
        assert stat.S_IMODE(backup.stat().st_mode) == 0o600
        assert names(file.parent) == {file.name, backup.name}

    def test_it_stands_beside_the_file_when_no_name_is_given(self, file: Path) -> None:
        made = back_up(file, None)
        assert made.parent == file.parent
        assert made.name.startswith("featherlog.db.2")

    def test_no_file_is_written_over(self, file: Path, backup: Path) -> None:
        with pytest.raises(RefusedError, match="is there already"):
            back_up(file, backup)

    def test_it_can_be_made_while_another_writes(self, file: Path, tmp_path: Path) -> None:
        with writing(open_engine(resolve_url(str(file)))) as connection:
            append(connection, scenario.staff("Ash Plover"))
            made = back_up(file, tmp_path / "meanwhile.backup")
        assert told(made) == ["Rowan Finch", "Hazel Wren"]

    def test_a_file_that_stays_busy_is_a_sentence(
        self, file: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
    ) -> None:
        monkeypatch.setattr(engine_module, "BUSY_SECONDS", 0)
        with closing(sqlite3.connect(file, isolation_level=None)) as other:
            other.execute("BEGIN EXCLUSIVE")
            with pytest.raises(StoreError, match=r"cannot be copied .* locked"):
                back_up(file, tmp_path / "busy.backup")
        assert names(tmp_path) == {file.name}

    def test_a_file_that_is_not_there_is_not_made(self, tmp_path: Path) -> None:
        with pytest.raises(StoreError, match=r"cannot be copied .* unable to open"):
            back_up(tmp_path / "none.db", None)
        assert names(tmp_path) == set()

    @pytest.mark.parametrize(
        ("statement", "fault"),
        [
            ("UPDATE ledger_entry SET who = 'Ash Plover' WHERE number = 1", "entry 1"),
            ("UPDATE staff SET role = 'administrator'", "staff"),
        ],
    )
    def test_of_a_database_that_is_not_sound_there_is_none(
        self, file: Path, tmp_path: Path, statement: str, fault: str
    ) -> None:
        tamper(file, statement)
        with pytest.raises(IntegrityError, match=rf"No backup was made.*{fault}"):
            back_up(file, tmp_path / "bad.backup")
        assert names(tmp_path) == {file.name}

    def test_a_copy_with_damaged_pages_is_found(self, backup: Path) -> None:
        with closing(sqlite3.connect(backup)) as connection, connection:
            connection.execute("PRAGMA writable_schema = ON")
            connection.execute("DELETE FROM sqlite_master WHERE name = 'ix_delivery_course'")
        with pytest.raises(IntegrityError, match="damaged"):
            verify(backup)


class TestRestore:
    """Putting a copy back."""

    def test_nothing_newer_is_lost_unseen(self, file: Path, backup: Path) -> None:
        tell(file, "Ash Plover", "Maple Teal")
        with pytest.raises(RefusedError) as refusal:
            restore(file, backup, acknowledged=1)
        said = str(refusal.value)
        assert "entry 3: staff added  by Rowan Finch, 2025-03-03T08:00:00+01:00" in said
        assert "entry 4: staff added" in said
        assert said.endswith("give --drop-entries 2 if these may go")
        assert len(told(file)) == 4

    def test_what_was_acknowledged_goes_and_the_file_is_kept(
        self, file: Path, backup: Path
    ) -> None:
        tell(file, "Ash Plover")
        before = file.read_bytes()
        done = restore(file, backup, acknowledged=1)
        assert [entry.number for entry in done.dropped] == [3]
        assert told(file) == ["Rowan Finch", "Hazel Wren"]
        assert stat.S_IMODE(file.stat().st_mode) == 0o600
        assert done.kept is not None
        assert done.kept.read_bytes() == before
        assert names(file.parent) == {file.name, backup.name, done.kept.name}

    def test_a_ledger_that_went_another_way_counts_as_dropped(
        self, file: Path, backup: Path
    ) -> None:
        tell(file, "Ash Plover")
        tell(backup, "Maple Teal", "Larch Dunnock")
        with pytest.raises(RefusedError, match="would drop 1 entries"):
            restore(file, backup)

    def test_a_missing_database_is_made_again(self, file: Path, backup: Path) -> None:
        file.unlink()
        assert restore(file, backup).kept is None
        assert told(file) == ["Rowan Finch", "Hazel Wren"]

    @pytest.mark.parametrize("content", [b"", b"no database" * 500])
    def test_an_unreadable_database_is_replaced_when_said_so(
        self, file: Path, backup: Path, content: bytes
    ) -> None:
        file.write_bytes(content)
        with pytest.raises(RefusedError, match="--drop-unreadable"):
            restore(file, backup)
        done = restore(file, backup, unreadable=True)
        assert done.kept is not None
        assert done.kept.read_bytes() == content
        assert told(file) == ["Rowan Finch", "Hazel Wren"]

    def test_a_log_left_behind_is_not_played_into_the_new_file(
        self, file: Path, backup: Path
    ) -> None:
        file.write_bytes(b"no database" * 500)
        log = file.with_name(f"{file.name}-wal")
        log.write_bytes(b"left behind")
        done = restore(file, backup, unreadable=True)
        assert done.kept is not None
        assert done.kept.with_name(f"{done.kept.name}-wal").read_bytes() == b"left behind"
        assert not log.exists()

    def test_it_waits_for_nobody_in_vain(
        self, file: Path, backup: Path, monkeypatch: pytest.MonkeyPatch
    ) -> None:
        monkeypatch.setattr(engine_module, "BUSY_SECONDS", 0)
        with (
            writing(open_engine(resolve_url(str(file)))),
            pytest.raises(StoreError, match="cannot be replaced: database is locked"),
        ):
            restore(file, backup)

    def test_practice_and_treatment_are_not_mixed(self, file: Path, tmp_path: Path) -> None:
        practice = tmp_path / "practice.db"
        create(resolve_url(str(practice)), demo=True)
        with pytest.raises(RefusedError, match="for practice"):
            restore(file, practice, acknowledged=2)

    @pytest.mark.parametrize(
        ("statement", "fault"),
        [
            ("DELETE FROM ledger_entry WHERE number = 1", "a row of staff refers to no ledger"),
            ("UPDATE ledger_entry SET at = '2025-03-04' WHERE number = 2", "entry 2"),
            ("DELETE FROM staff", "staff"),
        ],
    )
    def test_a_backup_that_is_not_sound_replaces_nothing(
        self, file: Path, backup: Path, statement: str, fault: str
    ) -> None:
        tamper(backup, statement)
        before = file.read_bytes()
        with pytest.raises(IntegrityError, match=fault):
            restore(file, backup)
        assert file.read_bytes() == before

    @pytest.mark.parametrize(
        ("content", "error", "fault"),
        [(None, NotFoundError, "no file"), (b"no database", StoreError, "not a database")],
    )
    def test_what_is_no_backup_is_refused(
        self, file: Path, tmp_path: Path, content: bytes | None, error: type, fault: str
    ) -> None:
        source = tmp_path / "other"
        if content is not None:
            source.write_bytes(content)
        with pytest.raises(error, match=fault):
            restore(file, source)
        assert len(told(file)) == 2
