"""What people observe around the treatment: each an event of its own, none of them a departure."""

from __future__ import annotations

import json
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from featherlog.actions.desk import at_desk
from featherlog.actions.events import imager_out
from featherlog.actions.signing import signing_desk
from featherlog.actions.stored import load
from featherlog.actions.table_reference import table_reference
from featherlog.actions.typed import required
from featherlog.errors import InputError, RefusedError
from featherlog.policy import Act
from featherlog.store import queries
from featherlog.store.entry import Kind

if TYPE_CHECKING:
    from collections.abc import Callable

    from featherlog.actions.desk import Desk, Signer
    from featherlog.actions.stored import Stored
    from featherlog.actions.table_reference import TableReading
    from featherlog.junction.plan import Triple
    from featherlog.store.entry import Entry

# Beyond what any table travels and any patient is shifted: there a figure is a slip.
_TABLE_CM = 300.0
_SHIFT_CM = 40.0
_AXES = ("lateral", "longitudinal", "vertical")


@dataclass(frozen=True, slots=True)
class _Note:
    kind: Kind
    content: dict[str, Any]
    meaning: str


def read_table(
    database: str | None,
    key: str,
    field: str,
    *,
    table_cm: Triple,
    by: Signer,
    verified_by: Signer,
    fraction: int | None = None,
) -> TableReading:
    """Keep a read-out of the table (cm, IEC 61217) with one field set; all targets follow from it.

    It belongs to the fraction due once that is confirmed; otherwise ``fraction`` says to which.

    Raises:
        InputError: no such field, a fraction neither due nor delivered, a value out of range.
        RefusedError: not two people who may.
    """

    def note(desk: Desk, stored: Stored) -> _Note:
        _known_field(stored, field)
        number = _fraction_read(desk, stored, fraction)
        position = _position_of(desk, stored, number, field)
        return _Note(
            Kind.TABLE_READ,
            {
                "field": field,
                "fraction": number,
                "position": position,
                "revision": stored.revision.number,
                **_by_axis(table_cm, _TABLE_CM),
            },
            f"We read the table for {field} at {position} in fraction {number}",
        )

    _keep(database, key, Act.READ_TABLE, note, by=by, verified_by=verified_by)
    with at_desk(database) as desk:
        stored = load(desk, key)
        events = queries.events(desk.connection, key)
        reading = table_reference(events, stored.revision.number).reading
    if reading is None:
        raise RefusedError("the reading was kept, but what happened since has made it void")
    return reading


def note_image_shift(
    database: str | None,
    key: str,
    *,
    fraction: int,
    field: str,
    shift_cm: Triple,
    by: Signer,
    verified_by: Signer | None = None,
) -> tuple[str, ...]:
    """Keep the shift (cm, table axes, IEC 61217) that imaging asked for before a field.

    Returns a sentence for every other field that was shifted otherwise in the same fraction: the
    junction between them then moved apart.

    Raises InputError for a field or fraction the course does not have, or a value out of range.
    """

    def note(_desk: Desk, stored: Stored) -> _Note:
        _known_field(stored, field)
        _known_fraction(stored, fraction)
        return _Note(
            Kind.IMAGE_SHIFT,
            {"field": field, "fraction": fraction, **_by_axis(shift_cm, _SHIFT_CM)},
            f"Imaging shifted {field} in fraction {fraction}",
        )

    _keep(database, key, Act.NOTE, note, by=by, verified_by=verified_by)
    with at_desk(database) as desk:
        stored = load(desk, key)
        return _shifted_apart(desk, stored, fraction, field)


def note_marks_redrawn(
    database: str | None,
    key: str,
    *,
    position: str,
    reason: str,
    by: Signer,
    verified_by: Signer | None = None,
) -> None:
    """Keep that the skin or mask lines of a position were redrawn: the table is to be read again.

    Raises InputError for a position the course does not have or a reason that is empty.
    """
    reason = required("--reason", reason, "why the marks were redrawn")

    def note(_desk: Desk, stored: Stored) -> _Note:
        labels = [one.label for one in stored.plan.positions]
        if position not in labels:
            raise InputError(
                f"there is no position {position!r} in this course; it has {', '.join(labels)}"
            )
        content = {"position": position, "reason": reason}
        return _Note(Kind.MARKS_REDRAWN, content, f"The marks of position {position} are redrawn")

    _keep(database, key, Act.NOTE, note, by=by, verified_by=verified_by)


