"""Sixteen processes record at once: each another course, or all of them one fraction."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path

import pytest
from department import THIGH, add_course, build, confirmed

from featherlog.store.engine import BUSY_SECONDS, open_engine, reading
from featherlog.store.verify import verify

TOGETHER = Path(__file__).with_name("record_together.py")
KEYS = (THIGH, *(f"FH-31{number:02}" for number in range(15)))


def together(url: str, where: str, *keys: str) -> list[list[str]]:
    command = [sys.executable, str(TOGETHER), url, where, *keys]
    done = subprocess.run(command, check=True, capture_output=True, text=True)
    return [line.split(maxsplit=3) for line in done.stdout.splitlines()]


@pytest.mark.parametrize(
    "rounds", [1, pytest.param(20, marks=pytest.mark.long)], ids=["short", "long"]
)
def test_on_sixteen_courses(empty_database_url: str, backend: str, rounds: int) -> None:
    build(empty_database_url)
    for key in KEYS[1:]:
        add_course(empty_database_url, key)
    answers = [answer for _ in range(rounds) for answer in together(empty_database_url, "A", *KEYS)]
    assert [answer for answer in answers if answer[0] != "ok"] == []
    assert sorted(answer[1] for answer in answers) == sorted(KEYS * rounds)
    entries = sorted(int(answer[2]) for answer in answers)
    assert entries == list(range(entries[0], entries[0] + rounds * len(KEYS)))
    slowest = max(float(answer[3]) for answer in answers)
    print(  # noqa: T201 - a harness prints its figures
        f"\n16 processes, 16 courses, {backend}: {len(answers)} records at once in {rounds} "
        f"round(s), all succeeded; the slowest waited {slowest:.2f} of {BUSY_SECONDS} s"
    )
    with reading(open_engine(empty_database_url)) as connection:
        assert verify(connection).fault == ""


def test_on_one_fraction(empty_database_url: str, backend: str) -> None:
    build(empty_database_url)
    confirmed(empty_database_url, THIGH, "2026-03-02")
    answers = together(empty_database_url, "confirmed", *[THIGH] * 16)
    others = [" ".join(answer[2:]) for answer in answers if answer[0] != "ok"]
    assert len(others) == 15
    told = "fraction 1 was recorded at 2026-03-02T09:00:00+01:00 by Ash Plover with Maple Teal"
    assert all(told in why for why in others)
    print(  # noqa: T201 - a harness prints its figures
        f"\n16 processes, one fraction, {backend}: 1 recorded it, 15 were told who had and when"
    )
