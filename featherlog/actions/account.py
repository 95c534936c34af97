"""What a delivery comes to: its beams, what differs, and where the course stands after it.

A new record and the correction of an old one are the same account, seen from another moment.
"""

from __future__ import annotations

from dataclasses import asdict, dataclass
from datetime import datetime
from itertools import pairwise
from typing import TYPE_CHECKING, Any

from featherlog.actions.confirm import measured
from featherlog.actions.delivered import beams_of, meterset_percent, states_of
from featherlog.actions.next_date import projected_date
from featherlog.actions.stored import delivered_beams
from featherlog.sequence.departures import (
    COHERENT,
    Departure,
    MeasuredGap,
    again_departures,
    beams_by_field,
    expected_gap_cm,
    gap_departures,
    halt_departures,
    interval_departures,
    meterset_departures,
    order_departures,
    position_departures,
    table_departures,
)
from featherlog.sequence.progress import DeliveredBeam, FractionState, Progress, progress
from featherlog.sequence.shares import shares_to_be

if TYPE_CHECKING:
    from collections.abc import Iterator, Mapping

    from featherlog.actions.delivered import Delivery, Occasion
    from featherlog.actions.desk import Desk
    from featherlog.actions.stored import Stored


@dataclass(frozen=True, slots=True)
class Account:
    """What a delivery comes to; ``complete`` tells of its fraction, ``after`` of the course."""

    beams: tuple[DeliveredBeam, ...]
    departures: tuple[Departure, ...]
    complete: bool
    after: Progress
    next_date: str | None


def account_of(desk: Desk, delivery: Delivery, occasion: Occasion) -> Account:
    """Return what a delivery comes to; InputError for what the course does not have."""
    beams = beams_of(occasion, delivery)
    earlier = [*delivered_beams(occasion.before.deliveries), *beams]
    later = delivered_beams(occasion.later)
    states = states_of(occasion.before, [*earlier, *later])
    after = _after(occasion.before, states)
    return Account(
        beams=beams,
        departures=tuple(_departures(desk, delivery, occasion, beams, [*earlier, *later])),
        complete=states[occasion.fraction].complete,
        after=after,
        next_date=_next_date(desk, occasion, after),
    )


def nothing_of(desk: Desk, occasion: Occasion) -> Account:
    """Return the account of a record that should not be there: nothing was delivered."""
    rows = [*delivered_beams(occasion.before.deliveries), *delivered_beams(occasion.later)]
    after = _after(occasion.before, states_of(occasion.before, rows))
    return Account((), (), complete=False, after=after, next_date=_next_date(desk, occasion, after))


def content_of(
    occasion: Occasion, delivery: Delivery, account: Account, reasons: Mapping[str, str]
) -> dict[str, Any]:
    """Return an account as the ledger keeps it; ``reasons`` explain kinds of departure."""
    after = account.after
    given = bool(account.beams)
    gaps = measured(occasion.before, delivery.gaps_cm).items() if given else ()
    tables = delivery.table_cm.items() if given else ()
    return {
        "fraction": occasion.fraction,
        "beams": [_without(asdict(beam), "fraction") for beam in account.beams],
        "gaps": [{"junction": name, "side": side, "gap_cm": gap} for (name, side), gap in gaps],
        "tables": [{"field": name, "longitudinal_cm": at} for name, at in tables],
        "departures": [
            {**asdict(departure), "reason": reasons.get(departure.kind, "")}
            for departure in account.departures
        ],
        "after": {
            "next_fraction": after.next_fraction,
            "next_position": after.position,
            "next_date": account.next_date,
            "part_delivered": after.part_delivered,
            "fractions_complete": after.complete,
            "complete": after.next_fraction is None,
        },
    }


def _after(stored: Stored, states: dict[int, FractionState]) -> Progress:
    after = progress(stored.plan, states, meterset_percent(stored))
    # A course that was ended stays ended, whatever is entered afterwards.
    return Progress(after.complete) if stored.row.ended_reason else after


