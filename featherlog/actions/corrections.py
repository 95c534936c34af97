"""Corrections of records: appended with a reason, recomputed, both versions kept."""

from __future__ import annotations

from dataclasses import dataclass, replace
from datetime import datetime
from typing import TYPE_CHECKING, Any

from featherlog import words
from featherlog.actions.account import account_of, content_of, nothing_of
from featherlog.actions.confirm import measured
from featherlog.actions.delivered import (
    Delivery,
    Occasion,
    check_number,
    moment_of,
    with_deliveries,
)
from featherlog.actions.desk import at_desk
from featherlog.actions.record import (
    Recorded,
    confirmed_position,
    halted,
    recorded_of,
    refuse_again,
)
from featherlog.actions.signing import signing_desk
from featherlog.actions.stored import Stored, load
from featherlog.actions.typed import required
from featherlog.errors import RefusedError
from featherlog.policy import Act
from featherlog.store import ledger, queries
from featherlog.store.entry import Kind

if TYPE_CHECKING:
    from collections.abc import Mapping

    from featherlog.actions.desk import Desk, Signer
    from featherlog.store.entry import Entry
    from featherlog.store.rows import DeliveryRow

# A meterset this near to what was due was never typed: it follows its position.
_SAME_MU = 1e-6
_RECORDS = (Kind.FRACTION_RECORDED, Kind.RECORD_CORRECTED)


@dataclass(frozen=True, slots=True)
class CorrectionLine:
    """One correction: what the entry it corrects had said, and what stands now."""

    entry: int
    corrects: int
    at: str
    who: tuple[str, ...]
    reason: str
    was: str
    became: str


def correct(
    database: str | None,
    key: str,
    number: int,
    *,
    by: Signer,
    verified_by: Signer,
    delivery: Delivery,
    void: bool = False,
) -> Recorded:
    """Correct ledger entry ``number``, the record of a fraction; what is not named stays as it was.

    ``void`` says that the record should not be there at all, as one of another patient.

    Raises:
        InputError: no reason, or what a record may not hold either.
        RefusedError: the entry is no record of this course, or was corrected already.
    """
    reason = required("--reason", delivery.reason, "why the record is corrected")
    with signing_desk(database, Act.CORRECT, by, verified_by) as desk:
        stored = load(desk, key)
        old = _record_of(desk, stored, number)
        rows = [row for row in stored.deliveries if row.entry == number]
        occasion = _occasion(desk, stored, old, rows, delivery)
        whole = _completed(occasion, old, rows, delivery)
        reasons = _reasons(desk, key, number)
        account = nothing_of(desk, occasion) if void else account_of(desk, whole, occasion)
        entry = desk.append(
            Kind.RECORD_CORRECTED,
            {
                **content_of(occasion, whole, account, reasons),
                "performer": by.name,
                "verifier": verified_by.name,
                "treated_by": [rows[0].performer, rows[0].verifier],
                "treated_at": occasion.at.isoformat(timespec="seconds"),
                "late": rows[0].late or bool(delivery.treated_at),
                "corrects": number,
                "reason": reason,
            },
            course=key,
            meaning=f"We correct entry {number}, the record of fraction {old.content['fraction']}",
        )
    explained = all(departure.kind in reasons for departure in account.departures)
    return recorded_of(entry.number, occasion, account, explained=explained)


def list_corrections(database: str | None, key: str) -> tuple[CorrectionLine, ...]:
    """Return every correction of a course's records; NotFoundError where there is no course."""
    with at_desk(database) as desk:
        load(desk, key)
        return corrections(desk, key)


def corrections(desk: Desk, key: str) -> tuple[CorrectionLine, ...]:
    """Return every correction of a course's records with both versions, in their order."""
    if not any(row.kind == Kind.RECORD_CORRECTED for row in queries.events(desk.connection, key)):
        return ()
    records = {
        entry.number: entry
        for entry in ledger.entries(desk.connection, key)
        if entry.kind in _RECORDS
    }
    return tuple(
        CorrectionLine(
            entry=entry.number,
            corrects=entry.content["corrects"],
            at=entry.at,
            who=tuple(entry.content["signed_by"]),
            reason=entry.content["reason"],
            was=_summary(records[entry.content["corrects"]]),
            became=_summary(entry),
        )
        for entry in records.values()
        if entry.kind == Kind.RECORD_CORRECTED
    )


