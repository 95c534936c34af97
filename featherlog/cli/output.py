"""How results reach the terminal: data on standard output, remarks on standard error."""

from __future__ import annotations

import codecs
import io
import sys
from typing import TYPE_CHECKING

from featherlog import words

if TYPE_CHECKING:
    from collections.abc import Iterable, Sequence

WIDTH = 80


_PLAIN = {words.MINUS: "-", "±": "+/-", "→": "->"}


def write_any_terminal() -> None:
    """Let a terminal without our characters have plain ones: a lost minus sign would mislead."""
    codecs.register_error("featherlog", _plain)
    for stream in (sys.stdout, sys.stderr):
        if isinstance(stream, io.TextIOWrapper):
            stream.reconfigure(errors="featherlog")


def _plain(error: UnicodeError) -> tuple[str, int]:
    if not isinstance(error, UnicodeEncodeError):
        raise error
    stranger = error.object[error.start]
    return _PLAIN.get(stranger, "?"), error.start + 1


def show(text: str) -> None:
    """Print data on standard output."""
    sys.stdout.write(text if text.endswith("\n") else f"{text}\n")
    # Now, and not at exit, is when a full disk or a closed pipe can still be told.
    sys.stdout.flush()


def remark(text: str) -> None:
    """Print a remark on standard error."""
    sys.stderr.write(f"{text}\n")


def show_json(view: object) -> None:
    """Print a view as JSON."""
    from featherlog.actions.documents import to_json

    show(to_json(view))


def table(heads: Sequence[str], rows: Iterable[Sequence[str]], *, numeric: str = "") -> str:
    """Return plain aligned columns under their heads; ``numeric`` names columns set right.

    A column whose head is in ``numeric`` (heads joined by ``|``) is aligned to the right.
    """
    lines = [tuple(heads), *(tuple(row) for row in rows)]
    widths = [max(len(line[column]) for line in lines) for column in range(len(heads))]
    right = {index for index, head in enumerate(heads) if head in numeric.split("|")}
    return "\n".join(
        "  ".join(
            cell.rjust(width) if column in right else cell.ljust(width)
            for column, (cell, width) in enumerate(zip(line, widths, strict=True))
        ).rstrip()
        for line in lines
    )


def wrapped(text: str, indent: str = "") -> str:
    """Return text wrapped to 80 columns, later lines indented."""
    import textwrap

    return textwrap.fill(
        text, WIDTH, initial_indent=indent, subsequent_indent=indent, break_on_hyphens=False
    )


def rule(mark: str = "-") -> str:
    """Return a line across the screen."""
    return mark * WIDTH
