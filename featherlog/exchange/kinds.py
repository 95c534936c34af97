"""What a value in a file may be: one object for each kind, saying what it allows."""

from __future__ import annotations

import re
from dataclasses import dataclass
from datetime import date, datetime
from itertools import pairwise
from typing import TYPE_CHECKING, Generic, TypeVar

if TYPE_CHECKING:
    from collections.abc import Callable, Iterable
    from enum import StrEnum

    from featherlog.geometry.patient import Point

T = TypeVar("T")
Choice = TypeVar("Choice", bound="StrEnum")

_LONGEST_SHOWN = 60
_FIRST_YEAR, _LAST_YEAR = 1950, 2150


@dataclass(frozen=True, slots=True)
class Kind(Generic[T]):
    """One kind of value.

    ``read`` turns a raw TOML value into a typed one, or into None where it is not ``allowed``.
    ``stand_in`` takes a faulty value's place until the whole file has been read and is refused.
    A ``private`` value, such as a patient's name, is never repeated in a message.
    """

    allowed: str
    read: Callable[[object], T | None]
    stand_in: T
    private: bool = False


def number(
    unit: str, low: float, high: float, *, low_open: bool = False, high_open: bool = False
) -> Kind[float]:
    """Return the kind of a number in a unit; an open end is itself not allowed."""

    def read(raw: object) -> float | None:
        # In TOML true is no number, but in Python it is; nan fails every comparison.
        if isinstance(raw, bool) or not isinstance(raw, int | float):
            return None
        above = low < raw if low_open else low <= raw
        under = raw < high if high_open else raw <= high
        return float(raw) + 0.0 if above and under else None

    of_unit = f" of {unit}" if unit else ""
    start, end = "above" if low_open else "from", "to below" if high_open else "up to"
    return Kind(f"a number{of_unit} {start} {low:g} {end} {high:g}", read, low)


def whole(low: int, high: int) -> Kind[int]:
    """Return the kind of a whole number written without a point."""

    def read(raw: object) -> int | None:
        if isinstance(raw, bool) or not isinstance(raw, int):
            return None
        return raw if low <= raw <= high else None

    return Kind(f"a whole number from {low} up to {high}", read, low)


def text(longest: int = 60, *, empty: bool = False, private: bool = False) -> Kind[str]:
    """Return the kind of a one-line text without control characters or spaces at its ends."""

    def read(raw: object) -> str | None:
        if not isinstance(raw, str) or not raw.isprintable() or raw != raw.strip():
            return None
        return raw if (empty or raw) and len(raw) <= longest else None

    allowed = f"text in quotes, {0 if empty else 1} to {longest} printable characters"
    return Kind(f"{allowed}, no space at either end", read, "", private=private)


def letters(longest: int, *, dashes: bool = False) -> Kind[str]:
    """Return the kind of a short label of unaccented letters and digits."""
    pattern = re.compile(rf"[A-Za-z0-9{'-' if dashes else ''}]{{1,{longest}}}")

    def read(raw: object) -> str | None:
        return raw if isinstance(raw, str) and pattern.fullmatch(raw) else None

    marks = "letters, digits or dashes" if dashes else "letters or digits"
    return Kind(f"1 to {longest} {marks}, in quotes", read, "")


def choice(of: type[Choice]) -> Kind[Choice]:
    """Return the kind of a word from a fixed vocabulary."""
    members = {str(member): member for member in of}

    def read(raw: object) -> Choice | None:
        return members.get(raw) if isinstance(raw, str) else None

    return Kind(either(members), read, next(iter(of)))


def flag() -> Kind[bool]:
    """Return the kind of true or false."""
    return Kind("true or false", lambda raw: raw if isinstance(raw, bool) else None, stand_in=False)


def day() -> Kind[date]:
    """Return the kind of a plain date."""

    def read(raw: object) -> date | None:
        if not isinstance(raw, date) or isinstance(raw, datetime):
            return None
        return raw if _FIRST_YEAR <= raw.year <= _LAST_YEAR else None

    allowed = f"a date without quotes, like 2026-03-02, from {_FIRST_YEAR} up to {_LAST_YEAR}"
    return Kind(allowed, read, date(2000, 1, 1))


def several(item: Kind[T], at_least: int = 0) -> Kind[tuple[T, ...]]:
    """Return the kind of an array of any length, or of ``at_least`` so many."""

    def read(raw: object) -> tuple[T, ...] | None:
        items = _items(raw, item)
        return items if items is not None and len(items) >= at_least else None

    fewest = f" of at least {at_least}" if at_least else ""
    return Kind(f"an array{fewest}, each {item.allowed}", read, ())


def rising(item: Kind[float]) -> Kind[tuple[float, ...]]:
    """Return the kind of an array of rising numbers, at least one."""

    def read(raw: object) -> tuple[float, ...] | None:
        items = _items(raw, item)
        return items if items and all(a < b for a, b in pairwise(items)) else None

    return Kind(f"an array of at least 1, rising, each {item.allowed}", read, ())


def interval(item: Kind[float]) -> Kind[tuple[float, float]]:
    """Return the kind of two numbers, the lower first."""

    def read(raw: object) -> tuple[float, float] | None:
        items = _items(raw, item)
        match items:
            case (low, high) if low < high:
                return low, high
        return None

    return Kind(f"[low, high] with low below high, each {item.allowed}", read, (0.0, 0.0))


def point(item: Kind[float]) -> Kind[Point]:
    """Return the kind of a point in patient axes."""

    def read(raw: object) -> Point | None:
        match _items(raw, item):
            case (x, y, z):
                return x, y, z
        return None

    return Kind(f"[x, y, z], each {item.allowed}", read, (0.0, 0.0, 0.0))


def either(words: Iterable[str]) -> str:
    """List words as alternatives: ``"jaws" or "couch"``."""
    *most, last = (f'"{word}"' for word in dict.fromkeys(words))
    return f"{', '.join(most)} or {last}" if most else last


def shown(raw: object) -> str:
    """Return a raw value as a message repeats it: in TOML's own spelling, shortened."""
    if isinstance(raw, dict):
        return "a table"
    if isinstance(raw, list):
        written = f"[{', '.join('[…]' if _nested(item) else _spelled(item) for item in raw)}]"
    else:
        written = _spelled(raw)
    return written if len(written) <= _LONGEST_SHOWN else f"{written[:_LONGEST_SHOWN]}…"


def quoted(text: str) -> str:
    """Return a text in quotes, with a mark for each character that cannot be printed."""
    return '"' + "".join(letter if letter.isprintable() else "�" for letter in text) + '"'


def _nested(raw: object) -> bool:
    return isinstance(raw, list | dict)


def _spelled(raw: object) -> str:
    match raw:
        case bool():
            return str(raw).lower()
        case int() if raw.bit_length() > _LONGEST_SHOWN:
            return hex(raw)  # Python refuses to write very long integers in decimals
        case str():
            return quoted(raw)
    return str(raw)


def _items(raw: object, item: Kind[T]) -> tuple[T, ...] | None:
    if not isinstance(raw, list):
        return None
    items = tuple(value for value in map(item.read, raw) if value is not None)
    return items if len(items) == len(raw) else None
