"""The sequence of a design file: which position when, and on which days."""

from __future__ import annotations

from typing import TYPE_CHECKING

from featherlog.exchange.kinds import choice, day, either, flag, letters, number, several, whole
from featherlog.exchange.public_holidays import read_holidays
from featherlog.exchange.quantities import COURSE_DOSE_GY
from featherlog.junction.design import Pattern, SequencePattern, Weekday

if TYPE_CHECKING:
    from datetime import date
    from typing import TypeVar

    from featherlog.exchange.kinds import Kind
    from featherlog.exchange.toml_fields import Table

    T = TypeVar("T")

_WORKING_WEEK = (
    Weekday.MONDAY,
    Weekday.TUESDAY,
    Weekday.WEDNESDAY,
    Weekday.THURSDAY,
    Weekday.FRIDAY,
)
_WEIGHTS = several(number("", 0, 1000, low_open=True), at_least=1)
_WITH_AN_ORDER = (Pattern.BLOCKS, Pattern.DAILY, Pattern.DOSE)


def read_sequence(table: Table, machine_closed: tuple[date, ...]) -> SequencePattern:
    """Read ``[sequence]``; the days on which the machine is closed count as the course's own."""
    pattern = table.take("pattern", choice(Pattern))
    start_date = table.take("start_date", day())
    calendar, holidays = read_holidays(table.table_or_none("holidays"), start_date.year)
    closed_dates = table.take_or("closed_dates", several(day()), ())
    return SequencePattern(
        pattern=pattern,
        positions=table.take("positions", several(letters(8), at_least=1)),
        block_fractions=_of_pattern(
            table, "block_fractions", whole(1, 100), pattern, Pattern.BLOCKS
        ),
        start_date=start_date,
        weekdays=table.take_or("weekdays", several(choice(Weekday), at_least=1), _WORKING_WEEK),
        closed_dates=tuple(sorted({*closed_dates, *machine_closed})),
        block_dose_gy=_of_pattern(table, "block_dose_gy", COURSE_DOSE_GY, pattern, Pattern.DOSE),
        weights=_of_pattern(table, "weights", _WEIGHTS, pattern, Pattern.SPLIT) or (),
        restart_each_phase=_restart(table, pattern),
        holiday_calendar=calendar,
        holidays=holidays,
    )


def _of_pattern(
    table: Table, key: str, kind: Kind[T], pattern: Pattern, owner: Pattern
) -> T | None:
    """Return a value that one pattern needs and no other may have."""
    if table.allows(key, when=pattern is owner, only_with=f'the pattern "{owner}"'):
        return table.take(key, kind)
    return None


def _restart(table: Table, pattern: Pattern) -> bool:
    owners = f"the pattern {either(_WITH_AN_ORDER)}"
    allowed = table.allows("restart_each_phase", when=pattern in _WITH_AN_ORDER, only_with=owners)
    return allowed and table.take_or("restart_each_phase", flag(), default=False)
