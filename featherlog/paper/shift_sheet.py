"""The shift sheet: one page that says what to set for one fraction."""

from __future__ import annotations

from functools import partial
from typing import TYPE_CHECKING

from reportlab.platypus import PageBreak

from featherlog.paper import style
from featherlog.paper.day_answer import answer_box, complete_box, locked_banner, stop_page
from featherlog.paper.day_junctions import diagrams, junction_blocks
from featherlog.paper.day_settings import TICK, settings_table
from featherlog.paper.departures import departure_line
from featherlog.paper.fonts import join, safe, strong
from featherlog.paper.layout import SIGNED, Furniture, build_pdf, count_pages, lines_to_fill, space
from featherlog.paper.style import grid, para, shares
from featherlog.words import RECORD_CAUTION, THIS_FRACTION_ONLY

if TYPE_CHECKING:
    from reportlab.platypus import Flowable, Table

    from featherlog.paper.style import PageSize
    from featherlog.views.common import DepartureLine
    from featherlog.views.day import DayView

# Diagram height and room about each line of settings, in points, from airy to dense. Diagrams
# shrink, text never does; None sends the diagrams to a page of their own.
_ARRANGEMENTS = (
    (175.0, 2.4),
    (160.0, 1.6),
    (140.0, 1.0),
    (120.0, 0.6),
    (90.0, 0.4),
    (None, 1.6),
    (None, 0.1),
)
_ALONE_HEIGHT_PT = 240.0
_CHECKS = (
    "Patient: both identifiers",
    "Position on the console",
    "Jaws, angles and MU",
    "Table: direction and amount",
    "Skin gap measured",
)


def shift_sheet(view: DayView, page_size: PageSize = "A4") -> bytes:
    """Return the shift sheet of one fraction as a PDF.

    One page; where even the smallest diagrams do not fit beside the settings they follow on a
    second. A view whose status is ``stop`` gives a page that holds no settings.

    Raises:
        InputError: A name holds a character that the font cannot print.
    """
    furniture = _furniture(view)
    if view.status != "ready":
        return build_pdf(furniture, partial(_closed, view), page_size)
    for height, padding in _ARRANGEMENTS:
        story = partial(_sheet, view, height, padding)
        if count_pages(furniture, story, page_size) == (1 if height else 2):
            break
    return build_pdf(furniture, story, page_size)


def _furniture(view: DayView) -> Furniture:
    return Furniture(
        title="Shift sheet",
        heading=view.heading,
        demo=view.heading.demo,
        notes=(THIS_FRACTION_ONLY, view.caution, RECORD_CAUTION),
        marks=(
            ("Page code", view.page_code),
            ("Ledger head", view.ledger_head),
            ("Printed", view.printed_at),
        ),
    )


def _closed(view: DayView, width: float) -> list[Flowable]:
    body = stop_page(view, width) if view.status == "stop" else [complete_box(view, width)]
    open_matters = _open_matters(view.open_departures) if view.open_departures else []
    return [*body, space(14), *open_matters, *_raised_risk(view)]


def _sheet(
    view: DayView, diagram_height: float | None, padding: float, width: float
) -> list[Flowable]:
    body: list[Flowable] = [answer_box(view, width), space(3)]
    if view.part_delivered:
        body += [locked_banner(view, width), space(5)]
    body += [settings_table(view, width, padding), *_table_reference(view), space(4)]
    body += [*junction_blocks(view, width, diagram_height), space(4)]
    body += [*_open_matters(view.open_departures), *_raised_risk(view)]
    body += [space(4), _sign_off(width)]
    if diagram_height is None:
        body += [PageBreak(), *diagrams(view, width, _ALONE_HEIGHT_PT)]
    return body


def _table_reference(view: DayView) -> list[Flowable]:
    if not view.table_reference:
        return []
    return [para(join(" ", [safe("Table reference:"), strong(view.table_reference)]))]


def _open_matters(departures: tuple[DepartureLine, ...]) -> list[Flowable]:
    if not departures:
        return [para(join(" ", [strong("Open matters:"), safe("none")]))]
    return [para(strong("Open matters"), style.LEAD), *map(departure_line, departures)]


def _raised_risk(view: DayView) -> list[Flowable]:
    return [para(join(" ", [strong("Raised risk:"), safe(risk)])) for risk in view.raised_risk]


def _sign_off(width: float) -> Table:
    checks = [para(join(" ", [safe(f"{TICK} {TICK}"), safe(check)])) for check in _CHECKS]
    middle = (len(checks) + 1) // 2
    read_back = [
        para(safe("Read back by two people: first box performer, second verifier"), style.SMALL),
        grid(
            [[checks[:middle], checks[middle:]]],
            shares(width * 0.6, 1, 1),
            ("VALIGN", (0, 0), (-1, -1), "TOP"),
            padding=(0, 1),
        ),
    ]
    people = lines_to_fill(width * 0.37, *(f"{who}: {SIGNED}" for who in ("Performer", "Verifier")))
    return grid(
        [[read_back, "", people]],
        shares(width, 60, 3, 37),
        ("VALIGN", (0, 0), (1, -1), "TOP"),
        ("VALIGN", (2, 0), (2, -1), "BOTTOM"),
        padding=(0, 0),
    )
