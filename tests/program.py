"""The program as a person runs it: in a process of its own, or in this one where that is enough."""

from __future__ import annotations

import atexit
import json
import os
import shutil
import subprocess
import sys
import tempfile
from dataclasses import dataclass, replace
from pathlib import Path
from typing import TYPE_CHECKING, Any

from featherlog.cli.main import run

if TYPE_CHECKING:
    import pytest

SCENARIO = Path(__file__).parents[1] / "featherlog" / "exchange" / "scenario"
PASSPHRASE = "every bird sings alike"  # noqa: S105 - of all the people of the tests
PAIR = ("--by", "Ash Plover", "--with", "Maple Teal")
"""The two people who treat."""


def _passphrase_file() -> Path:
    folder = Path(tempfile.mkdtemp(prefix="featherlog-passphrase-"))
    atexit.register(shutil.rmtree, folder, ignore_errors=True)
    file = folder / "passphrase"
    file.touch(mode=0o600)
    file.write_text(f"{PASSPHRASE}\n", encoding="utf-8")
    return file


PASSPHRASE_FILE = _passphrase_file()


def signed(words: tuple[object, ...]) -> list[str]:
    """Return a command that finds the passphrases of the people it names, unless it names files."""
    told = [str(word) for word in words]
    files = {
        "--passphrase-file": "--by" in told,
        "--with-passphrase-file": "--with" in told,
        "--new-passphrase-file": "staff" in told and bool({"add", "replace-key"} & {*told}),
    }
    return told + [
        word
        for option, needed in files.items()
        if needed and option not in told
        for word in (option, str(PASSPHRASE_FILE))
    ]


@dataclass(frozen=True)
class Outcome:
    """What a command came to."""

    code: int
    out: str
    err: str

    @property
    def json(self) -> Any:
        return json.loads(self.out)

    @property
    def fault(self) -> str:
        """The messages without the program's name before each line and without wrapping."""
        return " ".join(self.err.replace("featherlog: ", "", 1).split())


@dataclass(frozen=True)
class Program:
    """The program with its database, its folder and its time; nothing of the user is in reach."""

    database: str
    folder: Path
    clock: str | None = "2026-03-02T09:00:00+01:00"

    def at(self, moment: str) -> Program:
        """Return the program at another time: a date, or a date and time without offset."""
        time = moment if "T" in moment else f"{moment}T09:00:00"
        return replace(self, clock=f"{time}+01:00")

    def environment(self, **more: str) -> dict[str, str]:
        ours = ("FEATHERLOG_", "PYTHONIOENCODING")
        kept = {name: text for name, text in os.environ.items() if not name.startswith(ours)}
        kept |= {"FEATHERLOG_DATABASE_URL": self.database, "XDG_DATA_HOME": str(self.folder)}
        return kept | ({"FEATHERLOG_CLOCK": self.clock} if self.clock else {}) | more

    def start(self, *words: object, **more: str) -> Outcome:
        """Run a command in a process of its own."""
        done = subprocess.run(
            [sys.executable, "-m", "featherlog", *signed(words)],
            check=False,
            capture_output=True,
            encoding=more.get("PYTHONIOENCODING", "utf-8"),
            cwd=self.folder,
            env=self.environment(**more),
            stdin=subprocess.DEVNULL,
        )
        return Outcome(done.returncode, done.stdout, done.stderr)

    def must(self, *words: object) -> str:
        """Run a command in a process of its own that has to succeed; return what it prints."""
        done = self.start(*words)
        assert done.code == 0, f"featherlog {words}: {done.code}\n{done.out}\n{done.err}"
        return done.out

    def json(self, *words: object) -> Any:
        return json.loads(self.must(*words, "--json"))

    def here(
        self, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str], *words: object
    ) -> Outcome:
        """Run a command in this process."""
        capsys.readouterr()
        code = 0
        with monkeypatch.context() as patch:
            for name in [name for name in os.environ if name.startswith("FEATHERLOG_")]:
                patch.delenv(name)
            for name, text in self.environment().items():
                patch.setenv(name, text)
            patch.chdir(self.folder)
            patch.setattr(sys, "argv", ["featherlog", *signed(words)])
            try:
                run()
            except SystemExit as end:
                code = int(end.code or 0)
        return Outcome(code, *capsys.readouterr())
