"""A strict reader of TOML files that finds every fault and says where it is.

A fault names the file, the line, the key and what is allowed. Keys that nobody asked for are faults
too: a misspelt optional key must not pass for an absent one.
"""

from __future__ import annotations

from difflib import get_close_matches
from typing import TYPE_CHECKING, Any, TypeVar

from featherlog.errors import InputError
from featherlog.exchange.kinds import Kind, quoted, shown
from featherlog.exchange.toml_lines import Path, header_text, key_lines, line_of, path_text
from featherlog.exchange.toml_text import document

if TYPE_CHECKING:
    from collections.abc import Iterable, Iterator

T = TypeVar("T")
D = TypeVar("D")

Fault = tuple[Path, str]
"""The path at fault and the rest of the sentence that begins with it."""


class Reading:
    """One file being read: its tables, where its keys stand and the faults found so far."""

    def __init__(self, text: str, name: str) -> None:
        values = document(text, name)
        self.name = name
        self._lines = key_lines(text)
        self._faults: list[tuple[int, str]] = []
        self._tables: list[Table] = []
        self.root = Table(self, (), values)

    def fault(self, path: Path, sentence: str) -> None:
        """Note a fault; ``sentence`` goes on from the path."""
        line = line_of(path, self._lines)
        where = self.name if line is None else f"{self.name} line {line}"
        self._faults.append((line or 0, f"{where}: {path_text(path)} {sentence}"))

    def require_format(self, wanted: str) -> None:
        """Refuse a file of another kind or version at once: its other keys mean nothing here."""
        found = self.root.peek("format")
        if found != wanted:
            seen = "missing" if found is None else shown(found)
            self.fault(("format",), f'is {seen}, but must be "{wanted}"')
            self.refuse()

    def opened(self, table: Table) -> None:
        """Remember a table, so that its unknown keys are found at the end."""
        self._tables.append(table)

    def finish(self) -> None:
        """Look for unknown keys and refuse the file if anything in it is at fault.

        Raises:
            InputError: with every fault, in the order of the file.
        """
        for table in self._tables:
            table.refuse_unknown()
        self._tables.clear()
        self.refuse()

    def check(self, faults: Iterable[Fault]) -> None:
        """Refuse the file if rules across keys are broken.

        Raises:
            InputError: with every fault, in the order of the file.
        """
        for path, sentence in faults:
            self.fault(path, sentence)
        self.refuse()

    def refuse(self) -> None:
        """Raise ``InputError`` with every fault noted, if there is one."""
        if self._faults:
            ordered = sorted(self._faults, key=lambda fault: fault[0])
            raise InputError(*(sentence for _, sentence in ordered))


class Table:
    """One table of a file. An absent table (``values`` None) answers with stand-ins in silence."""

    def __init__(self, reading: Reading, path: Path, values: dict[str, Any] | None) -> None:
        self.path = path
        self._reading = reading
        self._values = values
        self._asked: dict[str, None] = {}
        reading.opened(self)

    @property
    def keys(self) -> tuple[str, ...]:
        """The keys that the table holds, in the order of the file."""
        return tuple(self._values or ())

    def has(self, key: str) -> bool:
        """Tell whether the table holds the key."""
        return key in self.keys

    def peek(self, key: str) -> object:
        """Return a raw value, None where the key is absent; the key is known from now on."""
        self._asked[key] = None
        return (self._values or {}).get(key)

    def fault(self, key: str, sentence: str) -> None:
        """Note a fault of one key, known from now on."""
        self._asked[key] = None
        self._reading.fault((*self.path, key), sentence)

    def take(self, key: str, kind: Kind[T]) -> T:
        """Return a required value; a fault and a stand-in where it is missing or not allowed."""
        if self.has(key):
            return self._read(key, kind)
        self._missing(key, kind.allowed)
        return kind.stand_in

    def take_or(self, key: str, kind: Kind[T], default: D) -> T | D:
        """Return an optional value, or the default where the key is absent."""
        self._asked[key] = None
        return self._read(key, kind) if self.has(key) else default

    def allows(self, key: str, *, when: bool, only_with: str) -> bool:
        """Tell whether a key may be read; a fault where it is given but does not belong."""
        if not when and self.has(key):
            self.fault(key, f"is given, but is allowed only with {only_with}")
        return when

    def table(self, key: str, allowed: str = "a table") -> Table:
        """Return a required table; ``allowed`` says more of it where that helps."""
        return Table(self._reading, (*self.path, key), self._table_values(key, allowed))

    def holds_table(self, key: str) -> bool:
        """Tell whether the value of a key is a table."""
        return isinstance(self.peek(key), dict)

    def table_or_none(self, key: str) -> Table | None:
        """Return an optional table."""
        self._asked[key] = None
        return self.table(key) if self.has(key) else None

    def tables(self, key: str, at_least: int = 1) -> tuple[Table, ...]:
        """Return the entries of an array of tables, ``[[key]]``."""
        allowed = f"at least {at_least} [[{header_text((*self.path, key))}]]"
        found = self.peek(key)
        if not self.has(key):
            self._missing(key, allowed)
            return ()
        if not isinstance(found, list) or not all(isinstance(entry, dict) for entry in found):
            self.fault(key, f"is {shown(found)}, but must be {allowed}")
            return ()
        if len(found) < at_least:
            self.fault(key, f"has {len(found)}, but must be {allowed}")
        path = (*self.path, key)
        return tuple(Table(self._reading, (*path, i), entry) for i, entry in enumerate(found))

    def named(self, key: str, kind: Kind[T]) -> dict[str, T]:
        """Return a required table whose keys are names of the writer's own."""
        entries = self.table(key)
        return {name: entries.take(name, kind) for name in entries.keys}

    def refuse_unknown(self) -> None:
        """Note a fault for every key that was not asked for."""
        known = list(self._asked)
        for key in self.keys:
            if key not in known:
                self.fault(key, _not_known(key, known))

    def _read(self, key: str, kind: Kind[T]) -> T:
        raw = self.peek(key)
        value = kind.read(raw)
        if value is not None:
            return value
        seen = "is not allowed, it" if kind.private else f"is {shown(raw)}, but"
        self.fault(key, f"{seen} must be {kind.allowed}")
        return kind.stand_in

    def _missing(self, key: str, allowed: str) -> None:
        self._asked[key] = None
        if self._values is not None:
            self.fault(key, f"is missing, but must be {allowed}")

    def _table_values(self, key: str, allowed: str) -> dict[str, Any] | None:
        if not self.has(key):
            self._missing(key, allowed)
            return None
        value = self.peek(key)
        if isinstance(value, dict):
            return value
        self.fault(key, f"is {shown(value)}, but must be {allowed}")
        return None


def repeated(names: Iterable[tuple[Path, str]]) -> Iterator[Fault]:
    """Find names used twice, capitals and small letters counted alike."""
    first: dict[str, Path] = {}
    for path, name in names:
        earlier = first.setdefault(name.casefold(), path)
        if earlier != path:
            yield path, f"is {quoted(name)}, but {path_text(earlier)} has that name already"


def _not_known(key: str, known: list[str]) -> str:
    close = get_close_matches(key, known, n=1)
    hint = f"did you mean {close[0]}?" if close else f"allowed here: {', '.join(known)}"
    return f"is not a key that belongs here; {hint}"
