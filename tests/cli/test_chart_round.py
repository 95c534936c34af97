"""The chart round at the command line: decisions, checks, sign-offs and printed pages."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import pytest
from department import AUTHOR, CHECKER, THIGH, moment, treated

from featherlog.actions.desk import practice_time
from featherlog.actions.today import today

if TYPE_CHECKING:
    from collections.abc import Callable

    from program import Outcome, Program

DAY = "2026-03-02"


@pytest.fixture
def run(
    department: Program, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> Callable[..., Outcome]:
    def here(*words: str) -> Outcome:
        return department.here(monkeypatch, capsys, *words)

    return here


def _printed(department: Program) -> str:
    with practice_time(moment(DAY)):
        return today(department.database, THIGH).page_code


def test_a_departure_is_explained_decided_and_shown_so(
    department: Program, run: Callable[..., Outcome]
) -> None:
    treated(department.database, THIGH, DAY, field_positions={"lower thigh": "C"})
    assert run("departures", THIGH).out == (
        "1. OPEN  fraction 1, fields apart (incoherent): upper thigh at A, lower thigh at\n"
        "C, planned A: a strip of 2.0 cm at mid thigh got no dose of this fraction (ideal\n"
        "edges). No reason given yet.\n"
        "   strip at mid thigh: 2.0 cm wide, 0.00 Gy in this fraction (0 %), 28.00 of\n"
        "   30.00 Gy in the course (93.3 %), ideal edges\n"
    )
    words = ("decide", THIGH, "1", "--decision", "no compensation", "--by", AUTHOR)
    assert run(*words).code == 4
    run("explain", THIGH, "1", "--reason", "misread", "--by", AUTHOR)
    assert "1. OPEN, undecided  fraction 1" in run("departures", THIGH).out
    assert run(*words).out == f"Departure 1 of {THIGH} is decided.\n"
    assert run("departures", THIGH).out.endswith("   Decision: no compensation\n")


def test_a_review_is_shown_and_then_signed(
    department: Program, run: Callable[..., Outcome]
) -> None:
    treated(department.database, THIGH, DAY)
    came = run("review", THIGH, "--sign", "--by", CHECKER)
    assert "sign-off by a physicist: 5 entries and no earlier one" in came.out
    assert came.fault.startswith(f"{CHECKER} has signed this review, up to ledger entry ")
    again: Any = run("review", THIGH, "--json").json
    assert [line["who"] for line in again["week"]["sign_offs"]] == [CHECKER, "", ""]
    assert again["week"]["changes"] == []


def test_a_position_is_checked(run: Callable[..., Outcome]) -> None:
    came = run("course", "position-checked", THIGH, "B", "--by", CHECKER)
    assert came.out == f"Position B of {THIGH} is checked.\n"


def test_a_printed_page_is_valid_and_then_superseded(
    department: Program, run: Callable[..., Outcome]
) -> None:
    code = _printed(department)
    valid = run("sheet-check", code.lower())
    assert (valid.code, valid.err) == (0, "")
    assert " ".join(valid.out.split()).startswith(f"{code} is valid: a page of course {THIGH}")
    treated(department.database, THIGH, DAY)
    came = run("sheet-check", code, "--json")
    assert (came.code, came.json["status"]) == (4, "superseded")
    assert came.fault.startswith(f"{code} is superseded: a page of course {THIGH}, fraction 1, out")
    assert came.json["superseded_kind"] == "fraction recorded"
