"""Axes of a profile: where a coordinate and a dose stand on the drawing."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

from featherlog.paper import ink
from featherlog.paper.style import HAIR_PT
from featherlog.words import figure

if TYPE_CHECKING:
    from collections.abc import Sequence

    from reportlab.graphics.shapes import Drawing

_TICK_PT = 3.0
_MOST_TICKS = 6
_TICK_ROOM_PT = 9.5


@dataclass(frozen=True, slots=True)
class Axes:
    """The plot area in points and the ranges it shows: z in cm with the head left, dose in Gy."""

    left: float
    bottom: float
    width: float
    height: float
    z_range_cm: tuple[float, float]
    dose_range_gy: tuple[float, float]

    def x(self, z_cm: float) -> float:
        """Return the horizontal place of an axis coordinate; superior lies left."""
        low, high = self.z_range_cm
        return self.left + self.width * (high - z_cm) / (high - low)

    def y(self, dose_gy: float) -> float:
        """Return the vertical place of a dose."""
        low, high = self.dose_range_gy
        return self.bottom + self.height * (dose_gy - low) / (high - low)


def ticks(low: float, high: float, most: int = _MOST_TICKS) -> list[float]:
    """Return round values (1, 2 or 5 times a power of ten apart) within a range."""
    rough = (high - low) / most
    power = 10.0 ** math.floor(math.log10(rough))
    step = next(power * factor for factor in (1, 2, 5, 10) if power * factor >= rough)
    first, last = math.ceil(low / step - 1e-9), math.floor(high / step + 1e-9)
    return [index * step for index in range(first, last + 1)]


def add_frame(drawing: Drawing, axes: Axes) -> None:
    """Draw the frame and its dose ticks in Gy, as many as the height has room for."""
    drawing.add(ink.frame(axes.left, axes.bottom, axes.width, axes.height))
    for dose_gy in _dose_ticks(axes):
        y = axes.y(dose_gy)
        drawing.add(ink.line((axes.left - _TICK_PT, y), (axes.left, y), width=HAIR_PT))
        text = figure(dose_gy, least=0)
        drawing.add(ink.label((axes.left - _TICK_PT - 2, y - 3), text, anchor="end"))


def _dose_ticks(axes: Axes) -> list[float]:
    """Return as many ticks as have room, and two at least: one alone would show no scale."""
    most = min(_MOST_TICKS, max(2, int(axes.height / _TICK_ROOM_PT)))
    values = ticks(*axes.dose_range_gy, most)
    if len(values) > 1:
        return values
    finer = ticks(*axes.dose_range_gy, 2 * most)
    return [finer[0], finer[-1]] if finer else []


def add_foot(drawing: Drawing, axes: Axes) -> None:
    """Draw the ticks along the axis in cm, its name, and which end is which."""
    for z_cm in ticks(*axes.z_range_cm):
        x = axes.x(z_cm)
        drawing.add(ink.line((x, axes.bottom), (x, axes.bottom - _TICK_PT), width=HAIR_PT))
        text = figure(z_cm, least=0)
        drawing.add(ink.label((x, axes.bottom - _TICK_PT - 8), text, anchor="middle"))
    low, right = axes.bottom - 22, axes.left + axes.width
    drawing.add(ink.label((axes.left, low), "HEAD", bold=True))
    drawing.add(ink.label((right, low), "FEET", bold=True, anchor="end"))
    middle = axes.left + axes.width / 2
    drawing.add(ink.label((middle, low), "z, cm (+ toward the head)", anchor="middle"))


def add_top(drawing: Drawing, axes: Axes, marks: Sequence[tuple[str, float]]) -> None:
    """Name the dose axis and the marked coordinates above the picture."""
    top = axes.bottom + axes.height
    drawing.add(ink.label((0, top + 10), "dose, Gy"))
    for name, z_cm in _inside(axes, marks):
        drawing.add(ink.label((axes.x(z_cm), top + 4), name, anchor="middle", bold=True))


def add_levels(drawing: Drawing, axes: Axes, levels: Sequence[tuple[str, float]]) -> None:
    """Draw named horizontal levels (Gy) with their names at the right, kept apart."""
    right = axes.left + axes.width
    shown = [
        (name, dose)
        for name, dose in levels
        if axes.dose_range_gy[0] <= dose <= axes.dose_range_gy[1]
    ]
    heights = [axes.y(dose) - 3 for _, dose in shown]
    top = axes.bottom + axes.height
    for (name, dose), y in zip(shown, ink.apart(heights, 9.0, axes.bottom, top), strict=True):
        level = axes.y(dose)
        drawing.add(ink.line((axes.left, level), (right, level), width=HAIR_PT, color=ink.GREY))
        drawing.add(ink.line((right, level), (right + 4, y + 3), width=HAIR_PT))
        drawing.add(ink.label((right + 6, y), name))


def add_marks(drawing: Drawing, axes: Axes, marks: Sequence[tuple[str, float]]) -> None:
    """Mark labelled coordinates (cm) by fine dotted uprights."""
    top = axes.bottom + axes.height
    for _, z_cm in _inside(axes, marks):
        x = axes.x(z_cm)
        drawing.add(ink.line((x, axes.bottom), (x, top), width=HAIR_PT, dash=(1, 2)))


def _inside(axes: Axes, marks: Sequence[tuple[str, float]]) -> list[tuple[str, float]]:
    low, high = axes.z_range_cm
    return [(name, z_cm) for name, z_cm in marks if low <= z_cm <= high]
