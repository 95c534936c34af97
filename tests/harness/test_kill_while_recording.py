"""Recorders are killed at random instants, and a server is ended hard under load.

Every acknowledged entry is there, none is half-written, the ledger verifies, the next record works.
This shows what the death of a process does; it says nothing of a power failure.
"""

from __future__ import annotations

import random
import subprocess
import sys
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, Self

import pytest
from department import THIGH, add_course, build, recorded
from sqlalchemy import func, select

from featherlog.store import ledger
from featherlog.store.engine import open_engine, reading, sqlite_file
from featherlog.store.tables import delivery
from featherlog.store.verify import verify

if TYPE_CHECKING:
    from collections.abc import Callable

    from conftest import OwnServer

ZYGOTE = Path(__file__).with_name("recording_zygote.py")
LONGEST_S = 0.25  # several records: every instant of a record is hit
TRIALS_A_COURSE = 12
RESTART_EVERY = 5


@dataclass
class Figures:
    """What happened, counted."""

    trials: int = 0
    restarts: int = 0
    acknowledged: int = 0
    in_a_record: int = 0
    written_unacknowledged: int = 0
    hot_journals: int = 0


class Recorders:
    """The process that forks recorders, and the database they write to."""

    def __init__(self, url: str) -> None:
        self.url = url
        self.figures = Figures()
        self._process = subprocess.Popen(
            [sys.executable, str(ZYGOTE), url],
            stdin=subprocess.PIPE,
            stdout=subprocess.PIPE,
            text=True,
            bufsize=1,
        )
        assert self._line() == "ready"

    def __enter__(self) -> Self:
        return self

    def __exit__(self, *_: object) -> None:
        self._process.communicate()

    def trial(self, key: str, seconds: float, strike: Callable[[], None] | None = None) -> None:
        """Let one recorder work until it is killed; ``strike`` after its first record instead."""
        before = self.head()
        assert self._process.stdin is not None
        self._process.stdin.write(f"{key} {seconds}\n")
        said = []
        while (line := self._line()) != "dead":
            assert not line.startswith("failed"), line
            said.append(line)
            if strike is not None and line.startswith("ack"):
                strike()
                strike = None
                self.figures.restarts += 1
        self._check(before, said)

    def head(self) -> int:
        with reading(open_engine(self.url)) as connection:
            last = ledger.head(connection)
        return last.number if last else 0

    def _line(self) -> str:
        assert self._process.stdout is not None
        line = self._process.stdout.readline()
        assert line, "the recorders' process ended"
        return line.strip()

    def _check(self, before: int, said: list[str]) -> None:
        file = sqlite_file(self.url)
        hot = file is not None and file.with_name(f"{file.name}-journal").exists()
        acknowledged = [int(line.split()[1]) for line in said if line.startswith("ack")]
        last = before + len(acknowledged)
        assert acknowledged == list(range(before + 1, last + 1))
        now = self.head()
        # What was acknowledged is there; of what was not, at most the one record under way.
        assert last <= now <= last + 1
        assert not (now > last and said[-1].startswith("ack"))
        counted = self.figures
        counted.trials += 1
        counted.acknowledged += len(acknowledged)
        counted.in_a_record += bool(said) and not said[-1].startswith("ack")
        counted.written_unacknowledged += now - last
        counted.hot_journals += hot


def whole(url: str) -> None:
    """Check that every record has all its beams and that everything fits together."""
    with reading(open_engine(url)) as connection:
        for entry in ledger.entries(connection):
            query = select(func.count()).where(delivery.c.entry == entry.number)
            beams = len(entry.content.get("beams", ()))
            assert connection.execute(query).scalar_one() == beams
        assert verify(connection).fault == ""


def strike(url: str, trials: int, restart: Callable[[], None] | None = None) -> Figures:
    build(url)
    keys = [THIGH, *(f"FH-3{number:03}" for number in range(trials // TRIALS_A_COURSE))]
    for key in keys[1:]:
        add_course(url, key)
    chance = random.Random(20260302)  # noqa: S311 - the same instants every time, as far as can be
    with Recorders(url) as recorders:
        for number in range(trials):
            key = keys[number % len(keys)]
            recorders.trial(key, chance.uniform(0, LONGEST_S))
            if restart is not None and number % RESTART_EVERY == 0:
                recorders.trial(key, 60, restart)
            before = recorders.head()
            assert recorded(url, key, "2026-03-02", position="A").entry == before + 1
    whole(url)
    return recorders.figures


def report(kind: str, figures: Figures) -> None:
    print(  # noqa: T201 - a harness prints its figures
        f"\nkill -9 while recording, {kind}: {figures.trials} recorders killed or cut off, "
        f"{figures.restarts} of them by a hard restart of the server; "
        f"{figures.acknowledged} records acknowledged, all there; {figures.in_a_record} deaths in "
        f"the middle of a record, {figures.written_unacknowledged} of which was written whole; "
        f"{figures.hot_journals} hot journals rolled back. Process death, not power loss."
    )


@pytest.mark.parametrize(
    "trials", [15, pytest.param(500, marks=pytest.mark.long)], ids=["short", "long"]
)
def test_sqlite(tmp_path: Path, trials: int) -> None:
    figures = strike(f"sqlite:///{tmp_path}/featherlog.db", trials)
    report("SQLite", figures)
    assert figures.trials == trials
    assert figures.in_a_record > 0
    assert figures.acknowledged > 0


@pytest.mark.parametrize(
    "trials", [10, pytest.param(200, marks=pytest.mark.long)], ids=["short", "long"]
)
def test_postgresql(own_postgresql: OwnServer, trials: int) -> None:
    figures = strike(own_postgresql.database(), trials, own_postgresql.restart)
    report("PostgreSQL", figures)
    assert figures.restarts == trials // RESTART_EVERY
    assert figures.in_a_record > 0
    assert figures.acknowledged > 0
