"""Sizes, rules and text styles of the papers: black on white, nothing under 8 points."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any, Literal

from reportlab.lib.colors import Color, black, white
from reportlab.lib.enums import TA_CENTER, TA_LEFT, TA_RIGHT
from reportlab.lib.pagesizes import A4, letter
from reportlab.lib.styles import ParagraphStyle
from reportlab.lib.units import mm
from reportlab.platypus import Paragraph, Table, TableStyle

from featherlog.paper.fonts import BOLD, REGULAR, Markup, safe, strong

if TYPE_CHECKING:
    from collections.abc import Sequence

PageSize = Literal["A4", "letter"]
PAGE_SIZES: dict[PageSize, tuple[float, float]] = {"A4": A4, "letter": letter}

MARGIN_PT = 10 * mm
HAIR_PT, FINE_PT, RULE_PT, HEAVY_PT = 0.4, 0.7, 1.2, 2.6
SMALLEST_PT = 8.0


def _style(
    name: str,
    size: float,
    leading: float,
    font: str = REGULAR,
    *,
    align: Literal[0, 1, 2] = TA_LEFT,
    ink: Color = black,
) -> ParagraphStyle:
    return ParagraphStyle(
        name,
        fontName=font,
        bulletFontName=font,
        fontSize=size,
        leading=leading,
        alignment=align,
        textColor=ink,
    )


SMALL = _style("small", SMALLEST_PT, 9.6)
SMALL_RIGHT = _style("small right", SMALLEST_PT, 9.6, align=TA_RIGHT)
BODY = _style("body", 9, 11.2)
VALUE = _style("value", 9.5, 11.2, align=TA_RIGHT)
CENTRED = _style("centred", 9, 11.2, align=TA_CENTER)
LEAD = _style("lead", 11, 13.5, BOLD)
TITLE = _style("title", 15, 18, BOLD)
TITLE_RIGHT = _style("title right", 15, 18, BOLD, align=TA_RIGHT)


def para(markup: Markup, style: ParagraphStyle = BODY) -> Paragraph:
    """Return a paragraph; only escaped mark-up is accepted."""
    return Paragraph(markup, style)


def display(size_pt: float, *, inverse: bool = False, centred: bool = False) -> ParagraphStyle:
    """Return a bold style for the few words that are read from across a room."""
    return _style(
        f"display {size_pt} {inverse} {centred}",
        size_pt,
        size_pt * 1.16,
        BOLD,
        ink=white if inverse else black,
        align=TA_CENTER if centred else TA_LEFT,
    )


def grid(
    rows: Sequence[Sequence[Any]],
    widths: Sequence[float],
    *commands: tuple[Any, ...],
    padding: tuple[float, float] = (3, 1.5),
    repeat_rows: int = 0,
) -> Table:
    """Return a table of flowables; ``padding`` is (sideways, above and below) in points."""
    sideways, upright = padding
    base: list[tuple[Any, ...]] = [
        ("FONT", (0, 0), (-1, -1), REGULAR, SMALLEST_PT),
        ("LEFTPADDING", (0, 0), (-1, -1), sideways),
        ("RIGHTPADDING", (0, 0), (-1, -1), sideways),
        ("TOPPADDING", (0, 0), (-1, -1), upright),
        ("BOTTOMPADDING", (0, 0), (-1, -1), upright),
        ("VALIGN", (0, 0), (-1, -1), "MIDDLE"),
    ]
    return Table(
        [list(row) for row in rows],
        colWidths=list(widths),
        style=TableStyle([*base, *commands]),
        repeatRows=repeat_rows,
    )


def ruled(
    heads: Sequence[str],
    rows: Sequence[Sequence[Markup]],
    width: float,
    parts: Sequence[float],
    *,
    numbers_from: int | None = None,
    strong_heads: bool = False,
    body: ParagraphStyle = BODY,
) -> Table:
    """Return a plain table of text under small heads, with a hair rule above every row.

    Columns from ``numbers_from`` on are set to the right. The heads repeat on a further page.
    """
    first_right = len(heads) if numbers_from is None else numbers_from
    head = [
        para(strong(text) if strong_heads else safe(text), SMALL_RIGHT if right else SMALL)
        for text, right in ((text, column >= first_right) for column, text in enumerate(heads))
    ]
    lines = [
        [
            para(text, SMALL_RIGHT if column >= first_right else body)
            for column, text in enumerate(row)
        ]
        for row in rows
    ]
    rule = ("LINEABOVE", (0, 1), (-1, -1), HAIR_PT, "black")
    return grid([head, *lines], shares(width, *parts), rule, padding=(2, 0.6), repeat_rows=1)


def grouped(
    heads: Sequence[str],
    groups: Sequence[tuple[Any, Sequence[Sequence[Any]]]],
    width: float,
    parts: Sequence[float],
    *,
    numbers: range = range(0),
) -> Table:
    """Return a table whose rows stand in groups, each below a line across all columns.

    ``groups`` are (line, rows) of flowables; ``numbers`` are the columns set to the right. A line
    is never parted from the first row of its group, and the heads repeat on a further page.
    """
    rows: list[list[Any]] = [
        [para(safe(t), SMALL_RIGHT if c in numbers else SMALL) for c, t in enumerate(heads)]
    ]
    commands: list[tuple[Any, ...]] = [("VALIGN", (0, 0), (-1, -1), "TOP")]
    for line, members in groups:
        at, end = len(rows), len(rows) + len(members)
        rows += [[line, *[""] * (len(heads) - 1)], *map(list, members)]
        commands += [
            ("SPAN", (0, at), (-1, at)),
            ("LINEABOVE", (0, at), (-1, at), RULE_PT, "black"),
            ("NOSPLIT", (0, at), (-1, min(at + 1, end))),
        ]
        if members:
            commands.append(("LINEABOVE", (0, at + 1), (-1, end), HAIR_PT, "black"))
    return grid(rows, shares(width, *parts), *commands, padding=(2, 1.2), repeat_rows=1)


def shares(width: float, *parts: float) -> list[float]:
    """Return column widths (points) that divide ``width`` in the proportion of ``parts``."""
    return [width * part / sum(parts) for part in parts]
