"""The furniture every page shares: who it is about, where it stands, and what it is not."""

from __future__ import annotations

import re
from dataclasses import dataclass
from io import BytesIO
from typing import TYPE_CHECKING

from reportlab.lib.colors import black
from reportlab.platypus import (
    BaseDocTemplate,
    CondPageBreak,
    Frame,
    HRFlowable,
    PageTemplate,
    Spacer,
    Table,
)

from featherlog.paper import style
from featherlog.paper.fonts import REGULAR, Markup, join, register, safe, strong
from featherlog.paper.style import MARGIN_PT, SMALL_RIGHT, grid, para, shares
from featherlog.words import DEMO_NOTICE, patient_position

if TYPE_CHECKING:
    from collections.abc import Callable

    from reportlab.pdfgen.canvas import Canvas
    from reportlab.platypus import Flowable

    from featherlog.paper.style import PageSize
    from featherlog.views.common import Heading

_GAP_PT = 5.0
_WRITE_PT = 13.0
SIGNED = "name, signature, date and time"
"""What a person who signs writes."""


@dataclass(frozen=True, slots=True)
class Furniture:
    """What stands at the head and foot of each page.

    ``marks`` are (name, value) pairs that tell which state of the course was printed and when;
    ``notes`` are the standing sentences. ``heading`` is None for a design without a patient.
    """

    title: str
    heading: Heading | None
    demo: bool
    notes: tuple[str, ...]
    marks: tuple[tuple[str, str], ...]


def build_pdf(
    furniture: Furniture, story: Callable[[float], list[Flowable]], page_size: PageSize
) -> bytes:
    """Return the PDF; ``story`` makes the body for a given width in points.

    The bytes depend on the arguments alone. The story is laid out twice, because each foot names
    the number of pages.

    Raises:
        InputError: Some text holds a character that the font cannot print.
    """
    return _render(furniture, story, page_size, count_pages(furniture, story, page_size))[0]


def count_pages(
    furniture: Furniture, story: Callable[[float], list[Flowable]], page_size: PageSize
) -> int:
    """Return how many pages the story takes."""
    return _render(furniture, story, page_size, 1)[1]


def _render(
    furniture: Furniture,
    story: Callable[[float], list[Flowable]],
    page_size: PageSize,
    pages: int,
) -> tuple[bytes, int]:
    register()
    width, height = style.PAGE_SIZES[page_size]
    inner = width - 2 * MARGIN_PT
    head, foot = _head(furniture, inner), _foot(furniture, inner, "1", pages)
    head_height, foot_height = head.wrap(inner, height)[1], foot.wrap(inner, height)[1]

    def furnish(canvas: Canvas, _document: BaseDocTemplate) -> None:
        page = str(canvas.getPageNumber())
        _place(head, canvas, inner, height - MARGIN_PT - head_height)
        _place(_foot(furniture, inner, page, pages), canvas, inner, MARGIN_PT)

    frame = Frame(
        MARGIN_PT,
        MARGIN_PT + foot_height + _GAP_PT,
        inner,
        height - 2 * MARGIN_PT - head_height - foot_height - 2 * _GAP_PT,
        leftPadding=0,
        rightPadding=0,
        topPadding=0,
        bottomPadding=0,
    )
    buffer = BytesIO()
    document = BaseDocTemplate(
        buffer,
        pagesize=(width, height),
        title=_title(furniture),
        author="featherlog",
        subject=furniture.title,
        creator="featherlog",
        lang="en",
        displayDocTitle=1,
        invariant=1,
        initialFontName=REGULAR,
        pageTemplates=[PageTemplate("page", [frame], onPage=furnish)],
    )
    document.build(story(inner))
    return buffer.getvalue(), document.page


def _place(table: Table, canvas: Canvas, width: float, y: float) -> None:
    table.wrapOn(canvas, width, 0)
    table.drawOn(canvas, MARGIN_PT, y)


