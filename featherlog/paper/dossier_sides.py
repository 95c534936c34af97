"""The junctions of a design seen from the side, at position A."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from featherlog.paper.fonts import strong
from featherlog.paper.layout import section
from featherlog.paper.side_view import side_drawing
from featherlog.paper.style import grid, para

if TYPE_CHECKING:
    from collections.abc import Sequence

    from reportlab.platypus import Flowable

    from featherlog.views.day import JunctionView

_BESIDE = 2
_GUTTER_PT = 12.0
_TALL_PT = 150.0


def side_pictures(
    junctions: Sequence[JunctionView], patient_position: str, width: float
) -> list[Flowable]:
    """Return the drawings under their junctions' names, two to a row; nothing without any."""
    column = (width - _GUTTER_PT) / _BESIDE
    rows = []
    for first in range(0, len(junctions), _BESIDE):
        row: list[Any] = []
        for junction in junctions[first : first + _BESIDE]:
            drawing = side_drawing(junction, patient_position, width=column, height=_TALL_PT)
            row += [[para(strong(f"JUNCTION {junction.junction}")), drawing], ""]
        row += [""] * (2 * _BESIDE - len(row))
        rows.append(row[:-1])
    if not rows:
        return []
    pictures = grid(rows, [column, _GUTTER_PT, column], padding=(0, 3))
    return [*section("JUNCTIONS FROM THE SIDE, POSITION A", keep_pt=_TALL_PT + 60), pictures]
