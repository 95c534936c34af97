"""How a dose picture is divided: whole-course curves above, the dose so far below.

Half-way through a course the delivered dose lies far below the planned one. On a single axis the
few percent that matter about 95 and 107 % would be lost, so the axis is broken between them; both
parts keep the same scale, so a dip has the same height in either.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from featherlog.paper.plot import Axes

if TYPE_CHECKING:
    from collections.abc import Sequence

    from featherlog.views.dose import DoseCurve, DoseLine

LEVELS_PERCENT = (95.0, 100.0, 107.0)
_SO_FAR = "delivered"
_BREAK_PT = 8.0
# Room above and below the curves, and the least span of the lower part, both as parts of the upper
# span.
_ROOM, _LEAST = 0.06, 0.4

Range = tuple[float, float]


@dataclass(frozen=True, slots=True)
class Area:
    """The room for all parts of a picture, in points."""

    left: float
    bottom: float
    width: float
    height: float


@dataclass(frozen=True, slots=True)
class Panel:
    """One part of the picture and the curves drawn in it."""

    axes: Axes
    curves: tuple[DoseCurve, ...]


def divide(line: DoseLine, reference_gy: float, area: Area) -> list[Panel]:
    """Return the parts from bottom to top: one, or two where the dose so far lies far below."""
    z_range = (min(line.z_cm), max(line.z_cm))
    groups = _groups(line.curves, reference_gy)
    spans = [high - low for (low, high), _ in groups]
    free = area.height - _BREAK_PT * (len(groups) - 1)
    bottom = area.bottom
    panels = []
    for ((low, high), curves), span in zip(groups, spans, strict=True):
        height = free * span / sum(spans)
        axes = Axes(area.left, bottom, area.width, height, z_range, (low, high))
        panels.append(Panel(axes, curves))
        bottom += height + _BREAK_PT
    return panels


def _groups(
    curves: Sequence[DoseCurve], reference_gy: float
) -> list[tuple[Range, tuple[DoseCurve, ...]]]:
    shown = tuple(curve for curve in curves if curve.dose_gy)
    so_far = tuple(curve for curve in shown if curve.name == _SO_FAR)
    whole = tuple(curve for curve in shown if curve.name != _SO_FAR)
    levels = [reference_gy * percent / 100 for percent in LEVELS_PERCENT]
    upper = _range(whole, levels)
    if not so_far:
        return [(upper, whole)]
    span = upper[1] - upper[0]
    low, high = _range(so_far, [], room_gy=_ROOM * span)
    lower = (max(0.0, min(low, high - _LEAST * span)), max(high, _LEAST * span))
    if lower[1] < upper[0]:
        return [(lower, so_far), (upper, whole)]
    return [(_range(shown, levels), shown)]


def _range(
    curves: Sequence[DoseCurve], also_gy: list[float], room_gy: float | None = None
) -> Range:
    doses = [*(dose for curve in curves for dose in curve.dose_gy), *also_gy]
    low, high = min(doses), max(doses)
    room = _ROOM * (high - low) if room_gy is None else room_gy
    return max(0.0, low - room), high + room
