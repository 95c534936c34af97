"""What a delivery comes to: its beams, what differs, and where the course stands after it.

A new record and the correction of an old one are the same account, seen from another moment.
"""

from __future__ import annotations

from dataclasses import asdict, dataclass, field, replace
from datetime import datetime
from itertools import pairwise
from typing import TYPE_CHECKING, Any

from featherlog.actions.confirm import measured
from featherlog.actions.stored import delivered_beams
from featherlog.errors import InputError
from featherlog.sequence.calendar import next_date_after
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
from featherlog.sequence.progress import (
    DeliveredBeam,
    FractionState,
    Progress,
    due_in,
    fraction_states,
    progress,
)
from featherlog.sequence.shares import shares_to_be

if TYPE_CHECKING:
    from collections.abc import Iterable, Iterator, Mapping

    from featherlog.actions.desk import Desk
    from featherlog.actions.stored import Stored
    from featherlog.junction.plan import PositionSettings
    from featherlog.store.rows import DeliveryRow

# No beam of one fraction gives more: beyond it a figure is a slip, and the ledger keeps slips.
_MOST_MU = 20_000.0
# No table reads more, whatever its scale.
_FARTHEST_CM = 1000.0


@dataclass(frozen=True, slots=True)
class Delivery:
    """What the people at the console say was delivered.

    ``fraction`` None means the one that was due. ``position`` is where every field was treated,
    None when it was as confirmed; ``field_positions`` name fields that were elsewhere.
    ``metersets_mu`` holds the beams whose meterset differs from what was to be delivered.
    ``gaps_cm`` are measured gaps by junction or "junction:side" (+ gap). ``reason`` explains what
    differs and may be empty. ``again`` says that a complete fraction was delivered once more.
    ``treated_at`` is when it was treated, for a record that is made later; None for now.
    ``table_cm`` are longitudinal table readings by field.
    """

    fraction: int | None
    position: str | None
    field_positions: Mapping[str, str]
    metersets_mu: Mapping[str, float]
    gaps_cm: Mapping[str, float]
    reason: str
    again: bool = False
    treated_at: str | None = None
    table_cm: Mapping[str, float] = field(default_factory=dict)


@dataclass(frozen=True, slots=True)
class Occasion:
    """Which fraction was treated, when, and how things stood at that moment.

    ``before`` holds the course as it stood, ``later`` what was delivered afterwards. ``confirmed``
    is the position that was confirmed for it; ``halted`` is empty, paused or ended; ``again`` tells
    that the fraction was complete already.
    """

    fraction: int
    at: datetime
    before: Stored
    later: tuple[DeliveryRow, ...]
    confirmed: str | None
    approved: bool
    halted: str
    again: bool

    @property
    def due(self) -> Progress:
        """Return what was due: all of the fraction where it was complete already."""
        state = None if self.again else self.before.states.get(self.fraction)
        return due_in(self.before.plan, self.fraction, state, _percent(self.before))


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
    beams = _beams(occasion, delivery)
    earlier = [*delivered_beams(occasion.before.deliveries), *beams]
    later = delivered_beams(occasion.later)
    states = _states(occasion.before, [*earlier, *later])
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
    after = _after(occasion.before, _states(occasion.before, rows))
    return Account((), (), complete=False, after=after, next_date=_next_date(desk, occasion, after))


