"""The chart round's screen of one course."""

from __future__ import annotations

from typing import TYPE_CHECKING

from featherlog import words
from featherlog.cli.output import rule, table, wrapped
from featherlog.cli.show_day import heading_lines
from featherlog.cli.show_dose import dose_lines
from featherlog.views.review_words import (
    STATUS,
    departure_notes,
    side_words,
    strips_words,
    week_words,
)

if TYPE_CHECKING:
    from collections.abc import Iterable, Iterator

    from featherlog.views.common import DepartureLine
    from featherlog.views.review import GridRow, ReviewView, ShareLine


def review_text(view: ReviewView) -> str:
    """Return the review screen: exceptions first."""
    return "\n".join(_review(view))


def departures_text(lines: Iterable[DepartureLine]) -> str:
    """Return a list of departures with their figures, those without a decision marked."""
    return "\n".join(text for line in lines for text in _departure(line)) or "No departures."


def _departure(line: DepartureLine) -> Iterator[str]:
    yield wrapped(
        f"{line.number}. {STATUS[line.status]}  fraction {line.fraction}, {line.kind} "
        f"({line.grade}): {line.detail}. "
        f"{'Reason: ' + line.reason if line.reason else 'No reason given yet.'}"
    )
    yield from (wrapped(note, "   ") for note in departure_notes(line))


def _review(view: ReviewView) -> Iterator[str]:
    yield from heading_lines(view.heading)
    yield f"{view.delivered_fractions} of {view.fractions} fractions delivered"
    yield rule()
    yield "Departures"
    yield departures_text(view.departures)
    yield "Outstanding"
    yield from (wrapped(f"- {text}") for text in view.week.outstanding or ("nothing",))
    yield rule()
    yield table(
        ("position", "planned", "planned so far", "delivered"),
        [(line.position, *_counts(line)) for line in view.shares],
        numeric="planned|planned so far|delivered",
    )
    yield from (wrapped(side_words(side)) for side in view.sides)
    yield from map(wrapped, strips_words(view.strips))
    if view.next_shift:
        yield (
            f"Next shift: fraction {view.next_shift.fraction}, to position "
            f"{view.next_shift.position}, projected {view.next_shift.projected_date}"
        )
    yield rule()
    yield from map(wrapped, week_words(view.week))
    yield rule()
    yield from _grid(view.grid)
    yield rule()
    yield from dose_lines(view.dose)
    yield rule()
    yield f"ledger {view.ledger_head}   {view.printed_at}"
    yield wrapped(view.caution)


def _grid(rows: tuple[GridRow, ...]) -> Iterator[str]:
    fields = [cell.field for cell in rows[0].cells]
    yield "Position delivered to each field (percent of its meterset where not 100)"
    yield table(
        ("fraction", "planned", *fields, "delivered"),
        [
            (
                str(row.fraction),
                row.planned_position,
                *(_cell(cell.delivered_position, cell.delivered_percent) for cell in row.cells),
                row.delivered_at,
            )
            for row in rows
        ],
        numeric="fraction",
    )


def _cell(position: str, percent: float) -> str:
    if not position:
        return "-"
    return position if round(percent) == 100 else f"{position} {percent:.0f} %"  # noqa: PLR2004 - whole


def _counts(line: ShareLine) -> tuple[str, str, str]:
    return (
        words.figure(line.planned, 0),
        words.figure(line.planned_so_far, 0),
        words.figure(line.delivered, 0),
    )
