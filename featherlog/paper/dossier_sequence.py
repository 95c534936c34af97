"""The sequence in the dossier: which fractions at which position, and a more even one."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from reportlab.platypus import KeepTogether

from featherlog.paper import style
from featherlog.paper.fonts import join, safe, strong
from featherlog.paper.layout import section, space
from featherlog.paper.style import grid, para, ruled
from featherlog.words import figure

if TYPE_CHECKING:
    from collections.abc import Sequence

    from reportlab.platypus import Flowable, Table

    from featherlog.junction.design import Course, SequencePattern
    from featherlog.views.solution import BlockLine, SolutionView

_GUTTER_PT = 12.0


def sequence(view: SolutionView, width: float) -> list[Flowable]:
    """Return the blocks with projected dates, shares, shift days and more even blocks."""
    course = view.course
    shares = ", ".join(f"{label} {figure(count, least=0)}" for label, count in view.shares)
    shifts = ", ".join(str(number) for number in view.shift_fractions) or "none"
    facts = (
        ("Pattern:", _pattern(course.sequence)),
        ("Treatment days:", _days(course)),
        ("Shares:", f"{shares} of {course.fractions} fractions"),
        ("Shift days:", f"{len(view.shift_fractions)} (fractions {shifts})"),
    )
    body: list[Flowable] = [
        *section("SEQUENCE"),
        *(para(join(" ", [strong(name), safe(text)])) for name, text in facts),
        space(3),
        _blocks(view.blocks, width),
    ]
    if view.more_even:
        title = para(strong("More even with as many shift days:"))
        body += [space(4), KeepTogether([title, _blocks(view.more_even, width)])]
    return body


def _pattern(rule: SequencePattern) -> str:
    facts = [rule.pattern.value]
    if rule.block_fractions is not None:
        facts.append(f"{rule.block_fractions} fractions to a block")
    if rule.block_dose_gy is not None:
        facts.append(f"at least {figure(rule.block_dose_gy)} Gy to a block")
    if rule.weights:
        parts = zip(rule.positions, rule.weights, strict=True)
        split = ", ".join(f"{label} {figure(weight, 2, 3)}" for label, weight in parts)
        facts.append(f"every fraction in parts {split}")
    if rule.restart_each_phase:
        facts.append("the order begins again with each phase")
    return "; ".join(facts)


def _days(course: Course) -> str:
    rule = course.sequence
    weekdays = ", ".join(day.value for day in rule.weekdays)
    facts = [f"{weekdays} from {rule.start_date.isoformat()}"]
    if rule.holiday_calendar:
        facts.append(f"without the public holidays of {rule.holiday_calendar}")
    if rule.closed_dates:
        closed = ", ".join(day.isoformat() for day in rule.closed_dates)
        facts.append(f"closed {closed}")
    return "; ".join(facts)


def _blocks(lines: Sequence[BlockLine], width: float) -> Table:
    long = any(line.first_date != line.last_date for line in lines)
    beside = 2 if long else 3
    column = (width - _GUTTER_PT * (beside - 1)) / beside
    deep = -(-len(lines) // beside)
    parts = [lines[at : at + deep] for at in range(0, len(lines), deep)]
    cells: list[Any] = []
    for part in parts:
        cells += [_block_table(part, column), ""]
    cells += [""] * (2 * beside - 1 - len(cells))
    widths = [column, _GUTTER_PT] * (beside - 1) + [column]
    top = ("VALIGN", (0, 0), (-1, -1), "TOP")
    return grid([cells[: len(widths)]], widths, top, padding=(0, 0))


def _block_table(lines: Sequence[BlockLine], width: float) -> Table:
    heads = ("Fractions", "Position", "projected")
    rows = [[safe(_numbers(line)), strong(line.position), safe(_dates(line))] for line in lines]
    return ruled(heads, rows, width, (26, 26, 48), body=style.SMALL)


def _numbers(line: BlockLine) -> str:
    first, last = line.first_fraction, line.last_fraction
    return str(first) if first == last else f"{first} to {last}"


def _dates(line: BlockLine) -> str:
    first, last = line.first_date, line.last_date
    return first if first == last else f"{first} to {last}"
