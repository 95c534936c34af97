"""How the whole command line behaves: help, examples, JSON, start-up, failures, width."""

from __future__ import annotations

import json
import os
import re
import shlex
import subprocess
import sys
from pathlib import Path
from typing import TYPE_CHECKING

import pytest
import typer
from department import BREAST, THIGH, treated
from program import PAIR, SCENARIO, Program, signed

from featherlog.cli.main import CONSOLE_WORDS, app, program
from featherlog.errors import EXIT_CODES
from featherlog.words import CAUTION, DOSE_CAUTION

if TYPE_CHECKING:
    from collections.abc import Iterator

    import click

README = Path(__file__).parents[2] / "README.md"
ROOT = typer.main.get_command(app)
READING = [
    ("today",),
    ("today", THIGH),
    ("departures", THIGH),
    ("corrections", THIGH),
    ("events", THIGH),
    ("review", THIGH),
    ("dose", THIGH),
    ("course", "show", THIGH),
    ("course", "list"),
    ("machine", "list"),
    ("staff", "list"),
    ("database", "status"),
    ("policy", "show"),
    ("ledger", "list"),
    ("ledger", "head"),
    ("ledger", "verify"),
    ("database", "health"),
    ("solve", str(SCENARIO / "thigh.toml"), "--machine", str(SCENARIO / "alder.toml")),
]
HEAVY = ("sqlalchemy", "alembic", "pandas", "numpy", "scipy", "reportlab", "msgspec")


def _commands(
    command: click.Command, path: tuple[str, ...] = ()
) -> Iterator[tuple[tuple[str, ...], click.Command]]:
    yield path, command
    for name, inner in getattr(command, "commands", {}).items():
        yield from _commands(inner, (*path, name))


ALL = dict(_commands(ROOT))
LEAVES = [path for path, command in ALL.items() if not hasattr(command, "commands")]


def _help(path: tuple[str, ...]) -> str:
    command = ALL[path]
    return command.get_help(command.make_context("featherlog", [], resilient_parsing=True))


@pytest.mark.parametrize("path", ALL, ids=" ".join)
def test_help_ends_with_one_example_that_the_program_accepts(path: tuple[str, ...]) -> None:
    lines = [line.strip() for line in _help(path).splitlines()]
    [example] = [line for line in lines if line.startswith("Example: ")]
    words = shlex.split(example.removeprefix("Example: ").partition(" > ")[0])
    assert words[0] == "featherlog"
    assert tuple(words[1 : 1 + len(path)]) == path
    named = max((p for p in ALL if tuple(words[1 : 1 + len(p)]) == p), key=len)
    ALL[named].make_context("featherlog", words[1 + len(named) :])


@pytest.mark.parametrize("flag", ["-h", "--help"])
@pytest.mark.parametrize("path", ALL, ids=" ".join)
def test_help_is_asked_for_in_two_ways(
    path: tuple[str, ...],
    flag: str,
    tmp_path: Path,
    monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
) -> None:
    came = Program("", tmp_path).here(monkeypatch, capsys, *path, flag)
    assert (came.code, came.err) == (0, "")
    assert came.out.startswith(" ".join(("Usage: featherlog", *path)))


@pytest.mark.parametrize("path", LEAVES, ids=" ".join)
def test_every_command_is_in_the_readme(path: tuple[str, ...]) -> None:
    assert f"featherlog {' '.join(path)}" in README.read_text(encoding="utf-8")


@pytest.mark.parametrize("code", EXIT_CODES)
def test_every_exit_code_is_in_the_readme(code: int) -> None:
    readme = " ".join(README.read_text(encoding="utf-8").split())
    assert re.search(rf"\| *`?{code}`? *\| *{re.escape(EXIT_CODES[code])}", readme)


def test_no_command_asks_back() -> None:
    assert not [p.name for c in ALL.values() for p in c.params if getattr(p, "prompt", None)]


