"""How far a course has come: what each fraction has received and which comes next.

A fraction is complete when every beam's delivered meterset adds up to the planned one; the
remainder of a broken one keeps its fraction number and the position where it began (DICOM PS3.3
7.14.10).
"""

from __future__ import annotations

from collections import defaultdict
from dataclasses import dataclass, field, replace
from itertools import accumulate
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
    """What one fraction has received; ``parts`` is each beam's delivered part of its meterset.

    ``began_at`` is the position first treated, ``last_position`` each field's latest one, the field
    treated last standing last, and ``field_positions`` all of each field's positions in the order
    they were treated.
    """

    number: int
    began_at: str
    last_position: Mapping[str, str]
    field_positions: Mapping[str, tuple[str, ...]]
    parts: Mapping[str, float]
    complete: bool

    def stood_at(self, steps: int) -> str:
        """Return where the fraction stands: where it began, or the latest of several steps."""
        return self.began_at if steps == 1 else list(self.last_position.values())[-1]


@dataclass(frozen=True, slots=True)
class Progress:
    """Where the course stands, and what is due.

    ``next_fraction`` is None when every fraction is complete. ``step`` counts the steps of a
    fraction that is split over positions, from 1. ``position`` is where the step is to be treated:
    its planned position, or where it began when ``part_delivered``. ``due`` is each beam's part of
    its meterset still to be given in this step, ``expected`` its part once the step is complete.
    ``begun_beams`` have had some of their meterset in this step.
    """

    complete: int
    next_fraction: int | None = None
    step: int = 1
    steps: int = 1
    position: str | None = None
    part_delivered: bool = False
    due: Mapping[str, float] = field(default_factory=dict)
    expected: float = 1.0
    begun_beams: frozenset[str] = frozenset()


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
    positions: dict[str, dict[str, None]] = {}
    last: dict[str, str] = {}
    for row in given:
        positions.setdefault(row.field, {})[row.position] = None
        last.pop(row.field, None)  # so that the field treated last stands last
        last[row.field] = row.position
    return FractionState(
        number=number,
        began_at=given[0].position,
        last_position=last,
        field_positions={name: tuple(labels) for name, labels in positions.items()},
        parts=parts,
        complete=all(part >= 1 - slack(meterset_percent) for part in parts.values()),
    )


def slack(meterset_percent: float) -> float:
    """Return the part of a meterset that may be missing from one counted as delivered in full."""
    return meterset_percent / 100 + 1e-9  # parts that add up to the limit reach it


def progress(plan: Plan, states: Mapping[int, FractionState], meterset_percent: float) -> Progress:
    """Return where the course stands after the fractions that were begun."""
    complete = sum(state.complete for state in states.values())
    for fraction in plan.fractions:
        state = states.get(fraction.number)
        if state is None or not state.complete:
            due = due_in(plan, fraction.number, state, meterset_percent)
            return replace(due, complete=complete)
    return Progress(complete)


def due_in(
    plan: Plan, number: int, state: FractionState | None, meterset_percent: float
) -> Progress:
    """Return what is due in one fraction; one beyond the prescribed count is like the last."""
    fraction = plan.fraction(min(number, len(plan.fractions)))
    allowed = slack(meterset_percent)
    names = [beam.beam for field in plan.positions[0].treated for beam in field.beams]
    parts = state.parts if state else dict.fromkeys(names, 0.0)
    ends = list(accumulate(step.weight for step in fraction.steps))
    least = min(parts.values())
    step = next(
        (
            index
            for index, (end, one) in enumerate(zip(ends, fraction.steps, strict=True))
            if least < end - allowed * one.weight
        ),
        len(ends) - 1,
    )
    before = ends[step - 1] if step else 0.0
    here = {
        name
        for name, part in parts.items()
        if part > before + allowed * fraction.steps[step].weight
    }
    begun = state is not None and bool(here)
    place = state.stood_at(len(ends)) if state and begun else fraction.steps[step].position
    return Progress(
        complete=0,
        next_fraction=number,
        step=step + 1,
        steps=len(ends),
        position=place,
        part_delivered=begun,
        due={name: max(0.0, ends[step] - part) for name, part in parts.items()},
        expected=ends[step],
        begun_beams=frozenset(here),
    )


def previous_position(
    plan: Plan, states: Mapping[int, FractionState], fraction: int, step: int = 1
) -> str | None:
    """Return the position treated before a step: as delivered, else as planned; None at the first.

    ``step`` counts the steps of a split fraction from 1.
    """
    if step > 1:
        before, planned = fraction, plan.fraction(fraction).steps[step - 2]
    elif fraction > 1:
        before, planned = fraction - 1, plan.fraction(fraction - 1).steps[-1]
    else:
        return None
    state = states.get(before)
    return state.stood_at(len(plan.fraction(before).steps)) if state else planned.position
