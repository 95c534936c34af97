"""What the people at the console say was delivered, and the moment it is seen from."""

from __future__ import annotations

from dataclasses import dataclass, field, replace
from datetime import datetime
from typing import TYPE_CHECKING

from featherlog.actions.stored import delivered_beams
from featherlog.errors import InputError
from featherlog.sequence.progress import (
    DeliveredBeam,
    FractionState,
    Progress,
    due_in,
    fraction_states,
    progress,
)

if TYPE_CHECKING:
    from collections.abc import Iterable, Mapping

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
        return due_in(self.before.plan, self.fraction, state, meterset_percent(self.before))


def with_deliveries(stored: Stored, rows: Iterable[DeliveryRow]) -> Stored:
    """Return the course as it stood with these deliveries alone."""
    kept = tuple(rows)
    states = states_of(stored, delivered_beams(kept))
    now = progress(stored.plan, states, meterset_percent(stored))
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


def beams_of(occasion: Occasion, delivery: Delivery) -> tuple[DeliveredBeam, ...]:
    """Return what every beam gave; InputError for what the course does not have."""
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


def meterset_percent(stored: Stored) -> float:
    """Return the tolerance within which a meterset counts as delivered in full."""
    return stored.machine.tolerances.meterset_percent


def states_of(stored: Stored, beams: list[DeliveredBeam]) -> dict[int, FractionState]:
    """Return the state of every fraction begun by these deliveries."""
    return fraction_states(stored.plan, beams, meterset_percent(stored))
