"""Treatment days. Fraction numbers rule; every date after today is a projection."""

from __future__ import annotations

from datetime import date, timedelta
from itertools import count, islice
from typing import TYPE_CHECKING

from featherlog.junction.design import Weekday

if TYPE_CHECKING:
    from collections.abc import Iterator
    from datetime import datetime

    from featherlog.junction.design import SequencePattern

_WEEKDAYS = tuple(Weekday)


def is_treatment_day(sequence: SequencePattern, day: date) -> bool:
    """Tell whether the course is treated on that day: a chosen weekday, open and no holiday."""
    closed = day in sequence.closed_dates or day in sequence.holidays
    return _WEEKDAYS[day.weekday()] in sequence.weekdays and not closed


def treatment_days(sequence: SequencePattern, start: date) -> Iterator[date]:
    """Yield treatment days from ``start`` on, without end."""
    return (
        day
        for day in (start + timedelta(days=n) for n in count())
        if is_treatment_day(sequence, day)
    )


def project_dates(
    sequence: SequencePattern, fractions: int, fractions_a_day: int, start: date
) -> tuple[date, ...]:
    """Return the projected date of each of the next ``fractions``, the first on or after start."""
    days = islice(treatment_days(sequence, start), -(-fractions // fractions_a_day))
    return tuple(day for day in days for _ in range(fractions_a_day))[:fractions]


def too_soon(last_at: datetime, now: datetime, hours: float) -> float | None:
    """Return the hours between two fractions, whichever came first, where they are too few.

    None where at least ``hours`` lie between them. Both times bear their offset.
    """
    between = abs((now - last_at).total_seconds()) / 3600
    return between if between < hours else None


def next_date(
    sequence: SequencePattern, fractions_a_day: int, treated_on: date, treated_that_day: int
) -> date:
    """Return the projected date of the fraction after one delivered on ``treated_on``."""
    if treated_that_day < fractions_a_day:
        return treated_on
    return next(treatment_days(sequence, treated_on + timedelta(days=1)))


def next_date_after(
    sequence: SequencePattern, fractions_a_day: int, today: date, treated_today: int
) -> date:
    """Return the projected date of the next fraction, which is never before today.

    A day on which treatment has begun is good for as many fractions as the course has a day.
    """
    if treated_today:
        return next_date(sequence, fractions_a_day, today, treated_today)
    return next(treatment_days(sequence, max(today, sequence.start_date)))
