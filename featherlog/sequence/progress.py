"""How far a course has come: what each fraction has received and which comes next.

A fraction is complete when every beam's delivered meterset adds up to the planned one; the
remainder of a broken one keeps its fraction number and the position where it began (DICOM PS3.3
7.14.10).
"""

from __future__ import annotations

from collections import defaultdict
from dataclasses import dataclass
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Iterable, Mapping

    from featherlog.junction.plan import Plan


@dataclass(frozen=True, slots=True)
class DeliveredBeam:
    """One delivery of one beam, whole or part; ``planned_mu`` is its whole meterset, above 0."""

    fraction: int
    field: str
    beam: str
    position: str
    meterset_mu: float
    planned_mu: float

    @property
    def part(self) -> float:
        """The part of the planned meterset that was delivered."""
        return self.meterset_mu / self.planned_mu


@dataclass(frozen=True, slots=True)
class FractionState:
    """What one fraction has received; ``parts`` is each beam's delivered part of its meterset."""

    number: int
    began_at: str
    field_position: Mapping[str, str]
    parts: Mapping[str, float]
    complete: bool


@dataclass(frozen=True, slots=True)
class Progress:
    """Where the course stands. ``next_fraction`` is None when every fraction is complete.

    ``position`` is where the next fraction is to be treated: its planned position, or the one
    where it began when ``part_delivered``.
    """

    complete: int
    next_fraction: int | None
    position: str | None
    part_delivered: bool


def fraction_states(
    plan: Plan, delivered: Iterable[DeliveredBeam], meterset_percent: float
) -> dict[int, FractionState]:
    """Return the state of every fraction that was begun, by number.

    ``meterset_percent`` is the tolerance within which a meterset counts as delivered in full.
    """
    by_fraction: dict[int, list[DeliveredBeam]] = defaultdict(list)
    for beam in delivered:
        by_fraction[beam.fraction].append(beam)
    names = [beam.beam for field in plan.positions[0].treated for beam in field.beams]
    return {
        number: _state(number, rows, names, meterset_percent)
        for number, rows in sorted(by_fraction.items())
    }


def _state(
    number: int, rows: list[DeliveredBeam], names: list[str], meterset_percent: float
) -> FractionState:
    parts = dict.fromkeys(names, 0.0)
    for row in rows:
        parts[row.beam] += row.part
    given = [row for row in rows if row.meterset_mu > 0] or rows
    least = 1 - meterset_percent / 100 - 1e-9  # parts that add up to the limit reach it
    return FractionState(
        number=number,
        began_at=given[0].position,
        field_position={row.field: row.position for row in reversed(given)},
        parts=parts,
        complete=all(part >= least for part in parts.values()),
    )


def progress(plan: Plan, states: Mapping[int, FractionState]) -> Progress:
    """Return where the course stands after the fractions that were begun."""
    complete = sum(state.complete for state in states.values())
    for fraction in plan.fractions:
        state = states.get(fraction.number)
        if state is None:
            return Progress(complete, fraction.number, fraction.position, part_delivered=False)
        if not state.complete:
            return Progress(complete, fraction.number, state.began_at, part_delivered=True)
    return Progress(complete, None, None, part_delivered=False)


def previous_position(plan: Plan, states: Mapping[int, FractionState], fraction: int) -> str | None:
    """Return the position treated in the fraction before: as delivered, else as planned."""
    if fraction <= 1:
        return None
    state = states.get(fraction - 1)
    return state.began_at if state else plan.fraction(fraction - 1).position
