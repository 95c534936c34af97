"""Each junction on the shift sheet: what meets, the gap to measure, and the view from the side."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from featherlog.paper import style
from featherlog.paper.fonts import safe, strong
from featherlog.paper.layout import space
from featherlog.paper.side_view import side_drawing
from featherlog.paper.style import grid, para, shares
from featherlog.words import figure, signed

if TYPE_CHECKING:
    from reportlab.platypus import Flowable, Table

    from featherlog.views.day import DayView, GapView, JunctionView

_BESIDE = 2
_GUTTER_PT = 10.0


def junction_blocks(view: DayView, width: float, diagram_height: float | None) -> list[Flowable]:
    """Return the junctions, two to a row, each with its diagram; a height of None leaves it out."""
    if len(view.junctions) == 1:
        return [_alone(view, width, diagram_height)]
    blocks: list[Flowable] = []
    column = (width - _GUTTER_PT) / _BESIDE
    for first in range(0, len(view.junctions), _BESIDE):
        pair = view.junctions[first : first + _BESIDE]
        cells = [_stack(view, junction, column, diagram_height) for junction in pair]
        cells += [[] for _ in range(_BESIDE - len(pair))]
        blocks.append(_columns(cells, column))
    return blocks


def diagrams(view: DayView, width: float, height: float) -> list[Flowable]:
    """Return the diagrams alone, each under its junction's name."""
    body: list[Flowable] = []
    for junction in view.junctions:
        body += [
            para(safe(f"JUNCTION {junction.junction}"), style.LEAD),
            space(4),
            _diagram(view, junction, width, height),
            space(16),
        ]
    return body


def _alone(view: DayView, width: float, height: float | None) -> Table:
    junction = view.junctions[0]
    text_width = width if height is None else (width - _GUTTER_PT) * 0.46
    text = _text(junction, text_width)
    if height is None:
        return grid([[text]], [width], padding=(0, 0))
    drawn = width - _GUTTER_PT - text_width
    cells = [text, "", _diagram(view, junction, drawn, height)]
    return grid(
        [cells],
        [text_width, _GUTTER_PT, drawn],
        ("VALIGN", (0, 0), (-1, -1), "TOP"),
        padding=(0, 0),
    )


def _stack(
    view: DayView, junction: JunctionView, width: float, height: float | None
) -> list[Flowable]:
    text = _text(junction, width)
    return text if height is None else [*text, space(3), _diagram(view, junction, width, height)]


def _columns(cells: list[list[Flowable]], column: float) -> Table:
    row: list[Any] = [cells[0], "", cells[1]]
    return grid(
        [row], [column, _GUTTER_PT, column], ("VALIGN", (0, 0), (-1, -1), "TOP"), padding=(0, 0)
    )


def _diagram(view: DayView, junction: JunctionView, width: float, height: float) -> Flowable:
    return side_drawing(junction, view.heading.patient_position, width=width, height=height)


def _text(junction: JunctionView, width: float) -> list[Flowable]:
    what = f"{junction.technique}, {signed(junction.offset_cm)} cm from position A"
    return [
        para(safe(f"JUNCTION {junction.junction}"), style.LEAD),
        para(safe(f"{junction.superior_field} | {junction.inferior_field}")),
        para(safe(what), style.SMALL),
        *([space(3), _gaps(junction.gaps, width)] if junction.gaps else []),
    ]


def _gaps(gaps: tuple[GapView, ...], width: float) -> Table:
    heads = ("Skin gap, cm", "expected", "accept", "measured")
    rows: list[list[Any]] = [[para(safe(head), style.SMALL) for head in heads]]
    for gap in gaps:
        low, high = gap.expected_cm - gap.tolerance_cm, gap.expected_cm + gap.tolerance_cm
        rows.append(
            [
                para(safe(gap.side)),
                _expected(gap),
                para(safe(f"{figure(low)} to {figure(high)}")),
                "",
            ]
        )
    # The blank keeps a heavy frame: it is the one thing on the sheet that is measured on the skin.
    return grid(
        rows,
        shares(width, 5, 4, 5, 6),
        ("BOX", (3, 1), (3, -1), style.RULE_PT, "black"),
        ("INNERGRID", (3, 1), (3, -1), style.RULE_PT, "black"),
        ("LINEABOVE", (0, 1), (2, -1), style.HAIR_PT, "black"),
        ("TOPPADDING", (0, 1), (-1, -1), 2),
        ("BOTTOMPADDING", (0, 1), (-1, -1), 2),
    )


def _expected(gap: GapView) -> Flowable:
    overlap = " overlap" if gap.expected_cm < 0 else ""
    return para(strong(f"{figure(gap.expected_cm)}{overlap}"), style.LEAD)
