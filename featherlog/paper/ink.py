"""Lines and labels of the drawings; every label is checked for glyphs."""

from __future__ import annotations

from typing import TYPE_CHECKING, Literal

from reportlab.graphics.shapes import Drawing, Line, Polygon, PolyLine, String
from reportlab.lib.colors import Color, black, white
from reportlab.pdfbase.pdfmetrics import stringWidth

from featherlog.paper.fonts import BOLD, REGULAR, plain, register
from featherlog.paper.style import FINE_PT, HAIR_PT, SMALLEST_PT

if TYPE_CHECKING:
    from collections.abc import Sequence

Point = tuple[float, float]
Dash = tuple[float, ...]
Anchor = Literal["start", "middle", "end"]

SOLID: Dash = ()
TINT = Color(0.91, 0.91, 0.91)
BLACK = black
GREY = Color(0.55, 0.55, 0.55)
LABEL_PT = SMALLEST_PT


def blank(width: float, height: float) -> Drawing:
    """Return an empty drawing (points) that starts in the family's font, not an unembedded one."""
    register()
    return Drawing(width, height, initialFontName=REGULAR)


def line(
    start: Point, end: Point, *, width: float = FINE_PT, dash: Dash = SOLID, color: Color = black
) -> Line:
    """Return a straight line in points."""
    return Line(
        *start, *end, strokeWidth=width, strokeDashArray=dash, strokeColor=color, strokeLineCap=0
    )


def curve(
    points: Sequence[Point], *, width: float, dash: Dash = SOLID, color: Color = black
) -> PolyLine:
    """Return a line through many points."""
    flat = [coordinate for point in points for coordinate in point]
    return PolyLine(
        flat,
        strokeWidth=width,
        strokeDashArray=dash,
        strokeColor=color,
        strokeLineCap=0,
        strokeLineJoin=1,
    )


def region(points: Sequence[Point]) -> Polygon:
    """Return a lightly tinted area without an outline."""
    flat = [coordinate for point in points for coordinate in point]
    return Polygon(flat, fillColor=TINT, strokeColor=None, strokeWidth=0)


def frame(left: float, bottom: float, width: float, height: float) -> Polygon:
    """Return a fine rectangle."""
    box = _box(left, bottom, width, height)
    return Polygon(box, fillColor=None, strokeColor=black, strokeWidth=HAIR_PT)


def _box(left: float, bottom: float, width: float, height: float) -> list[float]:
    right, top = left + width, bottom + height
    return [left, bottom, right, bottom, right, top, left, top]


def label(
    at: Point, text: str, *, anchor: Anchor = "start", bold: bool = False, size: float = LABEL_PT
) -> String:
    """Return a label; raises ``InputError`` where a character cannot be printed."""
    return String(
        *at,
        plain(text),
        fontName=BOLD if bold else REGULAR,
        fontSize=size,
        textAnchor=anchor,
        fillColor=black,
    )


def label_width(text: str, *, bold: bool = False, size: float = LABEL_PT) -> float:
    """Return the printed width of a label in points."""
    return float(stringWidth(plain(text), BOLD if bold else REGULAR, size))


def knockout(drawing: Drawing, text: String) -> None:
    """Add a label on a white ground, so that lines beneath do not cross the letters."""
    wide = label_width(text.text, bold=text.fontName == BOLD, size=text.fontSize)
    left = text.x - {"start": 0.0, "middle": wide / 2, "end": wide}[text.textAnchor]
    ground = _box(left - 1.5, text.y - 2, wide + 3, text.fontSize + 1.5)
    drawing.add(Polygon(ground, fillColor=white, strokeColor=None))
    drawing.add(text)


def apart(heights: Sequence[float], least: float, low: float, high: float) -> list[float]:
    """Return label heights moved as little as needed to lie ``least`` apart within bounds.

    The order of the labels is kept; with too little room they are spread evenly.
    """
    order = sorted(range(len(heights)), key=lambda index: heights[index])
    step = min(least, (high - low) / max(len(heights) - 1, 1))
    placed = dict.fromkeys(order, 0.0)
    floor = low
    for index in order:
        placed[index] = floor = max(heights[index], floor)
        floor += step
    ceiling = high
    for index in reversed(order):
        placed[index] = ceiling = min(placed[index], ceiling)
        ceiling -= step
    return [placed[index] for index in range(len(heights))]
