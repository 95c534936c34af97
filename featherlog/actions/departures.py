"""Departures of a course, the gravest first, with their figures, and the reasons given for them."""

from __future__ import annotations

import math
from dataclasses import replace
from datetime import date, timedelta
from typing import TYPE_CHECKING

from featherlog.actions.desk import Desk, Signer, at_desk
from featherlog.actions.signing import signing_desk
from featherlog.actions.stored import Stored, delivered_beams, departure_lines, load
from featherlog.actions.typed import required
from featherlog.dose.amounts import prescribed_dose_gy
from featherlog.dose.departure_dose import field_doses, given_in, strip_doses
from featherlog.errors import NotFoundError
from featherlog.policy import Act
from featherlog.sequence.calendar import is_treatment_day
from featherlog.store import queries
from featherlog.store.entry import Kind

if TYPE_CHECKING:
    from collections.abc import Iterator

    from featherlog.dose.departure_dose import PlaceDose
    from featherlog.policy import ReportingThresholds
    from featherlog.views.common import DepartureLine

_APART = "fields apart"
_WHOLE_FIELDS = ("extra fraction", "extra delivery", "meterset over", "meterset short")
# Kinds that are not named here stand before the last.
_SEVERITY = (
    _APART,
    "not to be treated",
    "not approved",
    "extra fraction",
    "extra delivery",
    "fraction order",
    "other position",
    "meterset over",
    "meterset short",
    "table",
    "skin gap",
    "interval too short",
)
_LEAST = "not confirmed"
# A figure at its threshold reaches it, whatever binary fractions make of it.
_NOISE = 1e-9


def list_departures(database: str | None, key: str) -> tuple[DepartureLine, ...]:
    """Return every departure of a course; NotFoundError where there is no course."""
    with at_desk(database) as desk:
        return course_departures(desk, load(desk, key))


def course_departures(desk: Desk, stored: Stored) -> tuple[DepartureLine, ...]:
    """Return every departure of a course with its figures, undecided ones and the gravest first."""
    lines = departure_lines(queries.departures(desk.connection, stored.row.key))
    thresholds = desk.policy.reporting_thresholds
    return tuple(sorted((_with_figures(stored, line, thresholds) for line in lines), key=_gravest))


def explain(
    database: str | None,
    key: str,
    number: int,
    *,
    by: Signer,
    reason: str,
    verified_by: Signer | None = None,
) -> None:
    """Give the reason for an open departure.

    Raises InputError without a reason, NotFoundError where there is no such open departure.
    """
    reason = required("--reason", reason, "why the departure happened")
    with signing_desk(database, Act.EXPLAIN, by, verified_by) as desk:
        load(desk, key)
        rows = queries.departures(desk.connection, key)
        if not any(row.number == number and row.status == "open" for row in rows):
            raise NotFoundError(f"course {key} has no open departure {number}")
        desk.append(
            Kind.DEPARTURE_EXPLAINED,
            {"departure": number, "reason": reason},
            course=key,
            meaning="I give the reason for this departure",
        )


def _gravest(line: DepartureLine) -> tuple[bool, int, bool, int]:
    kinds = (*_SEVERITY, "", _LEAST)
    rank = kinds.index(line.kind if line.kind in kinds else "")
    return (not line.undecided, rank, line.status != "open", line.number)


def _with_figures(
    stored: Stored, line: DepartureLine, thresholds: ReportingThresholds
) -> DepartureLine:
    rows = delivered_beams(stored.deliveries)
    # A corrected record's deliveries are no longer there to be measured.
    gone = line.status == "corrected" or line.fraction not in stored.states
    if gone or line.kind not in (_APART, *_WHOLE_FIELDS):
        return line
    week = _same_week(stored, line.fraction)
    given = given_in(stored.plan, rows, line.fraction, week)
    doses = (
        strip_doses(stored.plan, rows, line.fraction, given)
        if line.kind == _APART
        else field_doses(stored.plan, given)
    )
    return replace(line, doses=doses, flags=tuple(_flags(stored, line, doses, thresholds)))


def _flags(
    stored: Stored,
    line: DepartureLine,
    doses: tuple[PlaceDose, ...],
    thresholds: ReportingThresholds,
) -> Iterator[str]:
    """Yield a sentence for each reporting threshold that a departure reaches."""
    state = stored.states.get(line.fraction)
    # What is missing from an unfinished fraction is still to come.
    least = -math.inf if state and state.complete else 0.0
    week_gy = _week_gy(stored, line.fraction)
    limits = (
        ("the total", thresholds.total_percent, _total_percent),
        ("one fraction", thresholds.fraction_percent, _fraction_percent),
        ("one week's dose", thresholds.weekly_percent, lambda dose: 100 * dose.week_gy / week_gy),
    )
    for what, threshold, percent_of in limits:
        worst = max((abs(max(least, percent_of(dose))) for dose in doses), default=0.0)
        if threshold is not None and worst >= threshold - _NOISE:
            yield (
                f"{worst:.1f} %, beyond the department's reporting threshold of {threshold:g} % of "
                f"{what}: for a person's decision"
            )


def _total_percent(dose: PlaceDose) -> float:
    return dose.total_percent - 100


def _fraction_percent(dose: PlaceDose) -> float:
    return dose.fraction_percent - (100 if dose.fraction_planned_gy else 0)


def _week_gy(stored: Stored, fraction: int) -> float:
    """Return what a week of treatment gives, by the treatment days of the fraction's own week."""
    dose_gy = prescribed_dose_gy(stored.plan, fraction)
    return dose_gy * stored.course.fractions_a_day * len(_treatment_days(stored, fraction))


def _same_week(stored: Stored, fraction: int) -> set[int]:
    """Return the fractions treated in the calendar week in which a fraction was treated last."""
    day = _treated_on(stored, fraction)
    return {
        row.fraction
        for row in stored.deliveries
        if _day(row.at).isocalendar()[:2] == day.isocalendar()[:2]
    } | {fraction}


def _treatment_days(stored: Stored, fraction: int) -> list[date]:
    """Return the treatment days of the same week; its own day where it has none."""
    day = _treated_on(stored, fraction)
    monday = day - timedelta(days=day.weekday())
    days = [monday + timedelta(days=n) for n in range(7)]
    return [one for one in days if is_treatment_day(stored.course.sequence, one)] or [day]


def _treated_on(stored: Stored, fraction: int) -> date:
    return _day(max(row.at for row in stored.deliveries if row.fraction == fraction))


def _day(at: str) -> date:
    return date.fromisoformat(at[:10])