def test_every_reading_command_is_known_here() -> None:
    known = {path for path in LEAVES if any(words[: len(path)] == path for words in READING)}
    with_json = {path for path in LEAVES if any("--json" in p.opts for p in ALL[path].params)}
    assert with_json == known | {
        ("confirm",),
        ("record",),
        ("correct",),
        ("table", "read"),
        ("sheet-check",),
    }


@pytest.mark.parametrize("words", READING, ids=lambda words: " ".join(words[:2]))
def test_json_is_read_back_and_holds_the_caution(
    words: tuple[str, ...],
    department: Program,
    monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
) -> None:
    done = department.here(monkeypatch, capsys, *words, "--json")
    found = json.loads(done.out)
    assert (done.code, done.err) == (0, "")
    shows_settings = words[0] in ("today", "review", "dose", "solve") or words[:2] == (
        "course",
        "show",
    )
    if shows_settings:
        assert found["caution"].startswith(CAUTION)
        plain = department.here(monkeypatch, capsys, *words).out
        assert CAUTION in " ".join(plain.split())
    if words[0] in ("dose", "review", "solve") or words[:2] == ("course", "show"):
        assert found.get("dose", found)["caution"] == f"{CAUTION} {DOSE_CAUTION}"


def _modules(department: Program, *words: str, **more: str) -> set[str]:
    """Return the top names of everything that a command imports."""
    done = subprocess.run(
        [sys.executable, "-X", "importtime", "-m", "featherlog", *words],
        check=True,
        capture_output=True,
        text=True,
        cwd=department.folder,
        env=department.environment(**more),
    )
    return {line.rpartition("|")[2].strip().split(".")[0] for line in done.stderr.splitlines()}


@pytest.mark.parametrize(
    "words", [("--help",), ("-h",), ("--version",), ("today", "--help"), ("course", "-h")]
)
def test_help_loads_nothing_heavy(words: tuple[str, ...], department: Program) -> None:
    assert _modules(department, *words).isdisjoint(HEAVY)


def test_completion_loads_nothing_heavy(department: Program) -> None:
    asked = {"_FEATHERLOG_COMPLETE": "complete_bash", "COMP_WORDS": "featherlog t"}
    assert "today" in department.start(**asked, COMP_CWORD="1").out.split()
    modules = _modules(department, **asked, COMP_CWORD="1")
    assert "featherlog" in modules
    assert modules.isdisjoint(HEAVY)


@pytest.mark.parametrize("words", [("today",), ("today", THIGH)])
def test_today_loads_no_mathematics_and_no_paper(
    words: tuple[str, ...], department: Program
) -> None:
    modules = _modules(department, *words)
    assert "sqlalchemy" in modules
    assert modules.isdisjoint({"numpy", "scipy", "pandas", "reportlab", "alembic"})


class TestFailures:
    """What a person sees when the program itself fails."""

    @pytest.fixture
    def failing(self, monkeypatch: pytest.MonkeyPatch) -> None:
        def fail(*_: object) -> None:
            raise ZeroDivisionError

        monkeypatch.setattr("featherlog.actions.today.today", fail)

    def test_one_sentence(
        self,
        failing: None,  # noqa: ARG002 - in force
        department: Program,
        monkeypatch: pytest.MonkeyPatch,
        capsys: pytest.CaptureFixture[str],
    ) -> None:
        came = department.here(monkeypatch, capsys, "today", THIGH)
        assert came.code == 1
        assert came.fault.startswith("the program failed (ZeroDivisionError); ")
        assert len(came.err.splitlines()) == 1

    def test_and_its_traceback_when_asked_for(
        self,
        failing: None,  # noqa: ARG002 - in force
        department: Program,
        monkeypatch: pytest.MonkeyPatch,
        capsys: pytest.CaptureFixture[str],
    ) -> None:
        with pytest.raises(ZeroDivisionError):
            department.here(monkeypatch, capsys, "--debug", "today", THIGH)

    def test_a_reader_that_went_away_is_no_failure(self, department: Program) -> None:
        reader, writer = os.pipe()
        os.close(reader)
        came = _start_into(department, writer, "today", THIGH)
        assert (came.returncode, came.stderr) == (1, b"")

    @pytest.mark.skipif(not Path("/dev/full").exists(), reason="needs a device that is full")
    def test_a_record_that_cannot_be_shown_is_not_called_unwritten(
        self, department: Program
    ) -> None:
        with Path("/dev/full").open("wb") as full:
            words = ("record", THIGH, *PAIR, "--position", "A")
            came = _start_into(department, full.fileno(), *words)
        assert came.returncode == 1
        assert b"shows whether anything was written" in came.stderr
        assert b"Traceback" not in came.stderr
        assert department.json("today", THIGH)["fraction"] == 2


