"""The projected date of the next fraction: a treatment day with room, not on record as missed."""

from __future__ import annotations

import json
from datetime import timedelta
from typing import TYPE_CHECKING

from featherlog.sequence.calendar import next_date_after
from featherlog.store import queries
from featherlog.store.entry import Kind

if TYPE_CHECKING:
    from collections.abc import Iterable

    from featherlog.actions.desk import Desk
    from featherlog.junction.design import Course


def missed_days(desk: Desk, key: str) -> set[str]:
    """Return the days (ISO 8601) on record as missed in a course."""
    return {
        json.loads(row.content)["date"]
        for row in queries.events(desk.connection, key)
        if row.kind == Kind.FRACTION_MISSED
    }


def projected_date(
    desk: Desk, course: Course, given_today: set[int], missed: Iterable[str] = ()
) -> str:
    """Return the first day from today on that has room for a fraction (ISO 8601).

    ``given_today`` are the fractions treated today; ``missed`` are days that join those on record.
    """
    day = desk.now.date()
    known = {*missed, *missed_days(desk, course.key)}
    while day.isoformat() in known:
        day += timedelta(days=1)
    given = len(given_today) if day == desk.now.date() else 0
    return next_date_after(course.sequence, course.fractions_a_day, day, given).isoformat()
