"""The top of the shift sheet: the day's answer in a heavy box, or the reason to stop."""

from __future__ import annotations

from typing import TYPE_CHECKING

from featherlog.paper import style
from featherlog.paper.fonts import safe, strong
from featherlog.paper.ink import label_width
from featherlog.paper.layout import space
from featherlog.paper.style import display, grid, para, shares
from featherlog.words import figure

if TYPE_CHECKING:
    from reportlab.platypus import Flowable, Table

    from featherlog.views.day import DayView

_ANSWERS = {
    "yes": "SHIFT TODAY: YES",
    "no": "SHIFT TODAY: NO",
    "first": "FIRST FRACTION",
}
_LARGEST_PT, _LEAST_PT = 64.0, 24.0
_BOX = ("BOX", (0, 0), (-1, -1), style.HEAVY_PT, "black")


def answer_box(view: DayView, width: float) -> Table:
    """Return the heavy box: position, shift today or not, and the fraction."""
    widths = shares(width, 21, 52, 27)
    cells = [
        [para(safe("POSITION"), style.SMALL), _letter(view.position, widths[0] - 8)],
        _shift(view, widths[1] - 8),
        _fraction(view),
    ]
    return grid(
        [cells],
        widths,
        _BOX,
        ("LINEAFTER", (0, 0), (-2, -1), style.RULE_PT, "black"),
        ("VALIGN", (0, 0), (-1, -1), "TOP"),
        padding=(4, 4),
    )


def _letter(position: str, width: float) -> Flowable:
    wide = label_width(position, bold=True, size=1)
    size = min(_LARGEST_PT, max(_LEAST_PT, width / max(wide, 0.1)))
    return para(safe(position), display(size, centred=True))


def _shift(view: DayView, width: float) -> list[Flowable]:
    moves = view.shift == "yes"
    # Black behind the answer on a shift day: the shape differs as well as the word.
    answer = grid(
        [[para(safe(_ANSWERS[view.shift]), display(24, inverse=moves))]],
        [width],
        *([("BACKGROUND", (0, 0), (-1, -1), "black")] if moves else []),
        padding=(4, 3),
    )
    lines: list[Flowable] = [answer]
    if moves and view.previous_position:
        lines.append(para(safe(f"{view.previous_position} → {view.position}"), display(18)))
    if view.shift_words:
        lines.append(para(safe(view.shift_words), style.BODY))
    if view.shift != "first":
        lines += [para(safe(junction.words), style.LEAD) for junction in view.junctions]
    return lines


def _fraction(view: DayView) -> list[Flowable]:
    lines: list[Flowable] = [
        para(safe("FRACTION"), style.SMALL),
        para(safe(f"{view.fraction} of {view.fractions}"), display(20)),
        *_step(view),
        para(safe(f"{view.phase} · {figure(view.dose_gy, least=1, most=3)} Gy")),
        para(safe(f"due {view.projected_date}")),
        space(3),
        para(safe("NEXT SHIFT"), style.SMALL),
    ]
    following = view.next_shift
    if following is None:
        return [*lines, para(strong("none left in this course"))]
    return [
        *lines,
        para(strong(f"fraction {following.fraction}, to position {following.position}")),
        para(safe(f"projected {following.projected_date}")),
    ]


def _step(view: DayView) -> list[Flowable]:
    if view.steps == 1:
        return []
    return [
        para(safe(f"STEP {view.step} of {view.steps}"), display(14)),
        para(safe("each step is set and treated at its own position"), style.SMALL),
    ]


def locked_banner(view: DayView, width: float) -> Table:
    """Return the warning of a fraction that was begun and not finished."""
    words = para(strong(f"PART-DELIVERED FRACTION: POSITION LOCKED AT {view.position}"), style.LEAD)
    rule = para(
        safe(
            f"{_what(view).capitalize()} must be finished at position {view.position}. "
            "Deliver only the remaining MU of each beam; a beam with 0 MU remaining is not treated."
        )
    )
    return grid([[[words, rule]]], [width], _BOX, padding=(6, 4))


def _what(view: DayView) -> str:
    whole = f"fraction {view.fraction}"
    return whole if view.steps == 1 else f"step {view.step} of {whole}"


def stop_page(view: DayView, width: float) -> list[Flowable]:
    """Return the body of a page that stops the day: reasons, and nothing that could be set."""
    stop = grid(
        [[para(safe("STOP"), display(96, inverse=True, centred=True))]],
        [width],
        ("BACKGROUND", (0, 0), (-1, -1), "black"),
        padding=(6, 22),
    )
    reasons = [[para(safe("■")), para(safe(reason), style.LEAD)] for reason in view.stop_reasons]
    body: list[Flowable] = [
        stop,
        space(14),
        para(safe(view.call), display(24)),
        space(8),
        para(safe(f"Fraction {view.fraction} of {view.fractions}"), display(16)),
        space(12),
        para(strong("Why:")),
    ]
    if reasons:
        body.append(
            grid(reasons, [14, width - 14], ("VALIGN", (0, 0), (-1, -1), "TOP"), padding=(0, 3))
        )
    body.append(space(10))
    body.append(
        para(safe("This page holds no settings. Print a new sheet once the matter is settled."))
    )
    return body


def complete_box(view: DayView, width: float) -> Table:
    """Return the box of a fraction in which nothing is left to treat."""
    lines = [
        para(safe("NOTHING LEFT TO TREAT"), display(26)),
        para(safe(f"Fraction {view.fraction} of {view.fractions} is complete."), display(14)),
    ]
    return grid([[lines]], [width], _BOX, padding=(8, 10))
