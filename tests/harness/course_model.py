"""A course's life kept in plain memory, to tell what the program must say about it.

It shares no code with the program. Every field of every fraction has a place of its own; a fraction
is complete when each beam's metersets add up, and what remains of it stays where it began.
"""

from __future__ import annotations

from collections import Counter
from dataclasses import dataclass, field, replace
from itertools import pairwise
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Iterable, Mapping
    from datetime import date, datetime

ENOUGH = 0.01 + 1e-9
"""The part of a meterset that may be missing: the practice machine's 1 %."""
INTERVAL_HOURS = 6.0


@dataclass(frozen=True)
class Design:
    """What the model knows of a design; ``planned`` is the position of each fraction.

    ``fields`` hold each beam's weight in its field, superior field first. A field that is moved up
    or down has its edge at ``edge_cm`` of its position.
    """

    fields: Mapping[str, Mapping[str, float]]
    edge_cm: Mapping[str, float]
    mu: Mapping[str, Mapping[str, float]]
    planned: tuple[str, ...]
    dose_gy: float

    @property
    def beams(self) -> list[str]:
        return [beam for beams in self.fields.values() for beam in beams]

    def position(self, fraction: int) -> str:
        return self.planned[min(fraction, len(self.planned)) - 1]


@dataclass(frozen=True)
class Beam:
    """What one beam gave; ``part`` is that of its planned meterset at its position."""

    field: str
    name: str
    position: str
    mu: float
    part: float


@dataclass(frozen=True)
class Record:
    """One record that stands; ``confirmed`` are the fractions confirmed when it was first made."""

    entry: int
    fraction: int
    at: datetime
    beams: tuple[Beam, ...]
    confirmed: Mapping[int, str]


@dataclass(frozen=True)
class Told:
    """What people say was delivered; nothing said means as confirmed and as due."""

    position: str | None = None
    field_positions: Mapping[str, str] = field(default_factory=dict)
    mu: Mapping[str, float] = field(default_factory=dict)


@dataclass
class Departure:
    """One departure as it is kept."""

    entry: int
    kind: str
    status: str
    has_reason: bool


