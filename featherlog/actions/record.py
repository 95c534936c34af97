"""What was delivered, after the beam: never refused when true; what differs is a departure."""

from __future__ import annotations

from dataclasses import asdict, dataclass
from typing import TYPE_CHECKING, Any

from featherlog.actions.confirm import measured
from featherlog.actions.signing import signing_desk
from featherlog.actions.stored import Stored, delivered_beams, load
from featherlog.actions.typed import printable
from featherlog.errors import InputError
from featherlog.policy import Act
from featherlog.sequence.calendar import next_date
from featherlog.sequence.departures import (
    Departure,
    MeasuredGap,
    beams_by_field,
    gap_departures,
    meterset_departures,
    order_departures,
    position_departures,
)
from featherlog.sequence.progress import (
    DeliveredBeam,
    FractionState,
    Progress,
    due_in,
    fraction_states,
    progress,
)
from featherlog.store import ledger, queries
from featherlog.store.entry import Kind

if TYPE_CHECKING:
    from collections.abc import Mapping

    from featherlog.actions.desk import Desk, Signer
    from featherlog.junction.plan import PositionSettings

# What may be written between the check and the record of a fraction without undoing the check.
_LEAVE_CONFIRMED = frozenset({Kind.FRACTION_CONFIRMED, Kind.DEPARTURE_EXPLAINED})
# No beam of one fraction gives more: beyond it a figure is a slip, and the ledger keeps slips.
_MOST_MU = 20_000.0


@dataclass(frozen=True, slots=True)
class Delivery:
    """What the people at the console say was delivered.

    ``fraction`` None means the one that was due. ``position`` is where every field was treated,
    None when it was as confirmed; ``field_positions`` name fields that were elsewhere.
    ``metersets_mu`` holds the beams whose meterset differs from what was to be delivered.
    ``gaps_cm`` are measured gaps by junction or "junction:side" (+ gap). ``reason`` explains what
    differs and may be empty.
    """

    fraction: int | None
    position: str | None
    field_positions: Mapping[str, str]
    metersets_mu: Mapping[str, float]
    gaps_cm: Mapping[str, float]
    reason: str


@dataclass(frozen=True, slots=True)
class Recorded:
    """What the record came to: the ledger entry, the fraction, and what differed."""

    entry: int
    fraction: int
    positions: tuple[tuple[str, str], ...]
    step: int
    steps: int
    step_complete: bool
    complete: bool
    departures: tuple[Departure, ...]
    explained: bool
    next_fraction: int | None
    next_position: str | None
    next_date: str | None


def record(
    database: str | None, key: str, *, by: Signer, verified_by: Signer, delivery: Delivery
) -> Recorded:
    """Record one fraction, or the part of one that was delivered.

    Raises:
        InputError: a field, beam, position or gap that the course does not have, a meterset that
            is not a number of MU, or no position for a fraction that was not confirmed.
        RefusedError: performer and verifier are not two qualified people.
    """
    reason = printable("--reason", delivery.reason)
    with signing_desk(database, Act.RECORD, by, verified_by) as desk:
        stored = load(desk, key)
        number = _fraction(stored, delivery.fraction)
        confirmed = _confirmed_position(desk, stored, number)
        due = due_in(
            stored.plan,
            number,
            stored.states.get(number),
            stored.machine.tolerances.meterset_percent,
        )
        beams = _beams(stored, due, delivery, confirmed)
        states = _states_after(stored, beams)
        departures = (
            *order_departures(
                number,
                stored.progress.next_fraction,
                stored.course.fractions,
                confirmed=confirmed is not None,
                approved=stored.approved,
            ),
            *_departures(stored, due, states[number], beams),
            *gap_departures(_gaps(stored, beams, delivery)),
        )
        after = progress(stored.plan, states, stored.machine.tolerances.meterset_percent)
        following = _next_date(desk, stored, after, number)
        entry = desk.append(
            Kind.FRACTION_RECORDED,
            {
                "fraction": number,
                "performer": by.name,
                "verifier": verified_by.name,
                "beams": [_without(asdict(beam), "fraction") for beam in beams],
                "gaps": [
                    {"junction": name, "side": side, "gap_cm": gap}
                    for (name, side), gap in measured(stored, delivery.gaps_cm).items()
                ],
                "departures": [{**asdict(departure), "reason": reason} for departure in departures],
                "after": {
                    "next_fraction": after.next_fraction,
                    "next_position": after.position,
                    "next_date": following,
                    "part_delivered": after.part_delivered,
                    "fractions_complete": after.complete,
                    "complete": after.next_fraction is None,
                },
            },
            course=key,
            meaning=f"We record fraction {number} as delivered",
        )
    return Recorded(
        entry=entry.number,
        fraction=number,
        positions=tuple(dict.fromkeys((beam.field, beam.position) for beam in beams)),
        step=due.step,
        steps=due.steps,
        step_complete=not (after.next_fraction == number and after.step == due.step),
        complete=states[number].complete,
        departures=departures,
        explained=bool(reason),
        next_fraction=after.next_fraction,
        next_position=after.position,
        next_date=following,
    )