def _departures(
    desk: Desk,
    delivery: Delivery,
    occasion: Occasion,
    beams: tuple[DeliveredBeam, ...],
    everything: list[DeliveredBeam],
) -> Iterator[Departure]:
    stored, number = occasion.before, occasion.fraction
    yield from order_departures(
        number,
        number if occasion.again else stored.progress.next_fraction,
        stored.course.fractions,
        confirmed=occasion.confirmed is not None,
        approved=occasion.approved,
    )
    yield from halt_departures(number, occasion.halted)
    where = _where(occasion, beams)
    yield from _place_departures(occasion, where, shares_to_be(stored.plan, everything))
    yield from again_departures(number, beams) if occasion.again else _meterset(occasion, beams)
    yield from gap_departures(_gaps(stored, where, delivery))
    yield from table_departures(
        stored.plan, delivery.table_cm, where, stored.machine.tolerances.table_cm
    )
    others = [
        (row.fraction, datetime.fromisoformat(row.at))
        for row in (*stored.deliveries, *occasion.later)
    ]
    hours = desk.policy.minimum_interval_hours
    yield from interval_departures(number, occasion.at, others, hours)


def _earlier(occasion: Occasion) -> dict[str, str]:
    """Return where the fields of a step that had begun were treated."""
    due, begun = occasion.due, occasion.before.states.get(occasion.fraction)
    here = {row.field for row in occasion.before.deliveries if row.beam in due.begun_beams}
    return {name: at for name, at in begun.last_position.items() if name in here} if begun else {}


def _where(occasion: Occasion, beams: tuple[DeliveredBeam, ...]) -> dict[str, str]:
    """Return where the fields of this step were treated by now."""
    return _earlier(occasion) | beams_by_field(beams)


def _place_departures(
    occasion: Occasion, where: dict[str, str], shares: Mapping[str, float]
) -> Iterator[Departure]:
    if where == _earlier(occasion):
        return  # the remainder went where the fraction began: that is on record
    stored = occasion.before
    beyond = occasion.again or occasion.fraction > stored.course.fractions
    for found in position_departures(stored.plan, occasion.due.position or "", where, shares):
        if not (beyond and found.grade == COHERENT):
            yield found


def _meterset(occasion: Occasion, beams: tuple[DeliveredBeam, ...]) -> tuple[Departure, ...]:
    """Return how the meterset differs, seen over the whole of a step once begun."""
    stored, due = occasion.before, occasion.due
    state = states_of(stored, [*delivered_beams(stored.deliveries), *beams])[occasion.fraction]
    parts = {beam: part / due.expected for beam, part in state.parts.items()}
    mu = {beam.beam: beam.planned_mu * due.expected for beam in beams}
    return meterset_departures(parts, mu, meterset_percent(stored))


def _gaps(stored: Stored, where: Mapping[str, str], delivery: Delivery) -> Iterator[MeasuredGap]:
    names = [one.field for one in stored.plan.positions[0].fields]
    sides = dict(zip((j.name for j in stored.course.junctions), pairwise(names), strict=True))
    tolerance = {j.name: j.gap_tolerance_cm for j in stored.course.junctions}
    for (name, side), gap in measured(stored, delivery.gaps_cm).items():
        # A field that was not treated stands where its neighbour does.
        known = [where[one] for one in sides[name] if one in where] or [*where.values()]
        expected = expected_gap_cm(stored.plan, name, side, known[0], known[-1])
        if expected is not None:
            yield MeasuredGap(name, side, gap, expected, tolerance[name])


def _next_date(desk: Desk, occasion: Occasion, after: Progress) -> str | None:
    if after.next_fraction is None:
        return None
    course, today = occasion.before.course, desk.now.date()
    rows = (*occasion.before.deliveries, *occasion.later)
    given = {row.fraction for row in rows if row.at[:10] == today.isoformat()}
    given |= {occasion.fraction} if occasion.at.date() == today else set()
    if after.next_fraction in given:
        return today.isoformat()  # what remains of a fraction is due the same day
    return projected_date(desk, course, given)


def _without(values: dict[str, Any], key: str) -> dict[str, Any]:
    return {name: value for name, value in values.items() if name != key}
