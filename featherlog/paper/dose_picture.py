"""The summed dose along a junction, as a vector picture for paper and screen."""

from __future__ import annotations

from functools import partial
from typing import TYPE_CHECKING, Any

from reportlab.graphics import renderSVG
from reportlab.platypus import KeepTogether, PageBreak

from featherlog.errors import NotFoundError
from featherlog.paper import ink, style
from featherlog.paper.dose_figures import figures_table
from featherlog.paper.dose_panels import LEVELS_PERCENT, Area, divide
from featherlog.paper.fonts import BOLD, REGULAR, join, safe, strong
from featherlog.paper.layout import Furniture, build_pdf, space
from featherlog.paper.plot import add_foot, add_frame, add_levels, add_marks, add_top
from featherlog.paper.style import para
from featherlog.words import DOSE_CAUTION, figure, signed

if TYPE_CHECKING:
    from collections.abc import Sequence

    from reportlab.graphics.shapes import Drawing
    from reportlab.platypus import Flowable

    from featherlog.paper.ink import Dash
    from featherlog.paper.plot import Axes
    from featherlog.paper.style import PageSize
    from featherlog.views.dose import DoseCurve, DoseLine, DoseView, JunctionDose

_WIDE_PT, _TALL_PT = 520.0, 190.0
# Three depths and their figures fit one page at this height.
_PAGE_TALL_PT = 136.0
_LEFT_PT, _RIGHT_PT, _BOTTOM_PT, _TOP_PT = 34.0, 42.0, 26.0, 30.0
_BARE_TOP_PT, _LEGEND_PT = 20.0, 12.0
_SAMPLE_PT = 26.0

# Width, dash and tone: told apart on a photocopy and where curves lie on each other.
_PENS: dict[str, tuple[float, Dash, Any]] = {
    "planned": (3.4, (12.0, 2.0), ink.GREY),
    "unfeathered": (0.8, (7.0, 2.0, 1.5, 2.0), ink.BLACK),
    "delivered": (1.5, ink.SOLID, ink.BLACK),
    "predicted": (1.5, (3.0, 2.0), ink.BLACK),
}
_OTHER_PEN: tuple[float, Dash, Any] = (0.8, (1.0, 1.5), ink.BLACK)
_SVG_FONTS = {
    REGULAR: {"family": f"{REGULAR}, sans-serif"},
    BOLD: {"family": f"{REGULAR}, sans-serif", "weight": "bold"},
}


def dose_drawing(
    junction: JunctionDose,
    place: str,
    *,
    width: float = _WIDE_PT,
    height: float = _TALL_PT,
) -> Drawing:
    """Return the profile at one of a junction's depths, head at the left, size in points.

    Planned, delivered, predicted and unfeathered dose in Gy, levels at 95, 100 and 107 % of the
    junction's reference dose, and the match point of each position. Where the dose so far lies far
    below, the axis is broken between, both parts at the same scale.

    Raises:
        NotFoundError: The junction has no profile of that name.
        InputError: A label holds a character that the font cannot print.
    """
    return line_drawing(junction, _line(junction, place), width=width, height=height)


def line_drawing(
    junction: JunctionDose,
    line: DoseLine,
    *,
    width: float,
    height: float,
    with_legend: bool = True,
) -> Drawing:
    """Return ``dose_drawing`` of a given profile; several depths may share the name of a place."""
    top = _TOP_PT if with_legend else _BARE_TOP_PT
    area = Area(_LEFT_PT, _BOTTOM_PT, width - _LEFT_PT - _RIGHT_PT, height - _BOTTOM_PT - top)
    panels = divide(line, junction.reference_dose_gy, area)
    drawing = ink.blank(width, height)
    for panel in panels:
        add_marks(drawing, panel.axes, junction.position_z_cm)
        add_levels(drawing, panel.axes, _levels(junction.reference_dose_gy))
        for item in sorted(panel.curves, key=_depth_of_ink):
            _add_curve(drawing, panel.axes, line, item)
        add_frame(drawing, panel.axes)
    add_foot(drawing, panels[0].axes)
    add_top(drawing, panels[-1].axes, junction.position_z_cm)
    if with_legend:
        _add_legend(drawing, [item.name for item in line.curves], height - _LEGEND_PT + 2)
    return drawing


