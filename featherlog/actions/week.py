"""What a weekly review looks at: what changed since the last sign-off, and what is outstanding."""

from __future__ import annotations

from datetime import date, timedelta
from itertools import groupby, takewhile
from typing import TYPE_CHECKING

from featherlog.actions.entry_words import entry_words
from featherlog.actions.events import raised_risk
from featherlog.sequence.calendar import treatment_days
from featherlog.sequence.pattern import shift_fractions
from featherlog.store import ledger, queries
from featherlog.store.entry import Kind
from featherlog.views.review import (
    BreakLine,
    ChangeLine,
    PositionCheckLine,
    ReviewEvent,
    SignOffLine,
    WeekView,
)
from featherlog.words import PHYSICIAN, PHYSICIST, THERAPIST

if TYPE_CHECKING:
    from collections.abc import Iterator

    from featherlog.actions.desk import Desk
    from featherlog.actions.stored import Stored
    from featherlog.store.entry import Entry
    from featherlog.views.common import DepartureLine

_EVENTS = (
    Kind.RECORD_CORRECTED,
    Kind.FRACTION_MISSED,
    Kind.COURSE_PAUSED,
    Kind.COURSE_RELEASED,
    Kind.COURSE_ENDED,
    Kind.MACHINE_CHANGED,
    Kind.TABLE_READ,
    Kind.MARKS_REDRAWN,
    Kind.IMAGER_OUT,
    Kind.IMAGER_BACK,
    Kind.PHYSICS_PRESENT,
)
_ROLES = (PHYSICIST, PHYSICIAN, THERAPIST)
_MUST_SIGN = (PHYSICIST, PHYSICIAN)


def week_view(desk: Desk, stored: Stored, departures: tuple[DepartureLine, ...]) -> WeekView:
    """Return what a course's weekly review looks at beside the sums."""
    entries = tuple(ledger.entries(desk.connection, stored.row.key))
    reviews = [entry for entry in entries if entry.kind == Kind.REVIEW_SIGNED]
    last = reviews[-1] if reviews else None
    told = [entry for entry in entries if entry.kind != Kind.REVIEW_SIGNED]
    new = [entry for entry in told if last is None or entry.number > last.number]
    checks, sign_offs = _position_checks(stored, entries), _sign_offs(reviews, told)
    return WeekView(
        since=last.at if last else "",
        changes=tuple(_changes(new)),
        events=tuple(_event(entry) for entry in new if entry.kind in _EVENTS),
        image_shifts=tuple(_event(entry) for entry in new if entry.kind == Kind.IMAGE_SHIFT),
        late_fractions=tuple(sorted({row.fraction for row in stored.deliveries if row.late})),
        breaks=tuple(_breaks(stored, desk.now.date())),
        position_checks=checks,
        sign_offs=sign_offs,
        outstanding=(
            *_undecided(departures),
            *_unchecked(checks),
            *_unattended(desk, stored, entries),
            *_open_states(desk, stored),
            *_unsigned(sign_offs),
        ),
        reviewed_to=entries[-1].number,
    )


def _changes(entries: list[Entry]) -> Iterator[ChangeLine]:
    order = list(dict.fromkeys(entry.kind for entry in entries))
    for kind, same in groupby(
        sorted(entries, key=lambda entry: order.index(entry.kind)), key=lambda entry: entry.kind
    ):
        words = tuple(entry_words(entry) for entry in same)
        yield ChangeLine(kind, len(words), words)


def _event(entry: Entry) -> ReviewEvent:
    number = entry.content.get("fraction")
    return ReviewEvent(entry.number, entry.at, entry.kind, entry.who, number, entry_words(entry))


def _breaks(stored: Stored, today: date) -> Iterator[BreakLine]:
    """Yield runs of treatment days without a fraction, from the first one treated until now."""
    treated = {date.fromisoformat(row.at[:10]) for row in stored.deliveries}
    if not treated:
        return
    over = stored.row.state == "complete"
    end = max(treated) if over else max(*treated, today - timedelta(days=1))
    days = takewhile(lambda day: day <= end, treatment_days(stored.course.sequence, min(treated)))
    for missed, run in groupby(days, key=lambda day: day not in treated):
        if missed:
            first, *others = run
            last = others[-1] if others else first
            yield BreakLine(first.isoformat(), last.isoformat(), 1 + len(others))


def _position_checks(stored: Stored, entries: tuple[Entry, ...]) -> tuple[PositionCheckLine, ...]:
    """Return the positions that the course was shifted to; where it began is no shift."""
    checked = {
        entry.content["position"]: entry for entry in entries if entry.kind == Kind.POSITION_CHECKED
    }
    first: dict[str, int] = {}
    for row in stored.deliveries:
        if row.meterset_mu > 0:
            first.setdefault(row.position, row.fraction)
    return tuple(
        PositionCheckLine(
            label,
            number,
            checked[label].who if label in checked else "",
            checked[label].at if label in checked else "",
        )
        for label, number in list(first.items())[1:]
    )


def _sign_offs(reviews: list[Entry], told: list[Entry]) -> tuple[SignOffLine, ...]:
    lines = []
    for role in _ROLES:
        last = next((entry for entry in reversed(reviews) if entry.role == role), None)
        since = sum(last is None or entry.number > last.number for entry in told)
        lines.append(SignOffLine(role, last.who if last else "", last.at if last else "", since))
    return tuple(lines)


def _undecided(departures: tuple[DepartureLine, ...]) -> Iterator[str]:
    numbers = sorted(line.number for line in departures if line.undecided)
    if numbers:
        which = ", ".join(map(str, numbers))
        yield f"departure{'s' if len(numbers) > 1 else ''} {which}: no decision is signed"


def _unchecked(checks: tuple[PositionCheckLine, ...]) -> Iterator[str]:
    for check in checks:
        if not check.checked_by:
            yield (
                f"position {check.position} was first treated in fraction {check.first_fraction}: "
                "physics check outstanding"
            )


def _unattended(desk: Desk, stored: Stored, entries: tuple[Entry, ...]) -> Iterator[str]:
    if not desk.policy.physics_presence_at_shifts:
        return
    present = {
        entry.content.get("fraction") for entry in entries if entry.kind == Kind.PHYSICS_PRESENT
    }
    for number in shift_fractions(stored.plan.fractions):
        if number in stored.states and number not in present:
            yield f"fraction {number} was a shift: no physicist's presence is on record"


def _open_states(desk: Desk, stored: Stored) -> Iterator[str]:
    if stored.row.paused_reason:
        yield f"the course is paused: {stored.row.paused_reason}"
    events = queries.events(desk.connection, stored.row.key)
    yield from (f"raised risk: {risk}" for risk in raised_risk(events))
    for state in stored.states.values():
        if not state.complete:
            yield f"fraction {state.number} was begun and is not finished"


def _unsigned(sign_offs: tuple[SignOffLine, ...]) -> Iterator[str]:
    for line in sign_offs:
        if line.role in _MUST_SIGN and line.entries_since:
            since = f"since {line.at[:10]}" if line.at else "and no earlier one"
            entries = "1 entry" if line.entries_since == 1 else f"{line.entries_since} entries"
            yield f"sign-off by a {line.role}: {entries} {since}"
