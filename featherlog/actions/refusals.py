"""Why a course may not be treated now: every reason before the beam, and whom to call about it."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import datetime
from typing import TYPE_CHECKING

from featherlog import words
from featherlog.actions.events import physics_present
from featherlog.actions.today import stop_reasons
from featherlog.sequence.calendar import too_soon
from featherlog.store import queries

if TYPE_CHECKING:
    from collections.abc import Iterable, Iterator

    from featherlog.actions.desk import Desk
    from featherlog.actions.stored import Stored
    from featherlog.policy import Contacts
    from featherlog.views.day import DayView


@dataclass(frozen=True, slots=True)
class Reason:
    """One reason to stop; ``call`` is the role of whoever is to be called."""

    text: str
    call: str = words.PHYSICIST


def refusal(reasons: Iterable[Reason], contacts: Contacts) -> str:
    """Return all reasons, each followed by whom to call: the department's own contact, if any."""
    called = {words.PHYSICIST: contacts.physicist, words.PHYSICIAN: contacts.physician}
    found = tuple(dict.fromkeys(reasons))
    groups = {role: [one.text for one in found if one.call == role] for role in called}
    return " ".join(
        f"{'; '.join(texts)}. {words.stop_and_call(role, called[role])}"
        for role, texts in groups.items()
        if texts
    )


def course_reasons(desk: Desk, stored: Stored, view: DayView) -> Iterator[Reason]:
    """Yield what about the course stands against treating its next fraction now."""
    if stored.progress.next_fraction is None:
        prescribed = f"all {view.fractions} prescribed fractions are complete"
        yield Reason(prescribed, words.PHYSICIAN)
        return
    ended = stored.row.ended_reason is not None
    for text in stop_reasons(stored):
        yield Reason(text, words.PHYSICIAN if ended else words.PHYSICIST)
    if ended:
        return
    yield from _unfinished(stored)
    yield from _a_day(desk, stored)
    yield from _interval(desk, stored)
    yield from _presence(desk, stored, view)


def _unfinished(stored: Stored) -> Iterator[Reason]:
    for number, state in stored.states.items():
        if number != stored.progress.next_fraction and not state.complete:
            yield Reason(f"fraction {number} was begun and not finished")


def _a_day(desk: Desk, stored: Stored) -> Iterator[Reason]:
    day, allowed = desk.now.date().isoformat(), stored.course.fractions_a_day
    given = {row.fraction for row in stored.deliveries if row.at[:10] == day}
    given -= {stored.progress.next_fraction}
    if len(given) >= allowed:
        numbers = " and ".join(str(number) for number in sorted(given))
        was = f"s {numbers} were" if len(given) > 1 else f" {numbers} was"
        yield Reason(f"fraction{was} delivered today already, and the course has {allowed} a day")


def _interval(desk: Desk, stored: Stored) -> Iterator[Reason]:
    hours = desk.policy.minimum_interval_hours
    latest = {row.fraction: row.at for row in stored.deliveries}
    for number, at in latest.items():
        between = too_soon(datetime.fromisoformat(at), desk.now, hours)
        if number != stored.progress.next_fraction and between is not None:
            yield Reason(
                f"only {_hours(between)} lie between fraction {number} ({at}) and now, at least "
                f"{words.figure(hours)} h are needed between two fractions"
            )


def _hours(hours: float) -> str:
    """Return hours and minutes, cut short: what is too little must not look like enough."""
    whole = int(hours)
    return f"{whole} h {int((hours - whole) * 60)} min"


def _presence(desk: Desk, stored: Stored, view: DayView) -> Iterator[Reason]:
    if not desk.policy.physics_presence_at_shifts or view.shift != "yes":
        return
    events = queries.events(desk.connection, stored.row.key)
    if not physics_present(events, view.fraction, desk.now.date()):
        yield Reason(
            f"a physicist has to be there at a shift and has not attested it today for fraction "
            f"{view.fraction} (`featherlog note physics-present`)"
        )
