"""The chart round's view of a course: was each fraction where it was planned, what adds up."""

from __future__ import annotations

from itertools import pairwise
from typing import TYPE_CHECKING

from featherlog import words
from featherlog.actions.desk import at_desk
from featherlog.actions.dose import stored_dose
from featherlog.actions.stored import departure_lines, load
from featherlog.actions.today import next_shift
from featherlog.dose.amounts import prescribed_dose_gy
from featherlog.sequence.departures import INCOHERENT
from featherlog.sequence.pattern import shares
from featherlog.store import ledger, queries
from featherlog.views.review import GridCell, GridRow, ReviewView, ShareLine, SidesLine

if TYPE_CHECKING:
    from featherlog.actions.stored import Stored
    from featherlog.sequence.progress import FractionState
    from featherlog.views.common import DepartureLine

# Sides of a junction count as equal within this dose, which rounding of metersets can make.
_EQUAL_GY = 0.005


def review(database: str | None, key: str) -> ReviewView:
    """Return what was delivered to a course, what it adds up to and what is open.

    Raises NotFoundError where there is no such course.
    """
    with at_desk(database) as desk:
        stored = load(desk, key)
        head = ledger.head(desk.connection)
        departures = departure_lines(queries.departures(desk.connection, key))
        return ReviewView(
            heading=stored.heading(demo=desk.demo),
            fractions=stored.course.fractions,
            delivered_fractions=stored.progress.complete,
            departures=tuple(sorted(departures, key=_most_serious_first)),
            shares=_shares(stored),
            sides=_sides(stored),
            grid=_grid(stored),
            next_shift=next_shift(stored),
            dose=stored_dose(stored, demo=desk.demo),
            ledger_head=f"{head.number}:{head.hash[:12]}" if head else "",
            printed_at=desk.stamp,
            caution=f"{words.CAUTION} {words.RECORD_CAUTION}",
        )


def _most_serious_first(line: DepartureLine) -> tuple[bool, bool, int]:
    return (bool(line.reason), line.grade != INCOHERENT, line.number)


def _shares(stored: Stored) -> tuple[ShareLine, ...]:
    """Fractions by position; a fraction whose fields were apart counts by its first field."""
    planned = [fraction.position for fraction in stored.plan.fractions]
    so_far = shares([planned[n - 1] for n in stored.states if n <= len(planned)])
    given = shares([state.began_at for state in stored.states.values()])
    return tuple(
        ShareLine(
            position.label,
            planned.count(position.label),
            so_far.get(position.label, 0),
            given.get(position.label, 0),
        )
        for position in stored.plan.positions
    )


def _sides(stored: Stored) -> tuple[SidesLine, ...]:
    given = {
        field.field: sum(
            prescribed_dose_gy(stored.plan, state.number) * state.parts[beam.beam] * beam.weight
            for state in stored.states.values()
            for beam in field.beams
        )
        for field in stored.plan.positions[0].fields
    }
    return tuple(
        SidesLine(
            junction.name,
            upper,
            given[upper],
            lower,
            given[lower],
            abs(given[upper] - given[lower]) <= _EQUAL_GY,
        )
        for junction, (upper, lower) in zip(stored.course.junctions, pairwise(given), strict=True)
    )


def _grid(stored: Stored) -> tuple[GridRow, ...]:
    numbers = sorted({fraction.number for fraction in stored.plan.fractions} | set(stored.states))
    return tuple(_grid_row(stored, number, stored.states.get(number)) for number in numbers)


def _grid_row(stored: Stored, number: int, state: FractionState | None) -> GridRow:
    rows = [row for row in stored.deliveries if row.fraction == number]
    planned = stored.plan.fraction(number).position if number <= stored.course.fractions else ""
    return GridRow(
        fraction=number,
        planned_position=planned,
        delivered_at=rows[-1].at if rows else "",
        performer=rows[-1].performer if rows else "",
        verifier=rows[-1].verifier if rows else "",
        cells=tuple(
            GridCell(
                field.field,
                state.field_position.get(field.field, "") if state else "",
                100 * sum(state.parts[b.beam] * b.weight for b in field.beams) if state else 0.0,
            )
            for field in stored.plan.positions[0].treated
        ),
    )
