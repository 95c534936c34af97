"""Every kind of wrong input: one clear sentence, its exit code, and nothing written."""

from __future__ import annotations

import shlex
import shutil
import tomllib
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Any

import pytest
from department import AUTHOR, CHECKER, PHYSICIAN, THIGH, confirmed, recorded, treated
from program import PAIR, SCENARIO, Outcome, Program

from featherlog.actions.database import create, status
from featherlog.actions.today import today
from featherlog.words import STOP_AND_CALL

USAGE, INPUT, REFUSED, NOT_FOUND, STORE = 2, 3, 4, 5, 6
CONFIRM, RECORD = ("confirm", THIGH), ("record", THIGH)
NO_FIXED_CLOCK = "real time"
STRANGER = "nobody called {!r} is on the staff list; see `featherlog staff list`"
NO_COURSE = "there is no course 'FH-9'; see `featherlog course list`"
MALFORMED = "--gap is 'x', but must be written NAME=VALUE"


@dataclass(frozen=True)
class Case:
    """A command, its exit code and its whole message; ``CODE`` in it is the sheet's code."""

    words: tuple[str, ...]
    code: int
    fault: str


def _cases(group: str) -> list[Any]:
    file = Path(__file__).with_name("refusals.toml")
    rows = tomllib.loads(file.read_text(encoding="utf-8"))[group]
    return [pytest.param(_case(**row), id=row.pop("name")) for row in rows]


def _case(name: str, command: str, code: int, fault: str) -> Case:
    del name
    command = command.replace("PAIR", shlex.join(PAIR)).replace("SCENARIO", str(SCENARIO))
    return Case(tuple(shlex.split(command)), code, fault.replace("STOP", STOP_AND_CALL))