def content_of(
    occasion: Occasion, delivery: Delivery, account: Account, reasons: Mapping[str, str]
) -> dict[str, Any]:
    """Return an account as the ledger keeps it; ``reasons`` explain kinds of departure."""
    after = account.after
    gaps = measured(occasion.before, delivery.gaps_cm).items() if account.beams else ()
    return {
        "fraction": occasion.fraction,
        "beams": [_without(asdict(beam), "fraction") for beam in account.beams],
        "gaps": [{"junction": name, "side": side, "gap_cm": gap} for (name, side), gap in gaps],
        "tables": [
            {"field": name, "longitudinal_cm": reading}
            for name, reading in delivery.table_cm.items()
        ],
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


def with_deliveries(stored: Stored, rows: Iterable[DeliveryRow]) -> Stored:
    """Return the course as it stood with these deliveries alone."""
    kept = tuple(rows)
    states = _states(stored, delivered_beams(kept))
    now = progress(stored.plan, states, _percent(stored))
    return replace(stored, deliveries=kept, states=states, progress=now)


def moment_of(desk: Desk, text: str | None) -> datetime:
    """Return when it was treated: now, or a time that was told (ISO 8601, the department's own).

    Raises InputError for a text that is no date and time, or one that is still to come.
    """
    if text is None:
        return desk.now
    try:
        told = datetime.fromisoformat(text)
        at = (
            told.astimezone(desk.now.tzinfo)
            if told.tzinfo
            else told.replace(tzinfo=desk.now.tzinfo)
        )
    except (ValueError, OverflowError):
        at = None
    if at is None or not {"T", " "} & set(text.strip().upper()):
        raise InputError(
            f"--treated-at is {text!r}, but must be a date and time such as 2026-03-05T09:10"
        )
    if at > desk.now:
        raise InputError(f"--treated-at is {text!r}, which is still to come (now {desk.stamp})")
    return at


def last_number(stored: Stored) -> int:
    """Return the greatest number a record may bear: one more than was prescribed or recorded."""
    return max([stored.course.fractions, *stored.states]) + 1


def check_number(stored: Stored, number: int) -> int:
    """Return a fraction's number; InputError where the course cannot have it."""
    if not 1 <= number <= last_number(stored):
        raise InputError(f"--fraction is {number}, but must be 1 to {last_number(stored)}")
    return number


def _percent(stored: Stored) -> float:
    return stored.machine.tolerances.meterset_percent


def _states(stored: Stored, beams: list[DeliveredBeam]) -> dict[int, FractionState]:
    return fraction_states(stored.plan, beams, _percent(stored))


def _after(stored: Stored, states: dict[int, FractionState]) -> Progress:
    after = progress(stored.plan, states, _percent(stored))
    # A course that was ended stays ended, whatever is entered afterwards.
    return Progress(after.complete) if stored.row.ended_reason else after


def _beams(occasion: Occasion, delivery: Delivery) -> tuple[DeliveredBeam, ...]:
    stored, due, number = occasion.before, occasion.due, occasion.fraction
    treated = stored.plan.positions[0].treated
    everywhere = delivery.position or occasion.confirmed
    _check_names(stored, delivery, number, everywhere)
    rows = []
    for one in treated:
        label = delivery.field_positions.get(one.field, everywhere or "")
        settings = _settings(stored, label)
        for beam in one.beams:
            planned = settings.meterset(beam.beam)
            given = delivery.metersets_mu.get(beam.beam, due.due[beam.beam] * planned)
            rows.append(DeliveredBeam(number, one.field, beam.beam, label, given, planned))
    if not any(row.meterset_mu > 0 for row in rows):
        raise InputError("no beam has any MU, so there is nothing to record")
    return tuple(rows)


def _check_names(stored: Stored, delivery: Delivery, number: int, everywhere: str | None) -> None:
    treated = stored.plan.positions[0].treated
    fields = {one.field for one in treated}
    _known("--field-position", delivery.field_positions, fields, "field")
    if everywhere is None and set(delivery.field_positions) != fields:
        raise InputError(
            f"fraction {number} was not confirmed, so the record must say where it was treated: "
            "give --position"
        )
    _known(
        "--meterset", delivery.metersets_mu, {b.beam for one in treated for b in one.beams}, "beam"
    )
    for name, mu in delivery.metersets_mu.items():
        if not 0 <= mu <= _MOST_MU:
            raise InputError(f"--meterset {name}={mu:g} is outside 0 to {_MOST_MU:g} MU")
    _known("--table", delivery.table_cm, fields, "field")
    for name, reading in delivery.table_cm.items():
        if not abs(reading) <= _FARTHEST_CM:
            raise InputError(
                f"--table {name}={reading:g} is outside {-_FARTHEST_CM:g} to {_FARTHEST_CM:g} cm"
            )


def _settings(stored: Stored, label: str) -> PositionSettings:
    try:
        return stored.plan.position(label)
    except KeyError:
        labels = ", ".join(position.label for position in stored.plan.positions)
        raise InputError(
            f"there is no position {label!r} in this course; it has {labels}"
        ) from None


def _known(option: str, given: Mapping[str, object], allowed: set[str], what: str) -> None:
    for name in given:
        if name not in allowed:
            names = ", ".join(sorted(allowed))
            raise InputError(f"{option} names {what} {name!r}, but this course has {names}")


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
    state = _states(stored, [*delivered_beams(stored.deliveries), *beams])[occasion.fraction]
    parts = {beam: part / due.expected for beam, part in state.parts.items()}
    mu = {beam.beam: beam.planned_mu * due.expected for beam in beams}
    return meterset_departures(parts, mu, _percent(stored))


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
    return next_date_after(course.sequence, course.fractions_a_day, today, len(given)).isoformat()


def _without(values: dict[str, Any], key: str) -> dict[str, Any]:
    return {name: value for name, value in values.items() if name != key}
