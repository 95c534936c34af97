"""Where passphrases come from, and what is said when they cannot be had."""

from __future__ import annotations

import os
import sys
from functools import partial
from io import StringIO
from typing import TYPE_CHECKING

import pytest
from department import AUTHOR, CHECKER
from program import PASSPHRASE, PASSPHRASE_FILE, SCENARIO, Outcome

from featherlog.actions.database import status

if TYPE_CHECKING:
    from collections.abc import Callable
    from pathlib import Path

    from program import Program

MACHINE = ("machine", "add", str(SCENARIO / "alder.toml"), "--by", AUTHOR)
OWN_KEY = ("staff", "replace-key", AUTHOR, "--reason", "forgotten", "--by", AUTHOR)


class _Terminal(StringIO):
    def isatty(self) -> bool:
        return True


@pytest.fixture
def typed(monkeypatch: pytest.MonkeyPatch) -> list[str | None]:
    """Give a terminal at which these lines are typed when asked; None ends the input."""
    lines: list[str | None] = []

    def ask(prompt: str, stream: object) -> str:
        assert stream is sys.stderr
        sys.stderr.write(f"{prompt}\n")
        line = lines.pop(0)
        if line is None:
            raise EOFError
        return line

    monkeypatch.setattr("sys.stdin", _Terminal())
    monkeypatch.setattr("featherlog.cli.passphrases.getpass", ask)
    return lines


@pytest.fixture
def plain(
    department: Program, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> Callable[..., Outcome]:
    """Run a command in this process without any passphrase file that it does not name itself."""
    monkeypatch.setattr("program.signed", list)
    return partial(department.here, monkeypatch, capsys)


def test_a_passphrase_is_asked_for_without_being_shown(
    typed: list[str | None],
    plain: Callable[..., Outcome],
) -> None:
    typed += [PASSPHRASE]
    came = plain(*MACHINE)
    assert (came.code, came.err) == (0, f"Passphrase of {AUTHOR}: \n")


def test_a_new_passphrase_is_asked_for_twice(
    typed: list[str | None],
    plain: Callable[..., Outcome],
) -> None:
    typed += [PASSPHRASE, "another bird altogether", "another bird altogether"]
    came = plain(*OWN_KEY)
    assert (came.code, typed) == (0, [])
    assert f"New passphrase of {AUTHOR} (at least 12 characters): " in came.err


@pytest.mark.parametrize(
    ("words", "lines", "fault"),
    [
        (MACHINE, [None], f"no passphrase of {AUTHOR} was given"),
        (
            OWN_KEY,
            [PASSPHRASE, "another bird altogether", "another bird"],
            "the two passphrases differ; nothing was written",
        ),
    ],
)
def test_what_is_typed_wrong_writes_nothing(  # noqa: PLR0917 - three parameters, three fixtures
    words: tuple[str, ...],
    lines: list[str | None],
    fault: str,
    department: Program,
    typed: list[str | None],
    plain: Callable[..., Outcome],
) -> None:
    before = status(department.database)
    typed += lines
    came = plain(*words)
    assert (came.code, came.err.splitlines()[-1]) == (3, f"featherlog: {fault}")
    assert status(department.database) == before


@pytest.mark.parametrize(
    ("more", "option", "name"),
    [
        ((), "--passphrase-file", AUTHOR),
        (
            ("--passphrase-file", str(PASSPHRASE_FILE), "--with", CHECKER),
            "--with-passphrase-file",
            CHECKER,
        ),
    ],
)
def test_without_a_terminal_the_missing_option_is_named(
    more: tuple[str, ...],
    option: str,
    name: str,
    plain: Callable[..., Outcome],
) -> None:
    came = plain(*MACHINE, *more)
    fault = f"there is no terminal to ask for the passphrase of {name}: name a file that holds it"
    assert (came.code, came.fault) == (3, f"{fault} with {option}")


@pytest.mark.parametrize(
    ("content", "mode", "fault"),
    [
        (PASSPHRASE, 0o640, "others can use this passphrase file (mode 0640); make it private"),
        (PASSPHRASE, 0o604, "others can use this passphrase file (mode 0604); make it private"),
        ("", 0o600, "must hold a passphrase, one line of text in UTF-8"),
        ("\n", 0o600, "must hold a passphrase, one line of text in UTF-8"),
        ("one\ntwo", 0o600, "must hold a passphrase, one line of text in UTF-8"),
        ("x" * 5000, 0o600, "must hold a passphrase, one line of text in UTF-8"),
        ("\udcff", 0o600, "must hold a passphrase, one line of text in UTF-8"),
    ],
)
def test_a_file_that_will_not_do_is_named(
    content: str,
    mode: int,
    fault: str,
    department: Program,
    plain: Callable[..., Outcome],
) -> None:
    file = department.folder / "mine"
    file.write_bytes(os.fsencode(content))
    file.chmod(mode)
    came = plain(*MACHINE, "--passphrase-file", str(file))
    assert came.code == 3
    assert came.fault.startswith(f"{file}: {fault}")


def test_a_file_that_is_not_there(
    tmp_path: Path,
    plain: Callable[..., Outcome],
) -> None:
    words = (*MACHINE, "--passphrase-file", str(tmp_path / "none"))
    came = plain(*words)
    assert (came.code, came.fault) == (5, f"{tmp_path}/none: there is no such file")
    folder = plain(*MACHINE, "--passphrase-file", str(tmp_path))
    assert (folder.code, folder.fault) == (3, f"{tmp_path}: cannot be read (Is a directory)")
