from dataclasses import replace
from datetime import date, datetime, timedelta

import pytest
from spine_course import sequence

from featherlog.junction.design import Weekday
from featherlog.sequence.calendar import (
    is_treatment_day,
    next_date,
    next_date_after,
    project_dates,
    too_soon,
)

# 3 March 2031 is a Monday.
MONDAY, TUESDAY, FRIDAY, SATURDAY = (date(2031, 3, day) for day in (3, 4, 7, 8))
NEXT_MONDAY, NEXT_TUESDAY = date(2031, 3, 10), date(2031, 3, 11)


def test_a_treatment_day_is_a_chosen_weekday_that_is_not_closed() -> None:
    plain, closed = sequence(), sequence(closed_dates=(TUESDAY,))
    saturdays = sequence(weekdays=(Weekday.SATURDAY,))
    assert [is_treatment_day(plain, day) for day in (MONDAY, TUESDAY, SATURDAY)] == [
        True,
        True,
        False,
    ]
    assert not is_treatment_day(closed, TUESDAY)
    assert is_treatment_day(saturdays, SATURDAY)


def test_dates_skip_weekends_and_closures() -> None:
    order = sequence(closed_dates=(NEXT_MONDAY,))
    assert project_dates(order, 3, 1, FRIDAY) == (FRIDAY, NEXT_TUESDAY, date(2031, 3, 12))


def test_public_holidays_are_no_treatment_days() -> None:
    order = replace(sequence(closed_dates=(TUESDAY,)), holidays=(MONDAY, NEXT_MONDAY))
    assert not is_treatment_day(order, MONDAY)
    assert project_dates(order, 4, 1, MONDAY)[-2:] == (FRIDAY, NEXT_TUESDAY)
    assert next_date(order, 1, FRIDAY, 1) == NEXT_TUESDAY


def test_the_first_date_waits_for_a_treatment_day() -> None:
    assert project_dates(sequence(), 1, 1, SATURDAY) == (NEXT_MONDAY,)


def test_two_a_day() -> None:
    assert project_dates(sequence(), 3, 2, FRIDAY) == (FRIDAY, FRIDAY, NEXT_MONDAY)


@pytest.mark.parametrize(
    ("a_day", "treated_on", "treated", "expected"),
    [
        (1, MONDAY, 1, TUESDAY),
        (1, FRIDAY, 1, NEXT_MONDAY),
        (2, FRIDAY, 1, FRIDAY),
        (2, FRIDAY, 2, NEXT_MONDAY),
        (1, SATURDAY, 1, NEXT_MONDAY),
    ],
)
def test_the_date_after_a_fraction(
    a_day: int, treated_on: date, treated: int, expected: date
) -> None:
    assert next_date(sequence(), a_day, treated_on, treated) == expected


@pytest.mark.parametrize(
    ("today", "treated_today", "expected"),
    [
        (date(2031, 2, 27), 0, MONDAY),
        (FRIDAY, 0, FRIDAY),
        (FRIDAY, 1, NEXT_MONDAY),
        (SATURDAY, 0, NEXT_MONDAY),
    ],
)
def test_the_next_date_is_neither_past_nor_before_the_start(
    today: date, treated_today: int, expected: date
) -> None:
    assert next_date_after(sequence(), 1, today, treated_today) == expected


@pytest.mark.parametrize(
    ("hours", "too_few"), [(5.5, 5.5), (-5.5, 5.5), (6.0, None), (-6.0, None), (30.0, None)]
)
def test_hours_between_fractions_count_whichever_came_first(
    hours: float, too_few: float | None
) -> None:
    """Across the change to summer time as well: each time bears its own offset."""
    last = datetime.fromisoformat("2031-03-30T01:30:00+01:00")
    now = (last + timedelta(hours=hours)).astimezone(
        datetime.fromisoformat("2031-03-30T12:00:00+02:00").tzinfo
    )
    assert too_soon(last, now, 6.0) == too_few
