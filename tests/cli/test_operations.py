"""Backup, restore and health as a person meets them."""

from __future__ import annotations

import json
import sqlite3
from contextlib import closing
from typing import TYPE_CHECKING

from department import THIGH, recorded

if TYPE_CHECKING:
    import pytest
    from program import Program


def test_a_backup_is_put_back(
    department: Program, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    def run(*words: str) -> tuple[int, str, str]:
        came = department.here(monkeypatch, capsys, "database", *words)
        return came.code, came.out, came.fault

    code, out, _ = run("backup", "--output", "monday.backup")
    assert (code, out) == (0, "The verified backup is monday.backup\n")
    recorded(department.database, THIGH, "2026-03-02", position="A")

    code, out, fault = run("restore", "monday.backup")
    assert (code, out) == (4, "")
    assert f"fraction recorded {THIGH} by Ash Plover, 2026-03-02T09:00:00+01:00" in fault
    assert "--drop-entries 1" in fault

    code, out, _ = run("restore", "monday.backup", "--drop-entries", "1")
    assert code == 0
    assert "1 newer entries are no longer in the database" in out
    assert ".replaced" in out
    assert run("status")[0] == 0


def test_health_that_fails_has_an_exit_code_of_its_own(
    department: Program, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    with closing(sqlite3.connect(department.database)) as connection, connection:
        connection.execute("DROP TRIGGER ledger_entry_no_delete")
    plain = department.here(monkeypatch, capsys, "database", "health")
    assert plain.code == 7
    assert "FAIL  append-only  missing: ledger_entry_no_delete" in plain.out
    assert "-> somebody took away" in plain.out
    assert plain.fault == "the database is not sound: append-only, schema"
    found = department.here(monkeypatch, capsys, "database", "health", "--json")
    assert found.code == 7
    assert json.loads(found.out)["grade"] == "FAIL"