def note_imager(
    database: str | None,
    key: str,
    *,
    works: bool,
    reason: str,
    by: Signer,
    verified_by: Signer | None = None,
) -> None:
    """Keep that the imager is out, or back; while it is out the day's page shows raised risk.

    Raises InputError where that is known already, or the reason is empty.
    """
    reason = required("--reason", reason, "what happened to the imager")

    def note(desk: Desk, stored: Stored) -> _Note:
        outage = imager_out(queries.events(desk.connection, stored.row.key))
        if works and outage is None:
            raise InputError("the imager is not out, so it cannot be back")
        if not works and outage is not None:
            raise InputError(f"the imager is out since {outage.at} already")
        kind = Kind.IMAGER_BACK if works else Kind.IMAGER_OUT
        return _Note(kind, {"reason": reason}, f"The imager is {'back' if works else 'out'}")

    _keep(database, key, Act.NOTE, note, by=by, verified_by=verified_by)


def attest_presence(database: str | None, key: str, *, fraction: int, by: Signer) -> None:
    """Keep that a physicist is there for a fraction; it counts on the day it was said.

    Raises InputError for a fraction the course does not have, RefusedError for another role.
    """

    def note(_desk: Desk, stored: Stored) -> _Note:
        _known_fraction(stored, fraction)
        meaning = f"I am present for fraction {fraction}"
        return _Note(Kind.PHYSICS_PRESENT, {"fraction": fraction}, meaning)

    _keep(database, key, Act.ATTEND, note, by=by)


def _keep(
    database: str | None,
    key: str,
    act: Act,
    note: Callable[[Desk, Stored], _Note],
    *,
    by: Signer,
    verified_by: Signer | None = None,
) -> Entry:
    with at_desk(database) as desk:
        note(desk, load(desk, key))  # before anybody has typed a passphrase for nothing
    with signing_desk(database, act, by, verified_by) as desk:
        found = note(desk, load(desk, key))
        return desk.append(found.kind, found.content, meaning=found.meaning, course=key)


def _by_axis(values_cm: Triple, widest_cm: float) -> dict[str, float]:
    for axis, value in zip(_AXES, values_cm, strict=True):
        if not abs(value) <= widest_cm:
            raise InputError(
                f"--{axis} is {value:g}, but must be {-widest_cm:g} to {widest_cm:g} cm"
            )
    return {f"{axis}_cm": value for axis, value in zip(_AXES, values_cm, strict=True)}


def _known_field(stored: Stored, field: str) -> None:
    names = [one.field for one in stored.plan.positions[0].treated]
    if field not in names:
        raise InputError(f"there is no field {field!r} in this course; it has {', '.join(names)}")


def _known_fraction(stored: Stored, number: int) -> None:
    last = max([stored.course.fractions, *stored.states])
    if not 1 <= number <= last:
        raise InputError(f"--fraction is {number}, but must be 1 to {last}")


def _fraction_read(desk: Desk, stored: Stored, asked: int | None) -> int:
    """Return the fraction a read-out belongs to; a wrong one would give every target wrongly."""
    due = stored.progress.next_fraction
    if asked is not None:
        if asked != due and asked not in stored.states:
            raise InputError(f"fraction {asked} is neither due nor delivered")
        return asked
    if due is not None and (not stored.deliveries or _confirmed(desk, stored, due)):
        return due
    known = [f"{max(stored.states)} was delivered last"] if stored.states else []
    known += [f"{due} is due and not confirmed"] if due is not None else []
    raise InputError(f"say with --fraction which one the reading belongs to: {', '.join(known)}")


def _confirmed(desk: Desk, stored: Stored, due: int) -> bool:
    """Tell whether the fraction due was confirmed after the last record."""
    found = queries.confirmations(desk.connection, stored.row.key, due)
    last = stored.deliveries[-1].entry if stored.deliveries else 0
    return bool(found) and found[-1].entry > last


def _position_of(desk: Desk, stored: Stored, number: int, field: str) -> str:
    due = stored.progress
    if number == due.next_fraction:
        begun = {} if _confirmed(desk, stored, number) else due.begun_at
        return begun.get(field, due.position or "")
    place = stored.states[number].last_position.get(field)
    if place is None:
        raise InputError(f"field {field!r} was not treated in fraction {number}")
    return place


def _shifted_apart(desk: Desk, stored: Stored, fraction: int, field: str) -> tuple[str, ...]:
    """Compare a field's latest shift with the others' of its fraction, within the tolerance."""
    shifts: dict[str, dict[str, float]] = {}
    for event in queries.events(desk.connection, stored.row.key):
        if event.kind == Kind.IMAGE_SHIFT and event.fraction == fraction:
            content = json.loads(event.content)
            shifts[content["field"]] = {axis: content[f"{axis}_cm"] for axis in _AXES}
    own = shifts.pop(field)
    apart = {
        (other, axis): own[axis] - shift[axis] for other, shift in shifts.items() for axis in _AXES
    }
    allowed = stored.machine.tolerances.table_cm
    return tuple(
        f"{field} was shifted {difference:+.2f} cm {axis} against {other} in fraction {fraction}, "
        f"more than the table's tolerance of {allowed:.2f} cm: the junction moved apart"
        for (other, axis), difference in apart.items()
        if abs(difference) > allowed + 1e-9
    )
