"""Late entries, corrections, pauses and ends as people type and read them."""

from __future__ import annotations

from typing import TYPE_CHECKING

import pytest
from department import AUTHOR, PHYSICIAN, THERAPIST, THIGH
from program import PAIR

if TYPE_CHECKING:
    from collections.abc import Callable

    from program import Outcome, Program

    Run = Callable[..., Outcome]


@pytest.fixture
def run(
    department: Program, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> Run:
    return lambda *words: department.at("2026-03-06").here(monkeypatch, capsys, *words)


def test_a_late_record_and_its_correction(run: Run) -> None:
    assert run("corrections", THIGH).out == "No corrections.\n"
    tables = ("--table", "upper thigh=50", "--table", "lower thigh=79")
    late = ("--treated-at", "2026-03-02T09:10", "--position", "A", *tables, "--reason", "outage")
    entry = run("record", THIGH, *late, *PAIR, "--json").json["entry"]
    came = run("correct", THIGH, entry, "--position", "B", "--reason", "misread", *PAIR)
    assert came.out.startswith(f"Entry {entry + 1} stands in place of entry {entry}.\nRecorded")
    assert "No reason was given for what differs" in came.err
    (line,) = run("corrections", THIGH, "--json").json
    assert (line["corrects"], line["entry"], line["reason"]) == (entry, entry + 1, "misread")
    text = " ".join(run("corrections", THIGH).out.split())
    assert f"Entry {entry + 1} corrects entry {entry}: misread." in text
    assert "Was: fraction 1 at 2026-03-02T09:10:00+01:00: AP upper 112 MU at A" in text
    assert "Is: fraction 1 at 2026-03-02T09:10:00+01:00: AP upper 111 MU at B" in text


def test_a_record_that_should_not_be_there(run: Run) -> None:
    entry = run("record", THIGH, "--position", "A", *PAIR, "--json").json["entry"]
    came = run("correct", THIGH, entry, "--void", "--reason", "another patient", *PAIR)
    assert came.out.splitlines()[1] == "Fraction 1 was not delivered."
    assert run("today", THIGH, "--json").json["fraction"] == 1


def test_days_pauses_and_an_end(run: Run) -> None:
    said = [
        run("course", *words, "--reason", "skin", "--by", who).out
        for *words, who in (
            ("missed", THIGH, "--date", "2026-03-05", THERAPIST),
            ("pause", THIGH, THERAPIST),
            ("release", THIGH, PHYSICIAN),
            ("end", THIGH, PHYSICIAN),
        )
    ]
    assert said == [
        f"Noted. The next fraction of {THIGH} is projected for 2026-03-06.\n",
        f"Course {THIGH} is paused: no fraction is confirmed until it is released.\n",
        f"Course {THIGH} goes on; the next fraction is projected for 2026-03-06.\n",
        f"Course {THIGH} ended after 0 complete fractions.\n",
    ]


def test_another_machine_is_one_that_is_known(run: Run) -> None:
    came = run("course", "machine", THIGH, "Birch", "--reason", "down", "--by", AUTHOR)
    assert (came.code, came.fault) == (
        5,
        "there is no machine 'Birch'; add it with `featherlog machine add FILE`",
    )
