"""A revised design of a course that has begun: what was delivered stays, the rest is new.

A position label once treated keeps its meaning for the whole course, so that history, dose and
strips go on across revisions: a new place gets a new label. The revised plan therefore holds the
treated positions as they were, the begun fractions as they were planned, and the rest as revised.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

from featherlog.junction.plan import Plan

if TYPE_CHECKING:
    from collections.abc import Iterator, Mapping

    from featherlog.junction.plan import BeamSetting, PositionSettings
    from featherlog.sequence.progress import FractionState

# Two settings within this are the same place, cm or degrees.
_SAME = 1e-6


def continued(old: Plan, new: Plan, states: Mapping[int, FractionState]) -> Plan:
    """Return the revised plan with everything that was begun under the plan before it.

    ``states`` are the fractions begun so far. Use ``revision_faults`` first.
    """
    bound = bound_labels(old, states)
    known = {position.label for position in new.positions}
    kept = tuple(p for p in old.positions if p.label in bound and p.label not in known)
    fractions = tuple(
        old.fraction(f.number) if f.number in states and f.number <= len(old.fractions) else f
        for f in new.fractions
    )
    return Plan((*new.positions, *kept), fractions, new.warnings)


def revision_faults(old: Plan, new: Plan, states: Mapping[int, FractionState]) -> Iterator[str]:
    """Yield a sentence for every reason why a revised plan cannot go on from what was delivered.

    See ``unfinished_faults`` for fractions that must be finished first.
    """
    if _beams(old.positions[0]) != _beams(new.positions[0]):
        yield (
            "a course that has begun keeps its fields and beams, in their order; other fields are "
            "another course"
        )
        return
    for label in sorted(bound_labels(old, states)):
        if any(position.label == label for position in new.positions) and not _same_place(
            old.position(label), new.position(label)
        ):
            yield (
                f"position {label} of the fractions begun so far has other settings; give the new "
                "position a label of its own"
            )
    last = max(states, default=0)
    if last > len(new.fractions):
        yield (
            f"fraction {last} has been treated, but the revised design prescribes only "
            f"{len(new.fractions)}"
        )


def unfinished_faults(states: Mapping[int, FractionState]) -> Iterator[str]:
    """Yield a sentence for every fraction that was begun under an approved plan and not finished.

    Its remainder belongs to the plan it was begun under.
    """
    for state in states.values():
        if not state.complete:
            yield f"fraction {state.number} was begun and not finished; finish it before revising"


def bound_labels(old: Plan, states: Mapping[int, FractionState]) -> set[str]:
    """Return every position at which a fraction begun so far was planned, or some field treated."""
    treated = {
        label
        for state in states.values()
        for labels in state.field_positions.values()
        for label in labels
    }
    begun = [old.fraction(number) for number in states if number <= len(old.fractions)]
    return treated | {step.position for fraction in begun for step in fraction.steps}


def _beams(position: PositionSettings) -> list[tuple[str, str]]:
    return [(field.field, beam.beam) for field in position.fields for beam in field.beams]


def _same_place(one: PositionSettings, other: PositionSettings) -> bool:
    pairs = zip(
        (beam for field in one.fields for beam in field.beams),
        (beam for field in other.fields for beam in field.beams),
        strict=True,
    )
    return all(
        abs(a - b) <= _SAME
        for first, second in pairs
        for a, b in zip(_numbers(first), _numbers(second), strict=True)
    )


def _numbers(beam: BeamSetting) -> list[float]:
    return [
        beam.gantry_deg,
        beam.collimator_deg,
        beam.couch_deg,
        *beam.isocentre_cm,
        *beam.jaw_cm.values(),
        *beam.superior_edge.normal,
        beam.superior_edge.offset_cm,
        *beam.inferior_edge.normal,
        beam.inferior_edge.offset_cm,
    ]
