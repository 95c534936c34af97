"""What else happens in a course: missed days, a pause, an early end, another machine."""

from __future__ import annotations

from dataclasses import replace
from datetime import date
from typing import TYPE_CHECKING

from featherlog.actions.machines import machine_named
from featherlog.actions.next_date import missed_days, projected_date
from featherlog.actions.signing import signing_desk
from featherlog.actions.stored import Stored, load
from featherlog.actions.typed import required
from featherlog.errors import InputError, RefusedError
from featherlog.policy import Act
from featherlog.sequence.calendar import is_treatment_day
from featherlog.store.entry import Kind

if TYPE_CHECKING:
    from featherlog.actions.desk import Desk, Signer


def miss(
    database: str | None,
    key: str,
    *,
    day: str | None,
    by: Signer,
    reason: str,
    verified_by: Signer | None = None,
) -> str:
    """Note a treatment day (ISO 8601; today when None) without treatment; return the next date.

    Fraction numbers and their positions stay; only dates move.

    Raises:
        InputError: no reason, or no date.
        RefusedError: nothing is due, or it was no treatment day of the course that was missed.
    """
    reason = required("--reason", reason, "why the day was missed")
    with signing_desk(database, Act.NOTE, by, verified_by) as desk:
        stored = _going_on(desk, key)
        on = _missed_day(desk, stored, day)
        following = _next_date(desk, stored, on.isoformat())
        desk.append(
            Kind.FRACTION_MISSED,
            {
                "date": on.isoformat(),
                "reason": reason,
                "fraction": stored.progress.next_fraction,
                "next_date": following,
            },
            course=key,
            meaning=f"There was no treatment on {on.isoformat()}",
        )
    return following


def pause(
    database: str | None, key: str, *, by: Signer, reason: str, verified_by: Signer | None = None
) -> None:
    """Stop a course until it is released.

    Raises InputError without a reason, RefusedError where nothing is due or it is paused already.
    """
    reason = required("--reason", reason, "why the course is paused")
    with signing_desk(database, Act.PAUSE, by, verified_by) as desk:
        stored = _going_on(desk, key)
        if stored.row.paused_reason:
            raise RefusedError(f"course {key} is paused already: {stored.row.paused_reason}")
        desk.append(
            Kind.COURSE_PAUSED, {"reason": reason}, course=key, meaning="This course must stop"
        )


def release(
    database: str | None, key: str, *, by: Signer, reason: str, verified_by: Signer | None = None
) -> str:
    """Let a paused course go on; return the date its next fraction is projected for.

    Raises InputError without a reason, RefusedError where it is not paused.
    """
    reason = required("--reason", reason, "why the course may go on")
    with signing_desk(database, Act.RELEASE, by, verified_by) as desk:
        stored = _going_on(desk, key)
        if not stored.row.paused_reason:
            raise RefusedError(f"course {key} is not paused")
        following = _next_date(desk, stored)
        desk.append(
            Kind.COURSE_RELEASED,
            {"reason": reason, "next_date": following},
            course=key,
            meaning="This course may go on",
        )
    return following


def end(
    database: str | None, key: str, *, by: Signer, reason: str, verified_by: Signer | None = None
) -> int:
    """End a course before its prescribed fractions are complete; return how many were.

    Raises InputError without a reason, RefusedError where nothing is due any more.
    """
    reason = required("--reason", reason, "why the course ends early")
    with signing_desk(database, Act.END, by, verified_by) as desk:
        stored = _going_on(desk, key)
        desk.append(
            Kind.COURSE_ENDED,
            {"reason": reason, "fractions_complete": stored.progress.complete},
            course=key,
            meaning=f"This course ends after {stored.progress.complete} complete fractions",
        )
    return stored.progress.complete


def change_machine(
    database: str | None,
    key: str,
    name: str,
    *,
    by: Signer,
    reason: str,
    verified_by: Signer | None = None,
) -> None:
    """Move a course to a machine like the one it was planned for.

    Raises:
        InputError: no reason.
        NotFoundError: there is no such machine.
        RefusedError: it differs in more than its name, it is the present one, or nothing is due.
    """
    reason = required("--reason", reason, "why the machine changes")
    with signing_desk(database, Act.CHANGE_MACHINE, by, verified_by) as desk:
        stored = _going_on(desk, key)
        other = machine_named(desk, name)
        if name == stored.row.machine:
            raise RefusedError(f"course {key} is on {name} already")
        if replace(other, name=stored.machine.name) != stored.machine:
            raise RefusedError(
                f"{name} differs from {stored.machine.name}, for which course {key} was planned, "
                "in more than its name; revise the design for it with `featherlog course prepare`"
            )
        desk.append(
            Kind.MACHINE_CHANGED,
            {"machine": name, "was": stored.row.machine, "reason": reason},
            course=key,
            meaning=f"This course goes on at {name}",
        )


def _going_on(desk: Desk, key: str) -> Stored:
    stored = load(desk, key)
    row = stored.row
    if row.ended_reason:
        raise RefusedError(f"course {key} was ended: {row.ended_reason}")
    if not stored.approved:
        raise RefusedError(f"course {key} has no approved design")
    if stored.progress.next_fraction is None:
        raise RefusedError(f"all {stored.course.fractions} fractions of course {key} are complete")
    return stored


def _missed_day(desk: Desk, stored: Stored, text: str | None) -> date:
    key, today = stored.row.key, desk.now.date()
    day = _date(text) if text else today
    given = {row.fraction for row in stored.deliveries if row.at[:10] == day.isoformat()}
    if day > today:
        raise RefusedError(f"{day} is still to come (today is {today})")
    if day < stored.course.sequence.start_date or not is_treatment_day(stored.course.sequence, day):
        raise RefusedError(f"{day} is no treatment day of course {key}")
    if len(given) >= stored.course.fractions_a_day:
        raise RefusedError(f"course {key} was treated on {day}: fraction {max(given)}")
    if day.isoformat() in missed_days(desk, key):
        raise RefusedError(f"{day} is on record as missed already")
    return day


def _next_date(desk: Desk, stored: Stored, *missed: str) -> str:
    today = desk.now.date().isoformat()
    given = {row.fraction for row in stored.deliveries if row.at[:10] == today}
    return projected_date(desk, stored.course, given, missed)


def _date(text: str) -> date:
    try:
        return date.fromisoformat(text)
    except ValueError:
        raise InputError(f"--date is {text!r}, but must be a date such as 2026-03-02") from None
