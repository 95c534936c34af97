"""The chart round's page for one course: exceptions first, then what was given and adds up."""

from __future__ import annotations

from functools import partial
from typing import TYPE_CHECKING, Any

from featherlog.paper import style
from featherlog.paper.departures import departure_line
from featherlog.paper.dose_profiles import match_profiles
from featherlog.paper.fonts import Markup, join, safe, strong
from featherlog.paper.layout import SIGNED, Furniture, build_pdf, lines_to_fill, space
from featherlog.paper.review_grid import fraction_grid, is_delivered
from featherlog.paper.style import grid, para, shares
from featherlog.views.review_words import strips_words, week_words
from featherlog.words import RECORD_CAUTION, figure

if TYPE_CHECKING:
    from collections.abc import Sequence

    from reportlab.platypus import Flowable, Table

    from featherlog.paper.style import PageSize
    from featherlog.views.review import ReviewView, ShareLine, SidesLine

_GUTTER_PT = 12.0
_AIR_PT = 4.0
# Lower than a picture alone: twenty fractions, two junctions and a week fit one page.
_PICTURE_PT = 118.0


def course_review(view: ReviewView, page_size: PageSize = "A4") -> bytes:
    """Return the review of one course as a PDF: one page, going on to a second when it is full.

    Raises:
        InputError: A name holds a character that the font cannot print.
    """
    furniture = Furniture(
        title="Course review",
        heading=view.heading,
        demo=view.heading.demo,
        notes=(view.caution, view.dose.caution, RECORD_CAUTION),
        marks=(("Ledger head", view.ledger_head), ("Printed", view.printed_at)),
    )
    return build_pdf(furniture, partial(_story, view), page_size)


def _story(view: ReviewView, width: float) -> list[Flowable]:
    return [
        _exceptions(view, width),
        space(6),
        _given(view, width),
        space(6),
        *fraction_grid(view, width),
        space(4),
        *match_profiles(view.dose, width, picture_pt=_PICTURE_PT),
        space(4),
        _sign_off(width),
    ]


def _exceptions(view: ReviewView, width: float) -> Table:
    lines: list[Flowable] = [para(safe("EXCEPTIONS"), style.LEAD)]
    lines += [para(strong(text)) for text in _findings(view)]
    lines += map(departure_line, view.departures)
    lines += [para(join(" ", [strong("Outstanding:"), safe(t)])) for t in view.week.outstanding]
    if len(lines) == 1:
        lines.append(para(safe("none")))
    box = ("BOX", (0, 0), (-1, -1), style.HEAVY_PT, "black")
    return grid([[lines]], [width], box, padding=(6, 4))


def _findings(view: ReviewView) -> list[str]:
    unequal = [
        f"Junction {side.junction}: the two sides have not been given the same."
        for side in view.sides
        if side.equal is False
    ]
    unseen = [str(row.fraction) for row in view.grid if is_delivered(row) and not row.verifier]
    if unseen:
        unequal.append(f"No verifier is named for fraction {', '.join(unseen)}.")
    return unequal


def _week(view: ReviewView, width: float) -> Table:
    """Return strip counts and what came since the last sign-off, in small print."""
    texts = (*strips_words(view.strips), "; ".join(week_words(view.week)))
    table = grid([[para(safe(text), style.SMALL)] for text in texts], [width], padding=(2, 0))
    table.hAlign = "LEFT"
    return table


def _given(view: ReviewView, width: float) -> Table:
    left, right = shares(width - _GUTTER_PT, 2, 3)
    cells = [
        [*_progress(view), space(3), _share_table(view.shares, left)],
        "",
        [_sides(view.sides, right), space(3), _week(view, right - _AIR_PT)],
    ]
    return grid(
        [cells],
        [left, _GUTTER_PT, right],
        ("VALIGN", (0, 0), (-1, -1), "TOP"),
        padding=(0, 0),
    )


def _progress(view: ReviewView) -> list[Flowable]:
    shift = view.next_shift
    coming = (
        f"fraction {shift.fraction}, to position {shift.position}, projected {shift.projected_date}"
        if shift
        else "none left in this course"
    )
    return [
        para(
            safe(f"{view.delivered_fractions} of {view.fractions} fractions delivered"), style.LEAD
        ),
        para(join(" ", [safe("Next shift:"), strong(coming)])),
    ]


def _share_table(lines: Sequence[ShareLine], width: float) -> Table:
    heads = ("Position", "planned", "so far", "delivered")
    rows: list[list[Any]] = [[para(safe(head), style.SMALL) for head in heads]]
    for line in lines:
        counts = (line.planned, line.planned_so_far, line.delivered)
        rows.append(
            [para(strong(line.position)), *(para(safe(figure(count, least=0))) for count in counts)]
        )
    return _ruled(rows, shares(width, 4, 4, 4, 4))


def _sides(lines: Sequence[SidesLine], width: float) -> Table:
    heads = ("Junction", "superior side, Gy", "inferior side, Gy", "equal")
    rows: list[list[Any]] = [[para(safe(head), style.SMALL) for head in heads]]
    rows += [
        [
            para(strong(line.junction)),
            _side(line.superior_field, line.superior_gy),
            _side(line.inferior_field, line.inferior_gy),
            para(_equal(line.equal)),
        ]
        for line in lines
    ]
    return _ruled(rows, shares(width, 8, 10, 10, 4))


def _equal(equal: bool | None) -> Markup:  # noqa: FBT001 - None is the third answer
    if equal is None:
        return safe("earlier course")
    return safe("yes") if equal else strong("NO")


def _side(field: str, dose_gy: float) -> Flowable:
    return para(join(" ", [strong(f"{dose_gy:.2f}"), safe(field)]))


def _ruled(rows: list[list[Any]], widths: list[float]) -> Table:
    rule = ("LINEABOVE", (0, 1), (-1, -1), style.HAIR_PT, "black")
    return grid(rows, widths, rule, padding=(2, 1))


def _sign_off(width: float) -> Table:
    left, right = shares(width - _GUTTER_PT, 1, 1)
    cells = [
        lines_to_fill(left, "Decision and reason", f"Physicist: {SIGNED}"),
        "",
        lines_to_fill(right, "Open actions, by whom and when", f"Physician: {SIGNED}"),
    ]
    return grid([cells], [left, _GUTTER_PT, right], padding=(0, 0))