def _title(furniture: Furniture) -> str:
    # The patient's name stays out of the metadata, which file listings show; the course key serves.
    course = f", course {furniture.heading.course}" if furniture.heading else ""
    return f"{furniture.title}{course}"


def _head(furniture: Furniture, width: float) -> Table:
    rows: list[list[Flowable]] = []
    if furniture.demo:
        rows.append([_demo_band(width)])
    rows.append([_names(furniture, width)])
    return grid(
        rows, [width], ("LINEBELOW", (0, -1), (-1, -1), style.RULE_PT, "black"), padding=(0, 1)
    )


def _demo_band(width: float) -> Table:
    notice = para(strong(DEMO_NOTICE), style.CENTRED)
    return grid(
        [[notice]], [width], ("BOX", (0, 0), (-1, -1), style.FINE_PT, "black"), padding=(3, 1)
    )


def _names(furniture: Furniture, width: float) -> Table:
    heading = furniture.heading
    title = para(safe(furniture.title), style.TITLE_RIGHT)
    if heading is None:
        return grid([["", title]], shares(width, 3, 2), padding=(0, 1))
    identifiers = _pairs(*heading.identifiers)
    which = (("Course", heading.course), ("Revision", heading.revision))
    course = [para(_pair(name, value), SMALL_RIGHT) for name, value in which]
    where = [
        ("Site", heading.site),
        ("Patient position", patient_position(heading.patient_position)),
        ("Machine", heading.machine),
        ("Plan", heading.plan_label),
        ("State", heading.state),
    ]
    line = para(_pairs(*where), style.SMALL)
    return grid(
        [
            [para(safe(heading.patient_name), style.TITLE), title],
            [para(identifiers), course],
            [line, ""],
        ],
        shares(width, 5, 2),
        ("SPAN", (0, 2), (1, 2)),
        padding=(0, 1),
    )


def _pairs(*pairs: tuple[str, str]) -> Markup:
    return join("  ·  ", [_pair(name, value) for name, value in pairs])


def _pair(name: str, value: str) -> Markup:
    return Markup(f"{safe(name)}&nbsp;{strong(value)}") if value else Markup("")


def _foot(furniture: Furniture, width: float, page: str, pages: int) -> Table:
    marks = [*furniture.marks, ("Page", f"{page} of {pages}")]
    rows = [
        [para(join(" ", [safe(note) for note in _distinct(furniture.notes)]), style.SMALL)],
        [para(_pairs(*marks), style.SMALL)],
    ]
    return grid(
        rows, [width], ("LINEABOVE", (0, 0), (-1, 0), style.FINE_PT, "black"), padding=(0, 1.5)
    )


def _distinct(notes: tuple[str, ...]) -> list[str]:
    # Views carry their own cautions, which may share sentences; each is printed once.
    sentences = re.split(r"(?<=\.)\s+", " ".join(notes))
    return list(dict.fromkeys(sentences))


def section(title: str, keep_pt: float = 90.0) -> list[Flowable]:
    """Return the title of a section; with less room than ``keep_pt`` it begins a new page."""
    rule = HRFlowable(
        width="100%", thickness=style.RULE_PT, color=black, spaceBefore=8, spaceAfter=2
    )
    return [CondPageBreak(keep_pt), rule, para(safe(title), style.display(13)), space(2)]


def space(points: float) -> Flowable:
    """Return empty room between blocks."""
    return Spacer(0, points)


def lines_to_fill(width: float, *captions: str) -> Table:
    """Return lines to write on, one below the other, each over its caption."""
    rows: list[list[Flowable]] = []
    rules: list[tuple[str, tuple[int, int], tuple[int, int], float, str]] = []
    for caption in captions:
        rows += [[space(_WRITE_PT)], [para(safe(caption), style.SMALL)]]
        last = len(rows) - 1
        rules.append(("LINEABOVE", (0, last), (-1, last), style.FINE_PT, "black"))
    return grid(rows, [width], *rules, padding=(0, 1))
