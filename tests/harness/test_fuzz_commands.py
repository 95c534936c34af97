"""Thousands of command lines that nobody would type: each is answered, and refusals write nothing.

Never a traceback, never a failure that the program cannot name, always a documented exit code.
Where it is not 0 the ledger ends where it ended before, but for attempts with a wrong passphrase,
and no file is left behind.
"""

from __future__ import annotations

import io
import random
import shlex
import shutil
import sqlite3
import sys
import time
from collections import Counter
from contextlib import closing
from dataclasses import dataclass, field
from datetime import date, timedelta
from typing import TYPE_CHECKING

import pytest
from command_lines import BACKUP, CLINIC, CommandLines
from department import BREAST, THIGH, build, treated
from program import PASSPHRASE, Outcome, Program

from featherlog.actions.database import create
from featherlog.actions.ledger import verify_ledger
from featherlog.actions.operations import back_up
from featherlog.errors import EXIT_CODES

if TYPE_CHECKING:
    from collections.abc import Callable
    from pathlib import Path

IN_ONE_COPY = 250
"""How many commands one copy of the department takes before the next, fresh one."""
IN_ONE_DAY = 12
FIRST_DAY = date(2026, 3, 9)


@pytest.fixture(scope="session")
def begun_file(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Give a department in its second week, with a departure."""
    file = tmp_path_factory.mktemp("begun") / "featherlog.db"
    build(str(file))
    for day in ("2026-03-02", "2026-03-03", "2026-03-04", "2026-03-05", "2026-03-06"):
        treated(str(file), THIGH, day)
    treated(str(file), BREAST, "2026-03-05", position="B")
    back_up(str(file), file.with_name(BACKUP))
    return file


@dataclass
class Tally:
    """What came of the commands so far."""

    codes: Counter[int] = field(default_factory=Counter)
    written: int = 0
    slowest: tuple[float, str] = (0.0, "")
    faults: list[str] = field(default_factory=list)


class Copy:
    """One copy of the department, and what may be seen of it from outside."""

    def __init__(self, begun: Path, folder: Path) -> None:
        folder.mkdir()
        self.folder = folder / "work"
        self.folder.mkdir()
        self.file = folder / begun.name
        shutil.copy(begun, self.file)
        shutil.copy(begun.with_name(BACKUP), self.folder)
        create(str(self.folder / CLINIC / begun.name), demo=False)
        for name, text, mode in (
            ("right", PASSPHRASE, 0o600),
            ("wrong", "no bird sings like this", 0o600),
            ("open", PASSPHRASE, 0o644),
        ):
            passphrase = self.folder / f"{name}.passphrase"
            passphrase.write_text(f"{text}\n", encoding="utf-8")
            passphrase.chmod(mode)

    def files(self) -> set[str]:
        return {str(file) for file in self.folder.parent.rglob("*")}

    def ledger(self) -> list[tuple[int, str, str]]:
        query = "SELECT number, hash, kind FROM ledger_entry ORDER BY number"
        with closing(sqlite3.connect(self.file)) as connection:
            return connection.execute(query).fetchall()


def fuzz(
    begun: Path, folder: Path, count: int, run: Callable[[Program, list[str]], Outcome]
) -> Tally:
    """Give so many commands, each copy of the department from a seed of its own."""
    tally = Tally()
    for start in range(0, count, IN_ONE_COPY):
        copy = Copy(begun, folder / f"{start}")
        lines = CommandLines(random.Random(start), copy.folder)  # noqa: S311 - repeatable on purpose
        for number in range(min(IN_ONE_COPY, count - start)):
            day = FIRST_DAY + timedelta(days=number // IN_ONE_DAY)
            program = Program(str(copy.file), copy.folder).at(day.isoformat())
            _one(tally, copy, lines.one(), lambda words, at=program: run(at, words))
        fault = verify_ledger(str(copy.file), None, lambda *_: None).fault
        if fault:
            tally.faults.append(f"after the commands from {start} on: {fault}")
        shutil.rmtree(folder / f"{start}")
    return tally


def _one(tally: Tally, copy: Copy, words: list[str], run: Callable[[list[str]], Outcome]) -> None:
    files, ledger, started = copy.files(), copy.ledger(), time.perf_counter()
    came = run(words)
    spent = time.perf_counter() - started
    line = shlex.join(words)[:300]
    tally.slowest = max(tally.slowest, (spent, line))
    tally.codes[came.code] += 1
    after = copy.ledger()
    tally.written += after != ledger
    wrong = _wrong(came)
    if came.code != 0:
        more = after[len(ledger) :]
        if after[: len(ledger)] != ledger or {kind for *_, kind in more} - {"signing failed"}:
            wrong = "the ledger changed"
        elif copy.files() - files:
            wrong = f"left {sorted(copy.files() - files)}"
    if wrong:
        tally.faults.append(f"{line}\n    -> {came.code}: {wrong}: {came.err.strip()[-300:]}")


def _wrong(came: Outcome) -> str:
    if "Traceback" in came.err:
        return "a traceback"
    if came.code not in EXIT_CODES:
        return "an undocumented exit code"
    if "the program failed" in came.err:
        return "a failure without a name"
    return "" if came.code == 0 or came.err.strip() else "no reason given"


def told(tally: Tally, how: str) -> None:
    codes = ", ".join(f"{code}: {number}" for code, number in sorted(tally.codes.items()))
    seconds, line = tally.slowest
    print(  # noqa: T201 - a harness prints its figures
        f"\n{sum(tally.codes.values())} fuzzed commands {how}; exit codes {codes}; "
        f"{tally.written} wrote to the ledger; the slowest took {seconds:.1f} s ({line[:60]})"
    )
    assert tally.faults == [], "\n".join(tally.faults)


@pytest.mark.parametrize(
    "count", [500, pytest.param(10_000, marks=pytest.mark.long)], ids=["short", "long"]
)
def test_in_this_process(
    count: int,
    begun_file: Path,
    tmp_path: Path,
    monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
) -> None:
    monkeypatch.setattr(sys, "stdin", io.StringIO())
    # Answers slow down after wrong passphrases, which is shown elsewhere.
    monkeypatch.setattr("featherlog.actions.signing.sleep", lambda _: None)
    tally = fuzz(
        begun_file, tmp_path, count, lambda at, words: at.here(monkeypatch, capsys, *words)
    )
    with capsys.disabled():
        told(tally, "in this process")


@pytest.mark.parametrize(
    "count", [10, pytest.param(200, marks=pytest.mark.long)], ids=["short", "long"]
)
def test_in_processes_of_their_own(count: int, begun_file: Path, tmp_path: Path) -> None:
    told(fuzz(begun_file, tmp_path, count, lambda at, words: at.start(*words)), "in processes")
