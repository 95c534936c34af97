"""Where the junction is today, and what to set: one course, or the list of a day."""

from __future__ import annotations

from datetime import date
from typing import TYPE_CHECKING

from featherlog import words
from featherlog.actions.day_view import field_views, junction_views, page_code, standing
from featherlog.actions.desk import Desk, at_desk
from featherlog.actions.events import raised_risk
from featherlog.actions.stored import Stored, departure_lines, load
from featherlog.actions.table_reference import table_reference, targets_cm
from featherlog.errors import InputError, NotFoundError
from featherlog.sequence.calendar import project_dates
from featherlog.sequence.gate import unequal_sides
from featherlog.sequence.pattern import shift_fractions
from featherlog.sequence.progress import last_positions
from featherlog.store import ledger, queries
from featherlog.views.day import DayView, DueLine, DueList, NextShift

if TYPE_CHECKING:
    from collections.abc import Mapping

    from featherlog.sequence.progress import Progress
    from featherlog.store.rows import CourseRow


def today(database: str | None, key: str) -> DayView:
    """Return what to set for the next fraction of a course, or why to stop.

    Raises NotFoundError where there is no such course.
    """
    with at_desk(database) as desk:
        return day_view(desk, load(desk, key))


def due_list(database: str | None, *, day: str | None, machine: str | None) -> DueList:
    """Return the courses due on a date (ISO 8601; today when None), on one machine or all.

    Raises InputError for a date that is not one, NotFoundError for an unknown machine.
    """
    with at_desk(database) as desk:
        if machine is not None and queries.machine_content(desk.connection, machine) is None:
            raise NotFoundError(f"there is no machine {machine!r}; see `featherlog machine list`")
        on = _date(day) if day else desk.now.date()
        rows = [row for row in queries.due(desk.connection, machine) if _is_due(row, on)]
        lines = tuple(_due_line(desk, load(desk, row.key), on) for row in rows)
        return DueList(on.isoformat(), machine or "", lines, desk.demo, words.CAUTION)


def day_view(desk: Desk, stored: Stored) -> DayView:
    """Return the view of a course's next fraction."""
    departures = [
        row for row in queries.departures(desk.connection, stored.row.key) if row.status == "open"
    ]
    head = ledger.head(desk.connection)
    events = queries.events(desk.connection, stored.row.key)
    reference = table_reference(events, stored.revision.number)
    number = stored.progress.next_fraction or stored.plan.fractions[-1].number
    position = stored.progress.position or ""
    planned = stored.plan.fraction(number)
    reasons = stop_reasons(stored)
    now = stored.plan.position(position) if position else None
    labels = last_positions(stored.plan, stored.states, stored.progress)
    before = standing(stored.plan, labels, stored.progress.begun_at)
    state = stored.states.get(number)
    return DayView(
        heading=stored.heading(demo=desk.demo),
        status=_status(stored, reasons),
        stop_reasons=reasons,
        fraction=number,
        fractions=stored.course.fractions,
        step=stored.progress.step,
        steps=stored.progress.steps,
        phase=planned.phase,
        dose_gy=planned.dose_gy,
        projected_date=stored.row.next_date or "",
        position=position,
        previous_position=_stood(labels),
        shift=shift_of(labels, position),
        shift_words=_shift_words(labels, stored.progress),
        part_delivered=stored.progress.part_delivered,
        junctions=junction_views(stored.course, now, before) if now else (),
        fields=field_views(
            now,
            before,
            stored.progress,
            state.parts if state else {},
            stored.machine.display,
            targets_cm=targets_cm(stored.plan, reference.reading, now),
        )
        if now
        else (),
        table_reference=reference.words,
        open_departures=departure_lines(departures),
        next_shift=next_shift(stored, desk.now.date()),
        page_code=page_code(
            stored.revision.code, stored.progress.next_fraction, stored.row.state_hash
        ),
        ledger_head=f"{head.number}:{head.hash[:12]}" if head else "",
        printed_at=desk.stamp,
        caution=words.CAUTION,
        call=words.stop_and_call(words.PHYSICIST, desk.policy.contacts.physicist)
        if reasons
        else "",
        raised_risk=raised_risk(events),
    )


def _status(stored: Stored, reasons: tuple[str, ...]) -> str:
    if reasons:
        return "stop"
    return "complete" if stored.progress.next_fraction is None else "ready"


def stop_reasons(stored: Stored) -> tuple[str, ...]:
    """Return why the next fraction may not be treated as things stand; empty when it may."""
    return _course_stops(stored) or _fraction_stops(stored)