@dataclass
class Model:
    """One approved course."""

    design: Design
    records: list[Record] = field(default_factory=list)
    departures: list[Departure] = field(default_factory=list)
    confirmed: dict[int, str] = field(default_factory=dict)
    halts: list[tuple[datetime, str]] = field(default_factory=list)
    missed: set[date] = field(default_factory=set)

    @property
    def halted(self) -> str:
        return self.halts[-1][1] if self.halts else ""

    @property
    def fractions(self) -> int:
        return len(self.design.planned)

    @property
    def last_number(self) -> int:
        """The greatest number a record may bear."""
        return max([self.fractions, *(record.fraction for record in self.records)]) + 1

    @property
    def due(self) -> int | None:
        return None if self.halted == "ended" else self.due_after(self.records)

    @property
    def due_position(self) -> str | None:
        return None if self.due is None else self.place_of(self.records, self.due)

    @property
    def complete(self) -> int:
        """How many fractions are complete, prescribed or not."""
        return sum(self.is_complete(self.records, n) for n in self.begun())

    @property
    def part_delivered(self) -> bool:
        return self.due is not None and bool(self.begun_fields(self.records, self.due))

    def begun(self) -> set[int]:
        return {record.fraction for record in self.records}

    def due_after(self, records: Iterable[Record]) -> int | None:
        kept = list(records)
        numbers = range(1, self.fractions + 1)
        return next((n for n in numbers if not self.is_complete(kept, n)), None)

    def parts(self, records: Iterable[Record], fraction: int) -> dict[str, float]:
        """Return each beam's part of its meterset in one fraction."""
        parts = dict.fromkeys(self.design.beams, 0.0)
        for beam in _beams(records, fraction):
            parts[beam.name] += beam.part
        return parts

    def is_complete(self, records: Iterable[Record], fraction: int) -> bool:
        return min(self.parts(records, fraction).values()) >= 1 - ENOUGH

    def begun_fields(self, records: Iterable[Record], fraction: int) -> dict[str, str]:
        """Return where each field with a beam begun stands, in the order they came there."""
        kept = list(records)
        parts = self.parts(kept, fraction)
        stands: dict[str, str] = {}
        for beam in _beams(kept, fraction):
            if any(parts[name] > ENOUGH for name in self.design.fields[beam.field]):
                stands.pop(beam.field, None)
                stands[beam.field] = beam.position
        return stands

    def place_of(self, records: Iterable[Record], fraction: int) -> str:
        """Return where a fraction is to be treated: where it was begun, or as planned."""
        kept = list(records)
        if not self.begun_fields(kept, fraction):
            return self.design.position(fraction)
        return _beams(kept, fraction)[0].position

    def shift(self) -> bool:
        """Tell whether any field moves for what is due."""
        if self.due is None:
            return False
        begun = self.begun_fields(self.records, self.due)
        if self.due == 1:
            return bool(begun) and set(begun.values()) != {self.due_position}
        before = {beam.field: beam.position for beam in _beams(self.records, self.due - 1)}
        planned = self.design.position(self.due - 1)
        stands = dict.fromkeys(self.design.fields, planned) | before | begun
        return set(stands.values()) != {self.due_position}

    def must_stop(self) -> bool:
        """Tell whether what is due may not be treated, whoever reads back what."""
        if self.halted or self.due is None:
            return bool(self.halted)
        begun = self.begun_fields(self.records, self.due)
        apart = len(set(begun.values())) > 1
        return apart or (self.shift() and not begun and not self.is_equal())

    def has_time(self, at: datetime) -> bool:
        """Tell whether other fractions are finished and far enough from a time to treat at."""
        others = self.begun() - {self.due}
        finished = all(self.is_complete(self.records, number) for number in others)
        near = _too_near(self.due or 0, at, self.records)
        return finished and not near and not self.treated_on(at.date()) - {self.due}

    def is_equal(self) -> bool:
        """Tell whether the other fractions are complete and all fields have had as many."""
        others = self.begun() - {self.due}
        had: Counter[str] = Counter(dict.fromkeys(self.design.fields, 0))
        for number in others:
            parts = self.parts(self.records, number)
            for name, beams in self.design.fields.items():
                had[name] += min(int(parts[beam] + ENOUGH) for beam in beams)
        finished = all(self.is_complete(self.records, number) for number in others)
        return finished and len(set(had.values())) == 1

    def treated_on(self, day: date) -> set[int]:
        return {record.fraction for record in self.records if record.at.date() == day}

    def deliver(
        self,
        told: Told,
        fraction: int,
        at: datetime,
        others: list[Record],
        confirmed: str | None,
        *,
        again: bool,
    ) -> tuple[tuple[Beam, ...], list[str]] | None:
        """Return a record's beams and the kinds of its departures; None where it is no record."""
        before = [record for record in others if record.at < at]
        everywhere = told.position or confirmed
        if everywhere is None and set(told.field_positions) != set(self.design.fields):
            return None
        beams = []
        for name, label in self._labels(told, everywhere).items():
            for beam in self.design.fields[name]:
                whole = self.design.mu[label][beam]
                mu = told.mu.get(beam, self.left(before, fraction, again=again)[beam] * whole)
                beams.append(Beam(name, beam, label, mu, mu / whole))
        if not any(beam.mu > 0 for beam in beams):
            return None
        kinds = self._order_kinds(fraction, before, again=again)
        kinds += [] if confirmed else ["not confirmed"]
        kinds += ["not to be treated"] if self._halted_at(at) else []
        kinds += self._place_kinds(fraction, before, beams, again=again)
        made = Record(0, fraction, at, tuple(beams), {})
        kinds += ["extra delivery"] if again else self._mu_kinds([*before, made], fraction)
        kinds += ["interval too short"] if _too_near(fraction, at, others) else []
        return tuple(beams), kinds

    def left(self, before: list[Record], fraction: int, *, again: bool) -> dict[str, float]:
        """Return the part of each beam still to be given."""
        given = self.parts([] if again else before, fraction)
        return {beam: max(0.0, 1 - part) for beam, part in given.items()}

    def _labels(self, told: Told, everywhere: str | None) -> dict[str, str]:
        return {
            name: told.field_positions.get(name, everywhere or "") for name in self.design.fields
        }

    def _order_kinds(self, fraction: int, before: list[Record], *, again: bool) -> list[str]:
        if fraction > self.fractions:
            return ["extra fraction"]
        return [] if again or fraction == self.due_after(before) else ["fraction order"]

    def _halted_at(self, at: datetime) -> str:
        return next((what for since, what in reversed(self.halts) if since <= at), "")

    def _place_kinds(
        self, fraction: int, before: list[Record], beams: list[Beam], *, again: bool
    ) -> list[str]:
        kept = [] if again else before
        earlier = self.begun_fields(kept, fraction)
        where = earlier | {beam.field: beam.position for beam in beams if beam.mu > 0}
        if where == earlier or set(where.values()) == {self.place_of(kept, fraction)}:
            return []
        if len(set(where.values())) > 1:
            return ["fields apart"]
        return [] if again or fraction > self.fractions else ["other position"]

    def _mu_kinds(self, records: list[Record], fraction: int) -> list[str]:
        parts = self.parts(records, fraction).values()
        return [
            f"meterset {'short' if part < 1 else 'over'}"
            for part in parts
            if abs(part - 1) > ENOUGH
        ]

    def keep(self, record: Record, kinds: Iterable[str], explained: Iterable[str] = ()) -> None:
        """Take in a record and its departures; ``explained`` are the kinds with a reason."""
        reasons = set(explained)
        self.records.append(record)
        self.records.sort(key=lambda one: one.at)
        for kind in kinds:
            status = "explained" if kind in reasons else "open"
            self.departures.append(Departure(record.entry, kind, status, kind in reasons))

    def replaced(self, entry: int) -> Record:
        """Take out a record that is corrected."""
        (old,) = [record for record in self.records if record.entry == entry]
        self.records.remove(old)
        for departure in self.departures:
            if departure.entry == entry:
                departure.status = "corrected"
        return old

    def revise(self, new: Design) -> None:
        """Let what was begun stay as it was planned, and all else be as revised."""
        begun, old = self.begun(), self.design
        planned = [
            old.planned[number - 1] if number in begun and number <= len(old.planned) else label
            for number, label in enumerate(new.planned, start=1)
        ]
        self.design = replace(
            new,
            edge_cm={**old.edge_cm, **new.edge_cm},
            mu={**old.mu, **new.mu},
            planned=tuple(planned),
        )

    def shares(self) -> dict[str, float]:
        """Return the fractions delivered at each position, each field counting alike."""
        found: Counter[str] = Counter()
        for record in self.records:
            for beam in record.beams:
                weight = self.design.fields[beam.field][beam.name] / len(self.design.fields)
                found[beam.position] += beam.part * weight
        return dict(found)

    def strips(self, labels: Iterable[str]) -> list[tuple[float, float, float, float]]:
        """Return each strip between the edges of these positions: low, high, expected, covered."""
        upper = next(iter(self.design.fields))
        given = [
            (beam.field == upper, self.design.edge_cm[beam.position], self._weight(beam))
            for record in self.records
            for beam in record.beams
        ]
        expected = sum(part for _, _, part in given) / 2
        edges = sorted({self.design.edge_cm[label] for label in labels})
        return [
            (
                low,
                high,
                expected,
                sum(p for above, edge, p in given if (edge <= low if above else edge >= high)),
            )
            for low, high in pairwise(edges)
        ]

    def field_gy(self, name: str, *, with_rest: bool) -> float:
        """Return what a field has had, with what is still to come of the prescribed fractions."""
        beams = self.design.fields[name]
        numbers = self.begun() | set(range(1, self.fractions + 1) if with_rest else ())
        total = 0.0
        for number in numbers:
            parts = self.parts(self.records, number)
            for beam, weight in beams.items():
                rest = with_rest and number <= self.fractions
                total += weight * (max(parts[beam], 1.0) if rest else parts[beam])
        return total * self.design.dose_gy

    def _weight(self, beam: Beam) -> float:
        return beam.part * self.design.fields[beam.field][beam.name]


def _beams(records: Iterable[Record], fraction: int) -> list[Beam]:
    return [
        beam
        for record in records
        if record.fraction == fraction
        for beam in record.beams
        if beam.mu > 0
    ]


def _too_near(fraction: int, at: datetime, others: Iterable[Record]) -> bool:
    return any(
        record.fraction != fraction
        and abs((record.at - at).total_seconds()) < INTERVAL_HOURS * 3600
        for record in others
    )