def legend(names: Sequence[str], width: float) -> Drawing:
    """Return the legend alone, for pictures that stand side by side."""
    drawing = ink.blank(width, _LEGEND_PT)
    _add_legend(drawing, names, 2)
    return drawing


def dose_svg(
    junction: JunctionDose, place: str, *, width: float = _WIDE_PT, height: float = _TALL_PT
) -> str:
    """Return ``dose_drawing`` as SVG text.

    Raises:
        NotFoundError: The junction has no profile of that name.
        InputError: A label holds a character that the font cannot print.
    """
    drawing = dose_drawing(junction, place, width=width, height=height)
    title = safe(f"Junction {junction.junction}, dose along the axis: {place}")
    text = str(renderSVG.drawToString(drawing, fontHacks=_SVG_FONTS))
    return text.replace("<title>...</title>", f"<title>{title}</title>").replace(
        "<desc>...</desc>", f"<desc>{safe(DOSE_CAUTION)}</desc>"
    )


def _line(junction: JunctionDose, place: str) -> DoseLine:
    for line in junction.lines:
        if line.place == place:
            return line
    known = ", ".join(line.place for line in junction.lines)
    raise NotFoundError(f'Junction {junction.junction} has no profile "{place}"; it has: {known}.')


def _levels(reference_gy: float) -> list[tuple[str, float]]:
    return [(f"{percent:.0f} %", reference_gy * percent / 100) for percent in LEVELS_PERCENT]


def _depth_of_ink(item: DoseCurve) -> int:
    return list(_PENS).index(item.name) if item.name in _PENS else len(_PENS)


def _add_curve(drawing: Drawing, axes: Axes, line: DoseLine, item: DoseCurve) -> None:
    width, dash, color = _PENS.get(item.name, _OTHER_PEN)
    points = list(zip(map(axes.x, line.z_cm), map(axes.y, item.dose_gy), strict=True))
    drawing.add(ink.curve(points, width=width, dash=dash, color=color))


def _add_legend(drawing: Drawing, names: Sequence[str], y: float) -> None:
    x = _LEFT_PT
    for name in names:
        width, dash, color = _PENS.get(name, _OTHER_PEN)
        drawing.add(
            ink.line((x, y + 3), (x + _SAMPLE_PT, y + 3), width=width, dash=dash, color=color)
        )
        drawing.add(ink.label((x + _SAMPLE_PT + 4, y), name))
        x += _SAMPLE_PT + ink.label_width(name) + 14


def dose_pdf(view: DoseView, page_size: PageSize = "A4") -> bytes:
    """Return the dose estimate as a PDF: each junction on its own page, a picture for each depth.

    Raises:
        InputError: A name holds a character that the font cannot print.
    """
    furniture = Furniture(
        title="Junction dose",
        heading=view.heading,
        demo=view.heading is not None and view.heading.demo,
        notes=(view.caution,),
        marks=(),
    )
    return build_pdf(furniture, partial(_dose_story, view), page_size)


def _dose_story(view: DoseView, width: float) -> list[Flowable]:
    body: list[Flowable] = []
    for number, junction in enumerate(view.junctions):
        if number:
            body.append(PageBreak())
        body += _dose_page(view, junction, width)
    return body


def _dose_page(view: DoseView, junction: JunctionDose, width: float) -> list[Flowable]:
    progress = f"{view.delivered_fractions} of {view.fractions} fractions delivered"
    levels = f"levels drawn at 95, 100 and 107 % of {figure(junction.reference_dose_gy)} Gy"
    pictures = [_picture(junction, line, width) for line in junction.lines]
    figures = [(f"{line.place}, {figure(line.depth_cm)} cm", line) for line in junction.lines]
    return [
        para(safe(f"JUNCTION {junction.junction}"), style.LEAD),
        para(safe(f"{progress}; {levels}. {view.model}")),
        *pictures,
        space(8),
        figures_table(figures, width),
    ]


def _picture(junction: JunctionDose, line: DoseLine, width: float) -> Flowable:
    where = f"depth {figure(line.depth_cm)} cm, x {signed(line.x_cm)}, y {signed(line.y_cm)} cm"
    title = para(join("  ", [strong(line.place), safe(where)]))
    drawing = line_drawing(junction, line, width=width, height=_PAGE_TALL_PT)
    return KeepTogether([space(6), title, drawing])