def _course_stops(stored: Stored) -> tuple[str, ...]:
    row, revision = stored.row, stored.revision
    if not stored.approved:
        return (f"revision {revision.number} of this design is {revision.state}, not approved",)
    if row.ended_reason:
        return (f"the course was ended: {row.ended_reason}",)
    return (f"the course is paused: {row.paused_reason}",) if row.paused_reason else ()


def _fraction_stops(stored: Stored) -> tuple[str, ...]:
    due = stored.progress
    if len(set(due.begun_at.values())) > 1:
        apart = _each(due.begun_at)
        return (f"fraction {due.next_fraction} was begun with its fields apart ({apart})",)
    if due.next_fraction is None or due.part_delivered:
        return ()
    labels = last_positions(stored.plan, stored.states, due)
    if shift_of(labels, due.position or "") != "yes":
        return ()
    percent = stored.machine.tolerances.meterset_percent
    return unequal_sides(stored.plan, stored.states, due.next_fraction, percent)


def shift_of(last: Mapping[str, str], position: str) -> str:
    """Return ``first``, ``yes`` or ``no``: whether any field moves for this step.

    ``last`` is where each field stands, empty before the first fraction.
    """
    if not last:
        return "first"
    return "no" if set(last.values()) == {position} else "yes"


def _stood(last: Mapping[str, str]) -> str | None:
    """Return where the fields stood: one label, or each field's where they stood apart."""
    if not last:
        return None
    return next(iter(last.values())) if len(set(last.values())) == 1 else _each(last)


def _each(positions: Mapping[str, str]) -> str:
    return ", ".join(f"{field} at {label}" for field, label in positions.items())


def _shift_words(last: Mapping[str, str], due: Progress) -> str:
    position, number = due.position, due.next_fraction
    if position is None or number is None:
        return "No fraction is left to treat."
    if due.part_delivered:
        begun = f" ({', '.join(due.begun_at)}): what was begun stays there."
        stays = set(due.begun_at.values()) == {position}
        rest = begun if stays else ": what remains belongs there."
        return f"Fraction {number} was begun at {position}{rest}"
    if not last:
        return f"First fraction: set position {position}."
    earlier = f"fraction {number - 1}" if due.step == 1 else f"step {due.step - 1}"
    if len(set(last.values())) > 1:
        return f"Shift to {position}: after {earlier} the fields stood apart ({_each(last)})."
    before = next(iter(last.values()))
    if before == position:
        return f"No shift: position {position}, as in {earlier}."
    return f"Shift: from position {before} to position {position}, after {earlier}."


def next_shift(stored: Stored, today: date) -> NextShift | None:
    """Return the next fraction after the one due whose position differs; None when there is none.

    Its date is projected from the date of the fraction due, or from today where that has passed.
    """
    due, on = stored.progress.next_fraction, stored.row.next_date
    later = [n for n in shift_fractions(stored.plan.fractions) if due and n > due]
    if not later or due is None or on is None:
        return None
    number = later[0]
    dates = project_dates(
        stored.course.sequence,
        number - due + 1,
        stored.course.fractions_a_day,
        max(date.fromisoformat(on), today),
    )
    return NextShift(number, stored.plan.fraction(number).position, dates[-1].isoformat())


def _is_due(row: CourseRow, on: date) -> bool:
    return row.next_date is not None and date.fromisoformat(row.next_date) <= on


def _due_line(desk: Desk, stored: Stored, on: date) -> DueLine:
    row, progress = stored.row, stored.progress
    position, number = progress.position or "", progress.next_fraction or 0
    last = last_positions(stored.plan, stored.states, progress)
    due = row.next_date or ""
    attention = [f"{row.open_departures} open departure(s)"] if row.open_departures else []
    if progress.part_delivered:
        attention.append(f"fraction {number} part delivered: finish it at {position}")
    if stop_reasons(stored):
        attention.insert(0, "STOP: see this course")
    attention += raised_risk(queries.events(desk.connection, row.key))
    return DueLine(
        course=row.key,
        patient_name=row.patient_name,
        machine=row.machine,
        fraction=number,
        fractions=row.fractions,
        position=position,
        shift=shift_of(last, position),
        due="today" if due == on.isoformat() else f"since {due}",
        projected_date=due,
        attention="; ".join(attention),
    )


def _date(text: str) -> date:
    try:
        return date.fromisoformat(text)
    except ValueError:
        raise InputError(f"--date is {text!r}, but must be a date such as 2026-03-02") from None
