"""What was delivered, after the beam: never refused when true; what differs is a departure."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import datetime
from typing import TYPE_CHECKING

from featherlog.actions.account import Account, account_of, content_of
from featherlog.actions.delivered import (
    Delivery,
    Occasion,
    check_number,
    last_number,
    moment_of,
    with_deliveries,
)
from featherlog.actions.signing import signing_desk
from featherlog.actions.stored import Stored, load
from featherlog.actions.typed import printable
from featherlog.errors import InputError, RefusedError
from featherlog.policy import Act
from featherlog.store import ledger, queries
from featherlog.store.entry import Kind

if TYPE_CHECKING:
    from featherlog.actions.desk import Desk, Signer
    from featherlog.sequence.departures import Departure
    from featherlog.store.rows import DeliveryRow

__all__ = ["Delivery", "Recorded", "record"]

# What may be written between the check and the record of a fraction without undoing the check.
_LEAVE_CONFIRMED = frozenset(
    {
        Kind.FRACTION_CONFIRMED,
        Kind.DEPARTURE_EXPLAINED,
        Kind.DEPARTURE_DECIDED,
        Kind.TABLE_READ,
        Kind.IMAGE_SHIFT,
        Kind.IMAGER_OUT,
        Kind.IMAGER_BACK,
        Kind.PHYSICS_PRESENT,
        Kind.POSITION_CHECKED,
        Kind.REVIEW_SIGNED,
    }
)


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
        InputError: a field, beam, position, gap or time that the course cannot have, a meterset
            that is not a number of MU, or no position for a fraction that was not confirmed.
        RefusedError: performer and verifier are not two qualified people, or the fraction was
            recorded already.
    """
    reason = printable("--reason", delivery.reason)
    with signing_desk(database, Act.RECORD, by, verified_by) as desk:
        occasion = _occasion(desk, load(desk, key), delivery)
        account = account_of(desk, delivery, occasion)
        late = {"late": True, "treated_at": occasion.at.isoformat(timespec="seconds")}
        entry = desk.append(
            Kind.FRACTION_RECORDED,
            {
                **content_of(
                    occasion, delivery, account, {one.kind: reason for one in account.departures}
                ),
                "performer": by.name,
                "verifier": verified_by.name,
                **(late if delivery.treated_at else {}),
            },
            course=key,
            meaning=f"We record fraction {occasion.fraction} as delivered",
        )
    return recorded_of(entry.number, occasion, account, explained=bool(reason))


def recorded_of(entry: int, occasion: Occasion, account: Account, *, explained: bool) -> Recorded:
    """Return what an entry of the ledger came to."""
    after, due = account.after, occasion.due
    return Recorded(
        entry=entry,
        fraction=occasion.fraction,
        positions=tuple(dict.fromkeys((beam.field, beam.position) for beam in account.beams)),
        step=due.step,
        steps=due.steps,
        step_complete=not (after.next_fraction == occasion.fraction and after.step == due.step),
        complete=account.complete,
        departures=account.departures,
        explained=explained,
        next_fraction=after.next_fraction,
        next_position=after.position,
        next_date=account.next_date,
    )


def refuse_again(stored: Stored, number: int, *, again: bool) -> None:
    """Refuse a fraction that is complete, saying who recorded it, unless it was given again."""
    state = stored.states.get(number)
    complete = state is not None and state.complete
    if complete and not again:
        raise RefusedError(
            f"{recorded_by(stored, number)}; a further delivery of it is recorded with --again"
        )
    if again and not complete:
        raise InputError(f"--again is for a complete fraction, and fraction {number} is not")


def recorded_by(stored: Stored, number: int) -> str:
    """Say who recorded a fraction last, and when."""
    last = [row for row in stored.deliveries if row.fraction == number][-1]
    return f"fraction {number} was recorded at {last.at} by {last.performer} with {last.verifier}"


def confirmed_position(desk: Desk, key: str, number: int, until: int | None = None) -> str | None:
    """Return where a fraction was confirmed for the record that follows; None where it was not.

    ``until`` is the entry of that record, where it is made already.
    """
    confirmations = [
        row
        for row in queries.confirmations(desk.connection, key, number)
        if until is None or row.entry < until
    ]
    if not confirmations:
        return None
    last = confirmations[-1]
    since = {
        entry.kind
        for entry in ledger.entries(desk.connection, key)
        if last.entry < entry.number and (until is None or entry.number < until)
    }
    return last.position if since <= _LEAVE_CONFIRMED else None


def halted(desk: Desk, key: str, at: datetime) -> str:
    """Return whether the course was paused or ended at a time; empty where it was neither."""
    words = {Kind.COURSE_PAUSED: "paused", Kind.COURSE_RELEASED: "", Kind.COURSE_ENDED: "ended"}
    found = ""
    for event in queries.events(desk.connection, key):
        if event.kind in words and datetime.fromisoformat(event.at) <= at:
            found = words[Kind(event.kind)]
    return found


def _occasion(desk: Desk, stored: Stored, delivery: Delivery) -> Occasion:
    number = _fraction(stored, delivery)
    confirmed = confirmed_position(desk, stored.row.key, number)
    if confirmed is None and delivery.fraction is None and delivery.treated_at is None:
        _refuse_a_second_record(desk, stored, delivery, number)
    refuse_again(stored, number, again=delivery.again)
    at = moment_of(desk, delivery.treated_at)
    rows = stored.deliveries
    # Only a time that was told puts a delivery before others: a clock may have been set back.
    before = tuple(row for row in rows if not delivery.treated_at or _treated(row) <= at)
    return Occasion(
        fraction=number,
        at=at,
        before=with_deliveries(stored, before),
        later=tuple(row for row in rows if row not in before),
        confirmed=confirmed,
        approved=stored.approved,
        halted=halted(desk, stored.row.key, at),
        again=delivery.again,
    )


def _treated(row: DeliveryRow) -> datetime:
    return datetime.fromisoformat(row.at)


def _fraction(stored: Stored, delivery: Delivery) -> int:
    # A fraction beyond the prescribed count is recorded all the same, under the next number.
    if delivery.fraction is not None:
        return check_number(stored, delivery.fraction)
    if delivery.again:
        raise InputError("--again needs the fraction's number: give --fraction")
    return stored.progress.next_fraction or last_number(stored)


def _refuse_a_second_record(desk: Desk, stored: Stored, delivery: Delivery, number: int) -> None:
    """Refuse to take what is due next for what was confirmed today and recorded since."""
    last = max(stored.deliveries, key=lambda row: row.entry, default=None)
    remainder = last is not None and last.fraction == number
    if last is None or (remainder and (delivery.position or delivery.field_positions)):
        return
    confirmed = queries.confirmations(desk.connection, stored.row.key, last.fraction)
    today = desk.now.date().isoformat()
    if confirmed and confirmed[-1].at[:10] == today and last.at[:10] == today:
        otherwise = (
            "what remains of it was not confirmed: say where it was treated with --position"
            if remainder
            else f"fraction {number} was not confirmed: name it with --fraction {number} if it was "
            "treated as well"
        )
        raise RefusedError(f"{recorded_by(stored, last.fraction)}; {otherwise}")
