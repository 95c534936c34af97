"""Where each key of a TOML text stands, for messages that name a line."""

from __future__ import annotations

import re
import tomllib
from itertools import accumulate
from typing import TYPE_CHECKING

from featherlog.exchange.kinds import quoted

if TYPE_CHECKING:
    from collections.abc import Iterator

Path = tuple[str | int, ...]
"""The way to a value from the top of a file: key names, and places in arrays counted from 0."""

_STRING = r'"(?:\\.|[^"\\\n])*"|\'[^\'\n]*\''
_PIECE = re.compile(
    # A multi-line string may end in two quotes of its own before its closing three.
    r'"""(?:\\.|[^\\])*?"""(?:"{0,2})|\'\'\'.*?\'\'\'(?:\'{0,2})|'
    + _STRING
    + r"|#[^\n]*|\n|[\[{]|[\]}]|[^\"'#\n\[\]{}]+",
    re.DOTALL,
)
_HEADER = re.compile(rf"(\[\[?)((?:{_STRING}|[^\]\"'])+)\]")
_KEY = re.compile(rf"((?:{_STRING}|[^=\"'])+)=")
_BARE_KEY = re.compile(r"[A-Za-z0-9_-]+")


def path_text(path: Path) -> str:
    """Return a path as people read it, places counted from 1: ``field[2].beam[1].ssd_cm``."""
    text = ""
    for part in path:
        if isinstance(part, int):
            text += f"[{part + 1}]"
        else:
            text += f".{part if _BARE_KEY.fullmatch(part) else quoted(part)}"
    return text.removeprefix(".")


def header_text(path: Path) -> str:
    """Return the header under which a path stands in a file, without places."""
    return path_text(tuple(part for part in path if isinstance(part, str)))


def key_lines(text: str) -> dict[Path, int]:
    """Return the line (from 1) of every header and key of a valid TOML text.

    Keys inside inline tables are left out: they share the line of the key that holds the table.
    """
    lines: dict[Path, int] = {}
    last_place: dict[Path, int] = {}
    table: Path = ()
    for line, statement in _statements(text):
        if header := _HEADER.match(statement):
            table = _header_path(_key_parts(header[2]), last_place, opens=header[1] == "[[")
            lines.setdefault(table, line)
            if isinstance(table[-1], int):
                lines.setdefault(table[:-1], line)
        elif key := _KEY.match(statement):
            lines[table + _key_parts(key[1])] = line
    return lines


def line_of(path: Path, lines: dict[Path, int]) -> int | None:
    """Return the line of a path, or of the nearest table around it that has one."""
    heads = (path[:length] for length in range(len(path), 0, -1))
    return next((lines[head] for head in heads if head in lines), None)


def _statements(text: str) -> Iterator[tuple[int, str]]:
    """Yield each statement with its first line; one may run over lines in strings and brackets."""
    pieces = _PIECE.findall(text)
    breaks = accumulate(piece.count("\n") for piece in pieces)
    depth, start, statement = 0, 1, ""
    for piece, lines_before in zip(pieces, breaks, strict=True):
        depth += (piece in {"[", "{"}) - (piece in {"]", "}"})
        if piece == "\n" and depth == 0:
            yield start, statement.strip()
            start, statement = lines_before + 1, ""
        elif not piece.startswith("#"):
            statement += piece
    yield start, statement.strip()


def _key_parts(written: str) -> tuple[str, ...]:
    """Split a dotted key as TOML does, quotes and escapes included."""
    inside: object = tomllib.loads(f"{written} = 0")
    parts: list[str] = []
    while isinstance(inside, dict):
        [(part, inside)] = inside.items()
        parts.append(part)
    return tuple(parts)


def _header_path(parts: tuple[str, ...], last_place: dict[Path, int], *, opens: bool) -> Path:
    """Place a header in the newest entry of each array it names; ``opens`` starts a new entry."""
    path: Path = ()
    for part in parts[:-1]:
        path = _newest((*path, part), last_place)
    path = (*path, parts[-1])
    if opens:
        last_place[path] = last_place.get(path, -1) + 1
    return _newest(path, last_place)


def _newest(path: Path, last_place: dict[Path, int]) -> Path:
    return (*path, last_place[path]) if path in last_place else path
