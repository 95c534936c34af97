"""The dose estimate as a table for a spreadsheet or a notebook."""

from __future__ import annotations

from typing import TYPE_CHECKING

from featherlog.words import DEMO_NOTICE

if TYPE_CHECKING:
    from collections.abc import Iterator

    from featherlog.views.dose import DoseLine, DoseView, JunctionDose

_Row = tuple[str, str, float, float, float, float, str, float, float]
_COLUMNS = ("junction", "place", "depth_cm", "x_cm", "y_cm", "z_cm", "curve", "dose_gy", "percent")
_FORMULA_STARTS = ("=", "+", "-", "@", "\t", "\r")


def dose_csv(view: DoseView) -> str:
    """Return every point of every profile as one row of CSV, unrounded, under comment lines.

    ``percent`` is of the junction's reference dose. Lines that begin with ``#`` hold the caution
    and the model.
    """
    # pandas takes a third of a second to load, so only this table waits for it.
    import pandas as pd  # noqa: PLC0415 - as the line above says

    table = pd.DataFrame(_rows(view), columns=list(_COLUMNS))
    comments = "".join(f"# {line}\n" for line in _comments(view))
    return comments + table.to_csv(index=False, lineterminator="\n")


def _comments(view: DoseView) -> Iterator[str]:
    if view.heading is not None:
        if view.heading.demo:
            yield DEMO_NOTICE
        yield f"course {view.heading.course}, revision {view.heading.revision}"
    yield view.caution
    yield view.model


def _rows(view: DoseView) -> Iterator[_Row]:
    for junction in view.junctions:
        for line in junction.lines:
            yield from _line_rows(junction, line)


def _line_rows(junction: JunctionDose, line: DoseLine) -> Iterator[_Row]:
    name, place = _cell(junction.junction), _cell(line.place)
    for curve in line.curves:
        for z_cm, dose_gy in zip(line.z_cm, curve.dose_gy, strict=True):
            percent = 100 * dose_gy / junction.reference_dose_gy
            where = (name, place, line.depth_cm, line.x_cm, line.y_cm, z_cm)
            yield (*where, _cell(curve.name), dose_gy, percent)


def _cell(text: str) -> str:
    """Return text that no spreadsheet takes for a formula: an apostrophe marks it as text."""
    return f"'{text}" if text.startswith(_FORMULA_STARTS) else text
