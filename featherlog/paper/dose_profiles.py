"""The dose profile of each junction at its match depth, side by side, with figures beneath."""

from __future__ import annotations

from typing import TYPE_CHECKING

from reportlab.platypus import KeepTogether

from featherlog.paper import style
from featherlog.paper.dose_figures import figures_table
from featherlog.paper.dose_picture import legend, line_drawing
from featherlog.paper.fonts import safe, strong
from featherlog.paper.layout import space
from featherlog.paper.style import grid, para
from featherlog.words import figure

if TYPE_CHECKING:
    from collections.abc import Sequence

    from reportlab.platypus import Flowable, Table

    from featherlog.views.dose import DoseLine, DoseView, JunctionDose

_GUTTER_PT = 12.0
_PICTURE_PT = 126.0
_BESIDE = 2


def match_profiles(
    dose: DoseView, width: float, *, all_depths: bool = False, picture_pt: float = _PICTURE_PT
) -> list[Flowable]:
    """Return a profile for each junction at its match depth, two to a row, and their figures.

    With ``all_depths`` the figures are those of every depth, not of the match depth alone.
    """
    shown = [(junction, _match_line(junction)) for junction in dose.junctions]
    if not shown:
        return []
    rows = [shown[first : first + _BESIDE] for first in range(0, len(shown), _BESIDE)]
    named = [(f"{junction.junction}, {line.place}", line) for junction, line in shown]
    return [
        legend([item.name for item in shown[0][1].curves], width),
        *(_row(row, width, picture_pt) for row in rows),
        space(3),
        KeepTogether(
            [
                figures_table(_every(dose) if all_depths else named, width),
                para(safe(dose.model), style.SMALL),
            ]
        ),
    ]


def _every(dose: DoseView) -> list[tuple[str, DoseLine]]:
    return [
        (f"{junction.junction}, {line.place}, {figure(line.depth_cm)} cm", line)
        for junction in dose.junctions
        for line in junction.lines
    ]


def _row(shown: Sequence[tuple[JunctionDose, DoseLine]], width: float, height: float) -> Table:
    column = width / len(shown)
    cells = [_profile(junction, line, column - _GUTTER_PT, height) for junction, line in shown]
    return grid([cells], [column] * len(shown), padding=(0, 0))


def _profile(junction: JunctionDose, line: DoseLine, width: float, height: float) -> list[Flowable]:
    reference = f"levels in percent of {figure(junction.reference_dose_gy)} Gy"
    what = f"{figure(line.depth_cm)} cm deep, {reference}"
    return [
        para(strong(f"JUNCTION {junction.junction}, {line.place}")),
        para(safe(what), style.SMALL),
        line_drawing(junction, line, width=width, height=height, with_legend=False),
    ]


def _match_line(junction: JunctionDose) -> DoseLine:
    return next((line for line in junction.lines if "match" in line.place), junction.lines[0])
