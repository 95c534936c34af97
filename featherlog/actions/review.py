"""The chart round's view of a course: was each fraction where it was planned, what adds up."""

from __future__ import annotations

from itertools import pairwise
from typing import TYPE_CHECKING

from featherlog import words
from featherlog.actions.departures import course_departures
from featherlog.actions.desk import at_desk
from featherlog.actions.dose import stored_dose
from featherlog.actions.stored import delivered_beams, load
from featherlog.actions.today import next_shift
from featherlog.actions.week import week_view
from featherlog.dose.amounts import delivered_amounts, earlier_amounts
from featherlog.sequence.pattern import weighted_shares
from featherlog.sequence.strips import strip_counts
from featherlog.store import ledger
from featherlog.views.review import (
    GridCell,
    GridRow,
    ReviewView,
    ShareLine,
    SidesLine,
    StripLine,
)

if TYPE_CHECKING:
    from featherlog.actions.stored import Stored
    from featherlog.dose.amounts import Amounts
    from featherlog.junction.plan import FieldSetting
    from featherlog.sequence.progress import FractionState

# Sides of a junction count as equal within this part of a fraction: metersets are rounded.
_EQUAL_FRACTIONS = 0.005


def review(database: str | None, key: str) -> ReviewView:
    """Return what was delivered to a course, what it adds up to and what is open.

    Raises NotFoundError where there is no such course.
    """
    with at_desk(database) as desk:
        stored = load(desk, key)
        head = ledger.head(desk.connection)
        departures = course_departures(desk, stored)
        return ReviewView(
            heading=stored.heading(demo=desk.demo),
            fractions=stored.course.fractions,
            delivered_fractions=stored.progress.complete,
            departures=departures,
            shares=_shares(stored),
            sides=_sides(stored),
            grid=_grid(stored),
            strips=_strips(stored),
            week=week_view(desk, stored, departures),
            next_shift=next_shift(stored, desk.now.date()),
            dose=stored_dose(stored, demo=desk.demo),
            ledger_head=f"{head.number}:{head.hash[:12]}" if head else "",
            printed_at=desk.stamp,
            caution=f"{words.CAUTION} {words.RECORD_CAUTION}",
        )


def _shares(stored: Stored) -> tuple[ShareLine, ...]:
    """Fractions by position; fields that were apart count by the part of the fields there."""
    planned = weighted_shares(stored.plan.fractions)
    so_far = weighted_shares([f for f in stored.plan.fractions if f.number in stored.states])
    given = _given(stored)
    return tuple(
        ShareLine(
            position.label,
            planned.get(position.label, 0.0),
            so_far.get(position.label, 0.0),
            given.get(position.label, 0.0),
        )
        for position in stored.plan.positions
    )


def _given(stored: Stored) -> dict[str, float]:
    """Return the fractions delivered at each position, each field counting for its part."""
    treated = stored.plan.positions[0].treated
    weight = {beam.beam: beam.weight / len(treated) for field in treated for beam in field.beams}
    found: dict[str, float] = {}
    for row in stored.deliveries:
        part = row.meterset_mu / row.planned_mu * weight[row.beam]
        found[row.position] = found.get(row.position, 0.0) + part
    return {label: round(count, 3) for label, count in found.items()}


def _sides(stored: Stored) -> tuple[SidesLine, ...]:
    return tuple(
        _side(stored, junction.name, upper, lower)
        for junction, (upper, lower) in zip(
            stored.course.junctions, pairwise(stored.plan.positions[0].fields), strict=True
        )
    )


def _side(stored: Stored, junction: str, upper: FieldSetting, lower: FieldSetting) -> SidesLine:
    above, below = _fractions(stored, upper), _fractions(stored, lower)
    return SidesLine(
        junction,
        upper.field,
        _dose_gy(stored, upper),
        above,
        lower.field,
        _dose_gy(stored, lower),
        below,
        None
        if above is None or below is None
        else abs(above - below) <= _EQUAL_FRACTIONS and _in_step(stored, upper.field, lower.field),
    )


def _fractions(stored: Stored, field: FieldSetting) -> float | None:
    """Return how many fractions' worth of meterset a field has had; None where it was finished."""
    if field.earlier_course:
        return None
    states = stored.states.values()
    given = sum(state.parts[b.beam] * b.weight for state in states for b in field.beams)
    return round(given, 6)


def _dose_gy(stored: Stored, field: FieldSetting) -> float:
    beams = {setting.beam for setting in field.beams}
    return sum(gy for (_, beam), gy in _amounts(stored).items() if beam in beams)


def _amounts(stored: Stored) -> Amounts:
    return earlier_amounts(stored.plan) | delivered_amounts(
        stored.plan, delivered_beams(stored.deliveries)
    )


def _in_step(stored: Stored, upper: str, lower: str) -> bool:
    """Tell whether both fields of a junction were at the same positions in every fraction."""
    return all(
        state.field_positions.get(upper) == state.field_positions.get(lower)
        for state in stored.states.values()
        if upper in state.field_positions and lower in state.field_positions
    )


def _strips(stored: Stored) -> tuple[StripLine, ...]:
    counted = strip_counts(stored.plan, delivered_beams(stored.deliveries))
    return tuple(
        StripLine(
            strip.junction,
            strip.low_cm,
            strip.high_cm,
            round(strip.expected, 3),
            round(strip.covered, 3),
        )
        for strip in counted
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
                "+".join(state.field_positions.get(field.field, ())) if state else "",
                100 * sum(state.parts[b.beam] * b.weight for b in field.beams) if state else 0.0,
            )
            for field in stored.plan.positions[0].treated
        ),
    )
