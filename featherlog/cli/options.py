"""Options that many commands share, each explained once."""

from __future__ import annotations

from pathlib import Path
from typing import Annotated, Literal

import typer

Database = Annotated[
    str | None,
    typer.Option(
        "--database",
        metavar="FILE-OR-URL",
        help="SQLite file or postgresql:// URL [default: FEATHERLOG_DATABASE_URL, or the user's "
        "data folder].",
        show_default=False,
    ),
]
Json = Annotated[bool, typer.Option("--json", help="Print JSON, unrounded, with units in keys.")]
By = Annotated[
    str, typer.Option("--by", metavar="NAME", help="Who does this, as on the staff list.")
]
VerifiedBy = Annotated[
    str, typer.Option("--with", metavar="NAME", help="Who verifies it; someone else.")
]
Second = Annotated[
    str | None,
    typer.Option(
        "--with",
        metavar="NAME",
        help="Who signs with them; needed where the policy asks two people.",
        show_default=False,
    ),
]
ByFile = Annotated[
    Path | None,
    typer.Option(
        "--passphrase-file",
        metavar="FILE",
        help="Holds the passphrase of --by; without it, it is asked for.",
        show_default=False,
    ),
]
SecondFile = Annotated[
    Path | None,
    typer.Option(
        "--with-passphrase-file",
        metavar="FILE",
        help="Holds the passphrase of --with; without it, it is asked for.",
        show_default=False,
    ),
]
NewFile = Annotated[
    Path | None,
    typer.Option(
        "--new-passphrase-file",
        metavar="FILE",
        help="Holds the passphrase that the new key gets; without it, it is asked for.",
        show_default=False,
    ),
]
Reason = Annotated[str, typer.Option("--reason", metavar="TEXT", help="Why; it stays on record.")]
CourseKey = Annotated[str, typer.Argument(metavar="COURSE", help="The course's key.")]
Depths = Annotated[
    list[float] | None,
    typer.Option("--depth", metavar="CM", help="One more depth below the entrance skin, in cm."),
]
Gaps = Annotated[
    list[str] | None,
    typer.Option(
        "--gap",
        metavar="JUNCTION=CM",
        help="A measured skin gap in cm, + gap, - overlap; JUNCTION:SIDE=CM for another skin side.",
    ),
]
PaperSize = Annotated[
    Literal["A4", "letter"], typer.Option("--page-size", help="The paper's size.")
]
Output = Annotated[
    Path | None,
    typer.Option("--output", metavar="FILE", help="Where to write it.", show_default=False),
]


def named_numbers(texts: list[str] | None, option: str, unit: str) -> dict[str, float]:
    """Read ``NAME=NUMBER`` texts; InputError names the option, the text and what is allowed."""
    import math

    from featherlog.errors import InputError

    found: dict[str, float] = {}
    for name, value in named_texts(texts, option).items():
        try:
            number = float(value)
        except ValueError:
            number = math.nan
        if not math.isfinite(number):
            raise InputError(f"{option} {name}={value}: {value!r} is not a number of {unit}")
        found[name] = number
    return found


def named_texts(texts: list[str] | None, option: str) -> dict[str, str]:
    """Read ``NAME=TEXT`` texts, each name once; InputError as in ``named_numbers``."""
    from featherlog.errors import InputError

    found: dict[str, str] = {}
    for text in texts or []:
        name, equals, value = text.rpartition("=")
        if not equals or not name or not value:
            raise InputError(f"{option} is {text!r}, but must be written NAME=VALUE")
        if name in found:
            raise InputError(f"{option} names {name!r} twice")
        found[name] = value
    return found
