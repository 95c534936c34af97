"""Command lines and files that nobody would type: real commands with junk values, files torn up.

Everything follows from a seed. Values are drawn from what fits the department of the tests most of
the time, so that a line often passes the first checks and fails, or succeeds, further in.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import typer
from department import AUTHOR, BREAST, CHECKER, SECOND, STAFF, THERAPIST, THIGH
from program import SCENARIO

from featherlog.actions.documents import TEMPLATES
from featherlog.cli.main import app

if TYPE_CHECKING:
    import random
    from collections.abc import Callable, Iterator
    from pathlib import Path

    import click

OUTSIDER = "FH-9"
BACKUP, CLINIC = "monday.backup", "clinic"
"""A backup of the department, and a folder whose database is not for practice."""

JUNK = (
    "", " ", "-", "--", "=", "a=", "=1", "A=B=C", ":", "1:", "nan", "inf", "-inf", "-1", "0",
    "1e400", "99999999999999999999999", "1_000", "0x10", "١", "½", "−8", "8,5", "true",
    "None", "%s %n {0}", "'; DROP TABLE course; --", "../up", ".", "..", "a\nb", "a\tb",
    "\x1b[31m", "\u202eabc", "\udcff", "🐦", "é" * 300, "A" * 5000,
    "mid thigh=nan", "mid thigh=1e400", "PA lower=-5", "upper thigh=Z",
    "2026-02-30", "2026-03-09", "9999-12-31", "0001-01-01", "2026-03-09T25:00", "Ash Plover ",
    "ash plover", "-h", "--json", "--by", "FH-2041", "sqlite://", "sqlite:///none.db", "mysql://x",
    "postgresql:///x?host=/nowhere", "postgresql://[", "://", "fuzzed-0.toml", "clinic",
)  # fmt: skip
VALUES = (
    "true", "-1", "0", "1", "2", "15", "0.0", "-0.0", "1e308", "1e-308", "nan", "inf", "-inf",
    "8.5", "9223372036854775807", "1000000", '""', '"A"', '"A1"', '"HFS"', '"\\u0000"', '"\\u202e"',
    '"🐦"', "[]", "[[]]", "[1.0, 2.0]", '["A", "A"]', "[-20.0, 20.0]", "{}", "{ x = 1 }",
    "2026-03-02", "2026-03-02T09:00:00", "09:00:00", "9999-12-31", '"' + "A" * 3000 + '"',
    '"thigh"', '"blocks"',
)  # fmt: skip
_FITTING: dict[str, tuple[str, ...]] = {
    "course": (THIGH, THIGH, THIGH, BREAST, BREAST, "FH-2043", "EX-0001", OUTSIDER),
    "by": (*STAFF, THERAPIST, THERAPIST, AUTHOR),
    "verified_by": (*STAFF, SECOND, SECOND, CHECKER),
    "second": (*STAFF, SECOND, SECOND, CHECKER),
    "name": (*STAFF, "Elm Rook", "Alder", "My machine"),
    "role": ("physicist", "therapist", "physician", "administrator"),
    "machine": ("Alder", "Birch"),
    "field": ("upper thigh", "lower thigh", "SCV"),
    "position": ("A", "B"),
    "number": ("1", "2", "3"),
    "entry": ("12", "20", "22", "24"),
    "fraction": ("1", "5", "6", "7", "15"),
    "gap": ("mid thigh=2.3", "mid thigh=2.4", "mid thigh:anterior=2.3"),
    "field_position": ("upper thigh=A", "lower thigh=B"),
    "meterset": ("PA lower=60", "AP upper=0", "AP upper=111"),
    "table": ("upper thigh:lateral=1.0", "upper thigh:longitudinal=1.0"),
    "date": ("2026-03-09", "2026-03-10"),
    "treated_at": ("2026-03-05T09:10", "2026-03-09T09:10:00+01:00"),
    "depth": ("5", "8.0", "0", "60"),
    "lateral": ("0", "1.5"),
    "longitudinal": ("100", "-3.25"),
    "vertical": ("0", "12"),
    "page": ("3Y66-LPW6",),
    "code": ("3Y66-LPW6", "0deded59d5e685e8"),
    "head": ("1:0", "5:abcdef012345"),
    "reason": ("beam interrupted", "a slip"),
    "decision": ("none needed",),
    "recording": ("featherlog",),
    "reading": ("featherlog_reading",),
    "backup": (BACKUP,),
    "drop_entries": ("0", "1", "3"),
    "folder": (CLINIC,),
    "output": ("out.pdf", "out.backup"),
    "picture": ("out.svg",),
    "csv": ("out.csv",),
}
_PASSPHRASES = ("wrong.passphrase", "open.passphrase", "none.passphrase")
_OFTEN = {"position": 0.6, "gap": 0.5, "second": 0.6}
_NOT_ASKED = frozenset({"database"})
"""Options that are left out unless they are to be junk."""


def _leaves(
    command: Any, path: tuple[str, ...] = ()
) -> Iterator[tuple[tuple[str, ...], list[click.Parameter]]]:
    if hasattr(command, "commands"):
        for name, inner in command.commands.items():
            yield from _leaves(inner, (*path, name))
    else:
        yield path, list(command.params)


COMMANDS = tuple(_leaves(typer.main.get_command(app)))


@dataclass
class CommandLines:
    """Command lines that follow from a seed; files that they name are written into ``folder``."""

    random: random.Random
    folder: Path
    junk_share: float = 0.0

    def one(self) -> list[str]:
        """Return the words of one command."""
        # Half of the lines have no junk values, so that some of them come to be written.
        self.junk_share = self.random.choice((0.0, 0.0, 0.1, 0.4))
        path, parameters = self.random.choice(COMMANDS)
        words = list(path)
        if self._chance(0.02):
            words = [self._junk()]
        for parameter in parameters:
            if self._chance(0.97 if parameter.required else self._wanted(parameter)):
                words += self._told(parameter)
        if self._chance(0.03):
            words.insert(self.random.randint(1, len(words)), self._junk())
        return words

    def _wanted(self, parameter: click.Parameter) -> float:
        if parameter.name in _NOT_ASKED:
            return 0.03
        # With another folder than one that is refused the demo would be built, which takes long.
        return 1.0 if parameter.name == "folder" else _OFTEN.get(str(parameter.name), 0.2)

    def _told(self, parameter: click.Parameter) -> list[str]:
        option = parameter.opts[0] if parameter.param_type_name == "option" else None
        if getattr(parameter, "is_flag", False):
            return [str(option)]
        times = self.random.randint(1, 3) if parameter.multiple else 1  # type: ignore[attr-defined] - only an option has it
        values = [self._value(parameter) for _ in range(times)]
        return [word for value in values for word in ([option, value] if option else [value])]

    def _value(self, parameter: click.Parameter) -> str:
        name = str(parameter.name)
        if name in _NOT_ASKED or (name != "folder" and self._chance(self.junk_share)):
            return self._junk()
        if name in ("design", "file") or (name == "machine" and parameter.type.name == "path"):
            return self._file(name)
        if "passphrase" in str(parameter.opts) and self._chance(0.3):
            return self.random.choice(_PASSPHRASES)
        choices = getattr(parameter.type, "choices", None)
        return str(self.random.choice(_FITTING.get(name) or choices or ("right.passphrase",)))

    def _file(self, name: str) -> str:
        sources = [SCENARIO / f"{stem}.toml" for stem in _SOURCES[name]]
        texts = [source.read_text(encoding="utf-8") for source in sources]
        kinds = ("machine", "policy") if name == "file" else (name,)
        texts += [TEMPLATES[kind] for kind in kinds]
        file = f"fuzzed-{self.random.randint(0, 9)}.toml"
        (self.folder / file).write_bytes(self._torn(self.random.choice(texts)))
        return file

    def _torn(self, text: str) -> bytes:
        for _ in range(self.random.choice((0, 1, 1, 1, 2, 3))):
            text = self.random.choice(_TEARS)(self.random, text)
        raw = bytearray(text, "utf-8")
        if self._chance(0.15):
            for _ in range(self.random.randint(1, 4)):
                raw[self.random.randrange(len(raw))] ^= 1 << self.random.randrange(8)
        return bytes(raw)

    def _junk(self) -> str:
        return self.random.choice(JUNK)

    def _chance(self, share: float) -> bool:
        return self.random.random() < share


_SOURCES = {
    "design": ("thigh", "breast", "spine", "spine_prone"),
    "machine": ("alder",),
    "file": ("alder",),
}


def _retyped(source: random.Random, text: str) -> str:
    """Give one key a value of another kind."""
    lines = text.splitlines()
    at = source.choice([n for n, line in enumerate(lines) if " = " in line])
    lines[at] = f"{lines[at].partition(' = ')[0]} = {source.choice(VALUES)}"
    return "\n".join(lines)


def _swapped(source: random.Random, text: str) -> str:
    """Let two keys change places, their values staying where they are."""
    lines = text.splitlines()
    one, other = source.sample([n for n, line in enumerate(lines) if " = " in line], 2)
    (first, _, value), (second, _, another) = (lines[n].partition(" = ") for n in (one, other))
    lines[one], lines[other] = f"{second} = {value}", f"{first} = {another}"
    return "\n".join(lines)


def _dropped(source: random.Random, text: str) -> str:
    lines = text.splitlines()
    del lines[source.randrange(len(lines))]
    return "\n".join(lines) + "\n\n"


def _repeated(source: random.Random, text: str) -> str:
    lines = text.splitlines()
    lines.insert(source.randrange(len(lines)), source.choice(lines))
    return "\n".join(lines)


def _cut(source: random.Random, text: str) -> str:
    return text[: source.randrange(len(text) // 2, len(text))] + "\n a = 1\n b = 2\n"


def _nudged(source: random.Random, text: str) -> str:
    """Change one digit."""
    at = source.choice([n for n, letter in enumerate(text) if letter.isdigit()])
    return text[:at] + source.choice("0123456789.-e") + text[at + 1 :]


_TEARS: tuple[Callable[[random.Random, str], str], ...] = (
    _retyped,
    _retyped,
    _swapped,
    _dropped,
    _repeated,
    _cut,
    _nudged,
    _nudged,
)