def _fraction(stored: Stored, asked: int | None) -> int:
    # A fraction beyond the prescribed count is recorded all the same, under the next number.
    extra = max([stored.course.fractions, *stored.states]) + 1
    if asked is not None and not 1 <= asked <= extra:
        raise InputError(f"--fraction is {asked}, but must be 1 to {extra}")
    return asked or stored.progress.next_fraction or extra


def _confirmed_position(desk: Desk, stored: Stored, number: int) -> str | None:
    confirmations = queries.confirmations(desk.connection, stored.row.key, number)
    if not confirmations:
        return None
    last = confirmations[-1]
    entries = ledger.entries(desk.connection, stored.row.key)
    since = {entry.kind for entry in entries if entry.number > last.entry}
    return last.position if since <= _LEAVE_CONFIRMED else None


def _beams(
    stored: Stored, due: Progress, delivery: Delivery, confirmed: str | None
) -> tuple[DeliveredBeam, ...]:
    number = due.next_fraction or 0
    everywhere = delivery.position or confirmed
    fields = {field.field for field in stored.plan.positions[0].treated}
    _known("--field-position", delivery.field_positions, fields, "field")
    if everywhere is None and set(delivery.field_positions) != fields:
        raise InputError(
            f"fraction {number} was not confirmed, so the record must say where it was treated: "
            "give --position"
        )
    names = {beam.beam for field in stored.plan.positions[0].treated for beam in field.beams}
    _known("--meterset", delivery.metersets_mu, names, "beam")
    for name, mu in delivery.metersets_mu.items():
        if not 0 <= mu <= _MOST_MU:
            raise InputError(f"--meterset {name}={mu:g} is outside 0 to {_MOST_MU:g} MU")
    rows = []
    for field in stored.plan.positions[0].treated:
        label = delivery.field_positions.get(field.field, everywhere or "")
        settings = _settings(stored, label)
        for beam in field.beams:
            planned = settings.meterset(beam.beam)
            given = delivery.metersets_mu.get(beam.beam, due.due[beam.beam] * planned)
            rows.append(DeliveredBeam(number, field.field, beam.beam, label, given, planned))
    return tuple(_with_something(rows))


def _with_something(rows: list[DeliveredBeam]) -> list[DeliveredBeam]:
    given = [row for row in rows if row.meterset_mu > 0]
    if not given:
        raise InputError("no beam has any MU, so there is nothing to record")
    return rows


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


def _states_after(stored: Stored, beams: tuple[DeliveredBeam, ...]) -> dict[int, FractionState]:
    delivered = [*delivered_beams(stored.deliveries), *beams]
    return fraction_states(stored.plan, delivered, stored.machine.tolerances.meterset_percent)


def _departures(
    stored: Stored, due: Progress, state: FractionState, beams: tuple[DeliveredBeam, ...]
) -> tuple[Departure, ...]:
    """Return how position and meterset differ, seen over the whole of a step once begun."""
    begun = stored.states.get(state.number)
    here = {row.field for row in stored.deliveries if row.beam in due.begun_beams}
    earlier = begun.last_position if begun else {}
    where = {field: place for field, place in earlier.items() if field in here}
    where |= beams_by_field(beams)
    parts = {beam: part / due.expected for beam, part in state.parts.items()}
    mu = {beam.beam: beam.planned_mu * due.expected for beam in beams}
    return (
        *position_departures(stored.plan, due.position or "", where),
        *meterset_departures(parts, mu, stored.machine.tolerances.meterset_percent),
    )


def _gaps(
    stored: Stored, beams: tuple[DeliveredBeam, ...], delivery: Delivery
) -> list[MeasuredGap]:
    settings = stored.plan.position(beams[0].position)
    tolerance = {j.name: j.gap_tolerance_cm for j in stored.course.junctions}
    expected = {
        (j.junction, gap.side): gap.expected_cm for j in settings.junctions for gap in j.skin_gaps
    }
    return [
        MeasuredGap(name, side, gap, expected[name, side], tolerance[name])
        for (name, side), gap in measured(stored, delivery.gaps_cm).items()
    ]


def _next_date(desk: Desk, stored: Stored, after: Progress, number: int) -> str | None:
    if after.next_fraction is None:
        return None
    today = desk.now.date()
    given = {row.fraction for row in stored.deliveries if row.at[:10] == today.isoformat()}
    # What remains of a fraction is due the same day: it takes no place of its own.
    count = len({*given, number} - ({number} if after.next_fraction == number else set()))
    return next_date(
        stored.course.sequence, stored.course.fractions_a_day, today, count
    ).isoformat()


def _without(values: dict[str, Any], key: str) -> dict[str, Any]:
    return {name: value for name, value in values.items() if name != key}