@pytest.fixture
def refuses(
    department: Program, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> Refuses:
    return Refuses(department, monkeypatch, capsys)


@dataclass(frozen=True)
class Refuses:
    """Runs a command that has to fail and looks whether anything was written."""

    program: Program
    monkeypatch: pytest.MonkeyPatch
    capsys: pytest.CaptureFixture[str]

    def run(self, *words: str, on: str | None = None) -> Outcome:
        program = self.program
        if on == NO_FIXED_CLOCK:
            program = replace(program, clock=None)
        elif on:
            program = program.at(on)
        return program.here(self.monkeypatch, self.capsys, *words)

    def __call__(self, case: Case, on: str | None = None) -> None:
        before = status(self.program.database)
        files = sorted(self.program.folder.rglob("*"))
        came = self.run(*case.words, on=on)
        fault = case.fault
        if "CODE" in fault:
            fault = fault.replace("CODE", today(self.program.database, THIGH).page_code)
        assert (came.out, came.fault, came.code) == ("", fault, case.code)
        assert len(came.err.splitlines()) == 1
        assert (status(self.program.database), sorted(self.program.folder.rglob("*"))) == (
            before,
            files,
        )


@pytest.mark.parametrize("case", _cases("before_treatment"))
def test_before_treatment(case: Case, refuses: Refuses) -> None:
    refuses(case)


@pytest.fixture(scope="session")
def shift_day_file(department_file: str, tmp_path_factory: pytest.TempPathFactory) -> str:
    file = shutil.copy(department_file, tmp_path_factory.mktemp("shift-day"))
    for day in ("2026-03-02", "2026-03-03", "2026-03-04", "2026-03-05", "2026-03-06"):
        treated(file, THIGH, day)
    return str(file)


@pytest.mark.parametrize("case", _cases("shift_day"))
def test_on_a_shift_day(case: Case, refuses: Refuses, shift_day_file: str) -> None:
    shutil.copy(shift_day_file, refuses.program.database)
    refuses(case, on="2026-03-09")


def test_a_second_fraction_on_one_day_is_refused(refuses: Refuses) -> None:
    treated(refuses.program.database, THIGH, "2026-03-02")
    reason = "fraction 1 was delivered today already, and the course has 1 a day"
    refuses(
        Case((*CONFIRM, *PAIR), REFUSED, f"{reason}. {STOP_AND_CALL}"), on="2026-03-02T15:00:00"
    )


def test_the_remainder_of_a_broken_fraction_is_locked_to_its_position(refuses: Refuses) -> None:
    program = refuses.program
    treated(program.database, THIGH, "2026-03-02", metersets_mu={"PA lower": 40.0})
    reason = "the remainder is locked: read the position back from the console with --position"
    refuses(Case((*CONFIRM, *PAIR), REFUSED, f"{reason} (planned A). {STOP_AND_CALL}"))
    words = (*CONFIRM, *PAIR, "--position", "B")
    read = "position B was read back, but fraction 1 is at A"
    refuses(Case(words, REFUSED, f"{read}. {STOP_AND_CALL}"))


def test_a_design_goes_from_hand_to_hand(refuses: Refuses) -> None:
    """A second revision: only in order, never by its author alone."""
    by = {name: ("--by", name) for name in (AUTHOR, CHECKER, PHYSICIAN)}
    approve = ("course", "approve", THIGH, "--with", CHECKER)
    check = ("course", "check", THIGH)
    prepare = ("course", "prepare", str(SCENARIO / "thigh.toml"), *by[AUTHOR])
    assert refuses.run(*prepare).code == 0
    unchecked = "revision 2 of FH-2041 is prepared; only one that is checked can be approved"
    refuses(Case((*approve, *by[PHYSICIAN]), REFUSED, unchecked))
    own = "Rowan Finch prepared revision 2 of FH-2041; someone else must {} it"
    refuses(Case((*check, *by[AUTHOR]), REFUSED, own.format("check")))
    waits = (
        "revision 2 of course FH-2041 is prepared and waits; return it with `featherlog course "
        "return` before preparing another"
    )
    refuses(Case(prepare, REFUSED, waits))
    assert refuses.run(*check, *by[CHECKER]).code == 0
    refuses(Case((*approve, *by[AUTHOR]), REFUSED, own.format("approve")))
    alone = (
        "two people must sign to approve a design, as the department's policy says; name the "
        "second with --with"
    )
    refuses(Case(("course", "approve", THIGH, *by[PHYSICIAN]), REFUSED, alone))
    refuses(Case(prepare, REFUSED, waits.replace("prepared and", "checked and")))
    assert refuses.run(*approve, *by[PHYSICIAN]).code == 0


def test_an_unapproved_design_is_not_confirmed(refuses: Refuses) -> None:
    program = refuses.program
    design = program.folder / "other.toml"
    text = (SCENARIO / "thigh.toml").read_text(encoding="utf-8")
    design.write_text(text.replace("FH-2041", "FH-2043"), encoding="utf-8")
    assert refuses.run("course", "prepare", str(design), "--by", AUTHOR).code == 0
    reason = "revision 1 of this design is prepared, not approved"
    refuses(Case(("confirm", "FH-2043", *PAIR), REFUSED, f"{reason}. {STOP_AND_CALL}"))
    came = refuses.run("sheet", "FH-2043", "--output", "stop.pdf")
    assert came.out == f"stop.pdf: {STOP_AND_CALL}\n"


def test_a_database_that_is_not_there(refuses: Refuses) -> None:
    missing = refuses.program.folder / "none.db"
    words = ("today", "--database", str(missing))
    fault = f"There is no database at {missing}; make one with `featherlog database create`."
    refuses(Case(words, STORE, fault))


def test_a_demo_beside_patients(refuses: Refuses) -> None:
    folder = refuses.program.folder / "clinic"
    folder.mkdir()
    create(str(folder / "featherlog.db"), demo=False)
    came = refuses.run("demo", "--folder", str(folder), on=NO_FIXED_CLOCK)
    fault = f"{folder}/featherlog.db is not a practice database; name another --folder"
    assert (came.code, came.fault, came.out) == (REFUSED, fault, "")
    assert [file.name for file in folder.iterdir()] == ["featherlog.db"]


@pytest.mark.parametrize("clock", ["yesterday", "2026-03-02T09:00:00"])
def test_a_clock_without_a_time_and_its_offset(clock: str, refuses: Refuses) -> None:
    wrong = replace(refuses.program, clock=clock)
    came = wrong.here(refuses.monkeypatch, refuses.capsys, "today")
    fault = f"FEATHERLOG_CLOCK is '{clock}', but must be a time with its offset, such as "
    assert (came.code, came.fault) == (INPUT, f"{fault}2026-03-02T09:00:00+01:00")


def test_a_fixed_clock_with_patients(database_url: str, tmp_path: Path) -> None:
    came = Program(database_url, tmp_path).start("today")
    fault = "FEATHERLOG_CLOCK is set, but only a practice database takes a fixed clock"
    assert (came.code, came.fault, came.out) == (INPUT, fault, "")


@pytest.fixture
def practice(empty_database_url: str, tmp_path: Path) -> Program:
    program = Program(empty_database_url, tmp_path)
    program.must("database", "create", "--practice")
    return program


def test_in_a_process_of_its_own(practice: Program) -> None:
    """A handful of the same on both kinds of database, as a shell sees them."""
    first = ("staff", "add", "Hazel Heron", "--role", "administrator", "--by", "Hazel Heron")
    stranger = ("staff", "add", "Elm Rook", "--role", "therapist", "--by", "Elm Rook")
    empty = (
        "the staff list is empty: its first person is an administrator who adds themselves (--role "
        "administrator, --by with their own name)"
    )
    cases = [
        (stranger, REFUSED, empty),
        (first, 0, ""),
        (stranger, NOT_FOUND, STRANGER.format("Elm Rook")),
        (("confirm", "FH-9", *PAIR), NOT_FOUND, NO_COURSE),
        (("today", "FH-9"), NOT_FOUND, NO_COURSE),
        (
            ("record", "FH-9", *PAIR, "--gap", "x"),
            INPUT,
            "--gap is 'x', but must be written NAME=VALUE",
        ),
    ]
    for words, code, fault in cases:
        came = practice.start(*words)
        assert (came.code, came.fault) == (code, fault)
    assert practice.json("database", "status")["ledger_entries"] == 1


def test_words_the_program_does_not_know(practice: Program) -> None:
    came = practice.start("tomorrow")
    assert (came.code, came.out) == (USAGE, "")
    assert "No such command 'tomorrow'" in came.err
    came = practice.start("confirm", "FH-2041", "--by", "Ash Plover")
    assert came.code == USAGE
    assert "Missing option '--with'" in came.err


def test_a_reason_given_meanwhile_leaves_the_confirmation_valid(refuses: Refuses) -> None:
    database = refuses.program.database
    treated(database, THIGH, "2026-03-02", position="B")
    confirmed(database, THIGH, "2026-03-03")
    assert (
        refuses.run(
            "explain", THIGH, "1", "--reason", "misread", "--by", AUTHOR, on="2026-03-03"
        ).code
        == 0
    )
    came = refuses.run(*RECORD, *PAIR, on="2026-03-03")
    assert (came.code, "DEPARTURE" in came.out) == (0, False)


@pytest.mark.parametrize(
    ("words", "file"),
    [(("course", "prepare"), "thigh.toml"), (("machine", "add"), "alder.toml")],
)
def test_a_file_with_a_name_that_no_paper_can_print(
    words: tuple[str, ...], file: str, refuses: Refuses
) -> None:
    text = (SCENARIO / file).read_text(encoding="utf-8")
    strange = refuses.program.folder / file
    strange.write_text(text.replace('name = "Alder"', 'name = "松"').replace("Lark", "松"))
    came = refuses.run(*words, str(strange), "--by", AUTHOR)
    assert came.code == INPUT
    assert "has no way to show U+677E" in came.fault


def test_a_sheet_says_when_there_is_nothing_to_set(refuses: Refuses) -> None:
    database = refuses.program.database
    for number in range(1, 16):
        recorded(database, THIGH, "2026-03-02", fraction=number, position="A")
    came = refuses.run("sheet", THIGH, "--output", "last.pdf")
    assert came.out == "last.pdf: all 15 prescribed fractions are complete\n"


def test_a_reason_for_nothing_is_not_dropped_in_silence(refuses: Refuses) -> None:
    confirmed(refuses.program.database, THIGH, "2026-03-02")
    came = refuses.run(*RECORD, *PAIR, "--reason", "late")
    assert (came.code, came.fault) == (
        0,
        "Nothing differs from the plan, so the reason was not kept.",
    )
