"""The dose screen: figures of every profile, by junction and depth."""

from __future__ import annotations

from typing import TYPE_CHECKING

from featherlog import words
from featherlog.cli.output import table, wrapped
from featherlog.cli.show_day import heading_lines

if TYPE_CHECKING:
    from collections.abc import Iterator

    from featherlog.views.dose import DoseCurve, DoseFigures, DoseLine, DoseView


def dose_text(view: DoseView) -> str:
    """Return the dose screen of a course."""
    heading = heading_lines(view.heading) if view.heading else ()
    return "\n".join([*heading, *dose_lines(view)])


def dose_lines(view: DoseView) -> Iterator[str]:
    """Yield the figures of every junction and depth, with the model and the caution."""
    yield f"Dose estimate: {view.delivered_fractions} of {view.fractions} fractions delivered"
    yield "z along the axis (+ superior) and lengths over 107 % and under 95 % are in cm"
    for junction in view.junctions:
        yield (
            f"junction {junction.junction}: percent of {junction.reference_dose_gy:.2f} Gy unless "
            "another reference is named"
        )
        for line in junction.lines:
            yield from _depth(line, junction.reference_dose_gy)
    yield wrapped(view.model)
    yield wrapped(view.caution)


def _depth(line: DoseLine, reference_gy: float) -> Iterator[str]:
    yield f"  {line.place}, {words.figure(line.depth_cm, 1)} cm deep"
    heads = ("", "max Gy", "%", "at z", "min Gy", "%", "at z", ">107 %", "<95 %")
    rows = [_row(curve) for curve in line.curves if curve.figures]
    yield from (
        f"    {text}" for text in table(heads, rows, numeric="|".join(heads[1:])).split("\n")
    )
    for curve in line.curves:
        if curve.note:
            low, high = min(curve.dose_gy), max(curve.dose_gy)
            said = f"{curve.name}: {low:.2f} to {high:.2f} Gy; {curve.note}"
            yield wrapped(said, "    ")
        elif curve.figures and _other_reference(curve.figures, reference_gy):
            yield f"    {curve.name}: percent of {_references(curve.figures)}"


def _other_reference(figures: DoseFigures, reference_gy: float) -> bool:
    of = (figures.reference_gy, figures.cold_reference_gy)
    return any(abs(gy - reference_gy) > 1e-6 for gy in of)  # noqa: PLR2004 - noise


def _references(figures: DoseFigures) -> str:
    hot, cold = f"{figures.reference_gy:.2f} Gy", f"{figures.cold_reference_gy:.2f} Gy"
    return hot if hot == cold else f"{hot} (maximum) and {cold} (minimum)"


def _row(curve: DoseCurve) -> tuple[str, ...]:
    figures = curve.figures
    if figures is None:
        return (curve.name, *[""] * 8)
    return (
        curve.name,
        f"{figures.maximum_gy:.2f}",
        f"{figures.maximum_percent:.1f}",
        words.signed(figures.maximum_z_cm, 2),
        f"{figures.minimum_gy:.2f}",
        f"{figures.minimum_percent:.1f}",
        words.signed(figures.minimum_z_cm, 2),
        f"{figures.over_107_cm:.2f}",
        f"{figures.under_95_cm:.2f}",
    )
