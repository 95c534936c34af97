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


@dataclass(frozen=True, slots=True)
class Progress:
    """Where the course stands, and what is due.

    ``next_fraction`` is None when every fraction is complete. ``step`` counts the steps of a
    fraction that is split over positions, from 1. ``position`` is where the step is to be treated:
    its planned position, or where it began when ``part_delivered``. ``due`` is each beam's part of
    its meterset still to be given in this step; ``started`` and ``expected`` are its parts before
    and after the step. ``begun_beams`` have had some of their meterset in this step, and
    ``begun_at`` is where their fields were treated, in the order they were.
    """

    complete: int
    next_fraction: int | None = None
    step: int = 1
    steps: int = 1
    position: str | None = None
    part_delivered: bool = False
    due: Mapping[str, float] = field(default_factory=dict)
    started: float = 0.0
    expected: float = 1.0
    begun_beams: frozenset[str] = frozenset()
    begun_at: Mapping[str, str] = field(default_factory=dict)


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
    begun_at = _begun_at(plan, state, here) if state else {}
    return Progress(
        complete=0,
        next_fraction=number,
        step=step + 1,
        steps=len(ends),
        position=_place(state, begun_at, fraction.steps[step].position, whole=len(ends) == 1),
        part_delivered=bool(begun_at),
        begun_at=begun_at,
        due={name: max(0.0, ends[step] - part) for name, part in parts.items()},
        started=before,
        expected=ends[step],
        begun_beams=frozenset(here),
    )


def _place(
    state: FractionState | None, begun_at: Mapping[str, str], planned: str, *, whole: bool
) -> str:
    """Return where the step is to be treated: where it began, wherever it went on since."""
    if state is not None and begun_at and whole:
        return state.began_at
    return next(iter(begun_at.values()), planned)


def _begun_at(plan: Plan, state: FractionState, beams: set[str]) -> dict[str, str]:
    """Return where each field with one of these beams was treated last, in treatment order."""
    begun = {
        one.field
        for one in plan.positions[0].treated
        if any(beam.beam in beams for beam in one.beams)
    }
    return {name: place for name, place in state.last_position.items() if name in begun}


def last_positions(
    plan: Plan, states: Mapping[int, FractionState], due: Progress
) -> dict[str, str]:
    """Return where each field stands before the step that is due; empty at the first.

    A field already treated in this step stands there; another where it was treated last, or else
    where it was planned to be.
    """
    number = due.next_fraction
    if number is None:
        return {}
    if due.step > 1:
        before, planned = number, plan.fraction(number).steps[due.step - 2].position
    elif number > 1:
        before, planned = number - 1, plan.fraction(number - 1).steps[-1].position
    else:
        return dict(due.begun_at)
    state = states.get(before)
    known = state.last_position if state else {}
    return {
        one.field: due.begun_at.get(one.field, known.get(one.field, planned))
        for one in plan.positions[0].treated
    }
