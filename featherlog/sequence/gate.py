"""The equality gate: finish before shifting.

A shift is allowed only when every field of the finished fractions is complete and both sides of
each junction have had equal fractions; otherwise the next step is to finish, not to shift (Bentel
& Halperin, Med Dosim 1990;15:179, an unequal-dose shift).
"""

from __future__ import annotations

from itertools import pairwise
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Mapping

    from featherlog.junction.plan import Plan
    from featherlog.sequence.progress import FractionState

# Sides are compared in whole fractions; smaller differences of meterset are departures.
_APART = 0.5


def unequal_sides(
    plan: Plan, states: Mapping[int, FractionState], next_fraction: int
) -> tuple[str, ...]:
    """Return a sentence for every reason why the next fraction may not be at a new position."""
    before = {number: state for number, state in states.items() if number != next_fraction}
    unfinished = [number for number, state in before.items() if not state.complete]
    reasons = [f"fraction {number} was begun and not finished" for number in unfinished]
    given = fractions_given(plan, before)
    reasons += [
        f"fields {upper} and {lower} have had {given[upper]:.2f} and {given[lower]:.2f} fractions"
        for upper, lower in pairwise(given)
        if abs(given[upper] - given[lower]) >= _APART
    ]
    return tuple(reasons)


def fractions_given(plan: Plan, states: Mapping[int, FractionState]) -> dict[str, float]:
    """Return how many fractions' worth of meterset each field has had, beams by their weight."""
    return {
        field.field: sum(
            state.parts[beam.beam] * beam.weight
            for state in states.values()
            for beam in field.beams
        )
        for field in plan.positions[0].treated
    }