def _start_into(
    department: Program, output: int, *words: str
) -> subprocess.CompletedProcess[bytes]:
    return subprocess.run(
        [sys.executable, "-m", "featherlog", *signed(words)],
        check=False,
        stdout=output,
        stderr=subprocess.PIPE,
        cwd=department.folder,
        env=department.environment(),
    )


def test_a_ledger_that_was_changed_is_told(department: Program) -> None:
    """Exit code 7: an entry changed by someone who owns the file."""
    import sqlite3  # noqa: PLC0415 - this test alone goes behind the program

    connection = sqlite3.connect(department.database)
    with connection:
        for (name,) in connection.execute("SELECT name FROM sqlite_master WHERE type = 'trigger'"):
            connection.execute(f'DROP TRIGGER "{name}"')
        connection.execute("UPDATE ledger_entry SET who = 'Elm Rook' WHERE number = 3")
    connection.close()
    verified = department.start("ledger", "verify", "--json")
    assert (verified.code, verified.json["fault"]) == (7, verified.fault)
    assert verified.json["fault_entry"] == 3
    came = department.start("database", "status", "--json")
    assert (came.code, came.json["first_fault"]) == (7, came.fault)
    assert came.fault.startswith("Ledger entry 3 (staff added, 2026-02-27T09:00:00+01:00) was ")


def test_a_terminal_without_a_minus_sign_gets_a_plain_one(department: Program) -> None:
    came = department.start("today", THIGH, PYTHONIOENCODING="ascii")
    assert came.code == 0
    assert "X1 side     -8.0 cm" in came.out
    assert "+/- 0.2 cm" in came.out
    assert "?" not in came.out


def test_the_database_is_named_by_option_before_environment(department: Program) -> None:
    came = department.start("course", "list", "--database", department.folder / "none.db")
    assert came.code == 6
    elsewhere = Program(str(department.folder / "none.db"), department.folder)
    assert THIGH in elsewhere.must("course", "list", "--database", department.database)


@pytest.mark.parametrize(
    "words",
    [
        ("today",),
        *((command, key) for command in ("today", "review", "dose") for key in (THIGH, BREAST)),
        *(("course", "show", key) for key in (THIGH, BREAST)),
        ("course", "list"),
        ("departures", THIGH),
    ],
    ids=" ".join,
)
def test_a_screen_is_80_columns_wide_and_plain(
    words: tuple[str, ...],
    begun: Program,
    monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
) -> None:
    screen = begun.here(monkeypatch, capsys, *words)
    assert screen.code == 0
    assert [line for line in screen.out.splitlines() if len(line) > 80] == []
    assert "\x1b" not in screen.out


@pytest.fixture
def begun(department: Program) -> Program:
    """Give the department in its second week, with a departure on each course."""
    week = ("2026-03-02", "2026-03-03", "2026-03-04", "2026-03-05", "2026-03-06")
    for day in week[:-1]:
        treated(department.database, THIGH, day)
    treated(department.database, THIGH, week[-1], field_positions={"upper thigh": "B"})
    treated(department.database, BREAST, "2026-03-05", position="B")
    treated(department.database, BREAST, "2026-03-06", metersets_mu={"SCV anterior": 100.0})
    return department.at("2026-03-09")


def test_the_consoles_words_are_its_commands() -> None:
    registered = program("console").registered_commands
    names = [
        command.name or str(getattr(command.callback, "__name__", "")) for command in registered
    ]
    assert tuple(names) == CONSOLE_WORDS
