"""The table of figures beneath the dose pictures."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from featherlog.paper import style
from featherlog.paper.fonts import safe
from featherlog.paper.style import grid, para, shares
from featherlog.words import figure, signed

if TYPE_CHECKING:
    from collections.abc import Sequence

    from reportlab.platypus import Flowable, Table

    from featherlog.views.dose import DoseFigures, DoseLine

_HEADS = (
    "Place", "Dose", "Max Gy", "%", "at z cm", "Min Gy", "%", "at z cm", ">107 % cm", "<95 % cm",
    "100 % is Gy",
)  # fmt: skip
_PARTS = (104, 60, 39, 33, 38, 39, 33, 38, 53, 48, 55)


def figures_table(lines: Sequence[tuple[str, DoseLine]], width: float) -> Table:
    """Return the figures of each named line's curves: extremes with their places, and lengths.

    Each row names the dose that its percents are of.
    """
    rows: list[list[Any]] = [[para(safe(head), style.SMALL) for head in _HEADS]]
    spans: list[tuple[Any, ...]] = []
    for place, line in lines:
        kept = [(item.name, item.figures) for item in line.curves if item.figures is not None]
        if kept:
            spans.append(("SPAN", (0, len(rows)), (0, len(rows) + len(kept) - 1)))
        for number, (name, figures) in enumerate(kept):
            first = para(safe("" if number else place), style.SMALL)
            rows.append([first, *_figure_cells(name, figures)])
    return grid(
        rows,
        shares(width, *_PARTS),
        ("VALIGN", (0, 0), (-1, -1), "TOP"),
        *spans,
        ("LINEBELOW", (0, 0), (-1, 0), style.HAIR_PT, "black"),
        padding=(2, 0.8),
        repeat_rows=1,
    )


def _figure_cells(name: str, figures: DoseFigures) -> list[Flowable]:
    numbers = (
        f"{figures.maximum_gy:.2f}",
        f"{figures.maximum_percent:.1f}",
        signed(figures.maximum_z_cm, least=2),
        f"{figures.minimum_gy:.2f}",
        f"{figures.minimum_percent:.1f}",
        signed(figures.minimum_z_cm, least=2),
        f"{figures.over_107_cm:.2f}",
        f"{figures.under_95_cm:.2f}",
        figure(figures.reference_gy),
    )
    return [para(safe(name), style.SMALL), *(para(safe(text), style.SMALL) for text in numbers)]