def _summary(entry: Entry) -> str:
    content = entry.content
    beams = ", ".join(
        f"{beam['beam']} {words.meterset(beam['meterset_mu'])} MU at {beam['position']}"
        for beam in content["beams"]
    )
    gaps = "".join(
        f"; {gap['side']} gap at {gap['junction']} {words.signed(gap['gap_cm'], 2)} cm"
        for gap in content["gaps"]
    )
    at = content.get("treated_at", entry.at)
    return f"fraction {content['fraction']} at {at}: {beams or 'nothing delivered'}{gaps}"


def _record_of(desk: Desk, stored: Stored, number: int) -> Entry:
    key = stored.row.key
    records = [entry for entry in ledger.entries(desk.connection, key) if entry.kind in _RECORDS]
    by = [entry.number for entry in records if entry.content.get("corrects") == number]
    if by:
        raise RefusedError(
            f"entry {number} was corrected already by entry {by[0]}; correct that one"
        )
    found = [entry for entry in records if entry.number == number]
    if not found:
        raise RefusedError(
            f"entry {number} is no record of a fraction of course {key}; see `featherlog ledger "
            f"list {key}`"
        )
    if not found[0].content["beams"]:
        raise RefusedError(f"entry {number} says that nothing was delivered; record it instead")
    return found[0]


def _occasion(
    desk: Desk, stored: Stored, old: Entry, rows: list[DeliveryRow], delivery: Delivery
) -> Occasion:
    others = [row for row in stored.deliveries if row.entry != old.number]
    without = with_deliveries(stored, others)
    was = [departure["kind"] for departure in old.content["departures"]]
    number = old.content["fraction"]
    if delivery.fraction is not None:
        number = check_number(without, delivery.fraction)
        refuse_again(without, number, again=delivery.again)
    told = moment_of(desk, delivery.treated_at)
    at = told if delivery.treated_at else datetime.fromisoformat(rows[0].at)
    before = [row for row in others if _order(row.at, row.entry) < (at, old.number)]
    seen = with_deliveries(stored, before)
    state = seen.states.get(number)
    return Occasion(
        fraction=number,
        at=at,
        before=seen,
        later=tuple(row for row in others if row not in before),
        confirmed=_confirmed(desk, stored.row.key, number, old),
        approved="not approved" not in was,
        halted=halted(desk, stored.row.key, at),
        again=state is not None and state.complete,
    )


def _order(at: str, entry: int) -> tuple[datetime, int]:
    return datetime.fromisoformat(at), entry


def _confirmed(desk: Desk, key: str, number: int, old: Entry) -> str | None:
    """Return where the fraction was confirmed before the entry, or its first version, was made."""
    first = old
    while "corrects" in first.content:
        corrected = first.content["corrects"]
        first = next(e for e in ledger.entries(desk.connection, key) if e.number == corrected)
    return confirmed_position(desk, key, number, first.number)


def _completed(
    occasion: Occasion, old: Entry, rows: list[DeliveryRow], delivery: Delivery
) -> Delivery:
    """Return the delivery with everything that the correction leaves as it was."""
    stands = {} if delivery.position else {row.field: row.position for row in rows}
    due = occasion.due.due
    metersets = {
        row.beam: row.meterset_mu
        for row in rows
        if abs(row.meterset_mu - due[row.beam] * row.planned_mu) > _SAME_MU
    }
    return replace(
        delivery,
        field_positions=stands | dict(delivery.field_positions),
        metersets_mu=metersets | dict(delivery.metersets_mu),
        gaps_cm=_gaps(occasion.before, old.content, delivery.gaps_cm),
        table_cm=_tables(old.content) | dict(delivery.table_cm),
    )


def _gaps(stored: Stored, old: dict[str, Any], told: Mapping[str, float]) -> dict[str, float]:
    kept = {(gap["junction"], gap["side"]): gap["gap_cm"] for gap in old["gaps"]}
    return {f"{name}:{side}": gap for (name, side), gap in (kept | measured(stored, told)).items()}


def _tables(old: dict[str, Any]) -> dict[str, float]:
    return {table["field"]: table["longitudinal_cm"] for table in old.get("tables", ())}


def _reasons(desk: Desk, key: str, number: int) -> dict[str, str]:
    """Return the reasons that were given for what differed, which still hold for its kind."""
    return {
        row.kind: row.reason
        for row in queries.departures(desk.connection, key)
        if row.entry == number and row.reason
    }
