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

    from featherlog.views.dose import DoseCurve, DoseFigures, DoseLine

_HEADS = (
    "Place", "Dose", "Max Gy", "%", "at z cm", "Min Gy", "%", "at z cm", ">107 % cm", "<95 % cm",
    "100 % is Gy",
)  # fmt: skip
_PARTS = (104, 60, 39, 33, 38, 39, 33, 38, 53, 48, 55)


def figures_table(lines: Sequence[tuple[str, DoseLine]], width: float) -> Table:
    """Return the figures of each named line's curves: extremes with their places, and lengths.

    Each row names the dose that its percents are of, two where hot and cold are of different ones.
    A curve without percents has its extremes in Gy and says why.
    """
    rows: list[list[Any]] = [[para(safe(head), style.SMALL) for head in _HEADS]]
    spans: list[tuple[Any, ...]] = []
    for place, line in lines:
        kept = [item for item in line.curves if item.figures is not None or item.note]
        if kept:
            spans.append(("SPAN", (0, len(rows)), (0, len(rows) + len(kept) - 1)))
        for number, item in enumerate(kept):
            first = para(safe("" if number else place), style.SMALL)
            if item.figures is None:
                spans.append(("SPAN", (-8, len(rows)), (-1, len(rows))))
            rows.append([first, *_cells(item)])
    return grid(
        rows,
        shares(width, *_PARTS),
        ("VALIGN", (0, 0), (-1, -1), "TOP"),
        *spans,
        ("LINEBELOW", (0, 0), (-1, 0), style.HAIR_PT, "black"),
        padding=(2, 0.8),
        repeat_rows=1,
    )


def _cells(curve: DoseCurve) -> list[Flowable]:
    if curve.figures is not None:
        return _figure_cells(curve.name, curve.figures)
    said = f"down to {min(curve.dose_gy):.2f} Gy; {curve.note}"
    texts = (curve.name, f"{max(curve.dose_gy):.2f}", said, *[""] * (len(_HEADS) - 4))
    return [para(safe(text), style.SMALL) for text in texts]


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
        _reference(figures),
    )
    return [para(safe(name), style.SMALL), *(para(safe(text), style.SMALL) for text in numbers)]


def _reference(figures: DoseFigures) -> str:
    hot, cold = figure(figures.reference_gy), figure(figures.cold_reference_gy)
    return hot if hot == cold else f"{hot}; {cold}"
