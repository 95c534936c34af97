"""The course at a glance: fractions across, fields down, planned and delivered positions."""

from __future__ import annotations

from collections import Counter
from typing import TYPE_CHECKING, Any

from reportlab.lib.colors import white
from reportlab.lib.styles import ParagraphStyle

from featherlog.paper import style
from featherlog.paper.fonts import BOLD, Markup, join, safe, strong
from featherlog.paper.layout import space
from featherlog.paper.style import grid, para

if TYPE_CHECKING:
    from collections.abc import Iterable

    from reportlab.platypus import Flowable, Paragraph, Table

    from featherlog.views.review import GridCell, GridRow, ReviewView

_ACROSS = 20
_NAME_PT = 84.0
_WHOLE_PERCENT = 100.0
_YES, _NO = "✓", "–"
_CELL = ParagraphStyle("cell", parent=style.SMALL, alignment=1)
_BLACK_CELL = ParagraphStyle("black cell", parent=_CELL, textColor=white, fontName=BOLD)


def fraction_grid(view: ReviewView, width: float) -> list[Flowable]:
    """Return strips of twenty fractions; a black cell was not delivered as planned."""
    body: list[Flowable] = []
    for first in range(0, len(view.grid), _ACROSS):
        body += [_strip(view.grid[first : first + _ACROSS], width), space(4)]
    key = f"Black: not as planned. Empty: not yet. Verified: {_YES} by a second person, {_NO} not."
    return [*body, para(safe(f"{key}{_splits(view.grid)}"), style.SMALL), _people(view.grid)]


def is_delivered(row: GridRow) -> bool:
    """Tell whether any field of a fraction was treated."""
    return any(cell.delivered_position for cell in row.cells)


def departs(row: GridRow, cell: GridCell) -> bool:
    """Tell whether a field of a begun fraction was not delivered whole and in place."""
    return is_delivered(row) and (
        cell.delivered_position != row.planned_position or cell.delivered_percent < _WHOLE_PERCENT
    )


def _strip(rows: tuple[GridRow, ...], width: float) -> Table:
    lines: list[list[Any]] = [
        _line("Fraction", (strong(str(row.fraction)) for row in rows)),
        _line("planned", (safe(_short(row.planned_position)) for row in rows)),
    ]
    commands: list[tuple[Any, ...]] = [
        ("INNERGRID", (1, 0), (-1, -1), style.HAIR_PT, "black"),
        ("BOX", (1, 0), (-1, -1), style.FINE_PT, "black"),
        ("LINEBELOW", (0, 1), (-1, 1), style.RULE_PT, "black"),
    ]
    for number, field in enumerate(cell.field for cell in rows[0].cells):
        cells = [row.cells[number] for row in rows]
        black = [departs(row, cell) for row, cell in zip(rows, cells, strict=True)]
        place = len(lines)
        lines.append([para(safe(field), style.SMALL), *map(_cell, rows, cells)])
        commands += [
            ("BACKGROUND", (column, place), (column, place), "black")
            for column, departed in enumerate(black, start=1)
            if departed
        ]
    lines.append(_line("verified", map(_verified, rows)))
    across = (width - _NAME_PT) / _ACROSS
    table = grid(lines, [_NAME_PT, *[across] * len(rows)], *commands, padding=(0.5, 0.8))
    table.hAlign = "LEFT"
    return table


def _line(name: str, marks: Iterable[Markup]) -> list[Any]:
    return [para(safe(name), style.SMALL), *(para(mark, _CELL) for mark in marks)]


def _cell(row: GridRow, cell: GridCell) -> list[Paragraph]:
    if not is_delivered(row):
        return []
    black = departs(row, cell)
    look = _BLACK_CELL if black else _CELL
    place = cell.delivered_position or _NO
    # A departure is spelled out, one position to a line: a cell is too narrow for more.
    texts = place.replace("+", "+ ").split(" ") if black else [_short(place)]
    if cell.delivered_percent < _WHOLE_PERCENT:
        texts.append(f"{cell.delivered_percent:.0f}%")
    return [para(safe(text), look) for text in texts]


def _short(position: str) -> str:
    return "split" if "+" in position else position


def _splits(rows: tuple[GridRow, ...]) -> str:
    found = dict.fromkeys(row.planned_position for row in rows if "+" in row.planned_position)
    return f" Split: a fraction over positions {', '.join(found)}." if found else ""


def _verified(row: GridRow) -> Markup:
    if not is_delivered(row):
        return Markup("")
    return safe(_YES if row.verifier else _NO)


def _people(rows: tuple[GridRow, ...]) -> Paragraph:
    done = [row for row in rows if is_delivered(row)]
    if not done:
        return para(safe("No fraction delivered yet."), style.SMALL)
    span = f"Delivered {done[0].delivered_at} to {done[-1].delivered_at}."
    performed = _tally("Performed by", (row.performer for row in done))
    verified = _tally("Verified by", (row.verifier for row in done))
    return para(join(" ", [safe(span), performed, verified]), style.SMALL)


def _tally(what: str, names: Iterable[str]) -> Markup:
    counted = Counter(name or "nobody named" for name in names)
    return safe(f"{what} {', '.join(f'{name} ({count})' for name, count in counted.items())}.")
