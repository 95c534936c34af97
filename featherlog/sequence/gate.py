"""The equality gate: finish before shifting.

A shift is allowed only when every field of the finished fractions is complete and both sides of
each junction have had equal fractions; otherwise the next step is to finish, not to shift (Bentel
& Halperin, Med Dosim 1990;15:179, an unequal-dose shift).
"""

from __future__ import annotations

import math
from itertools import pairwise
from typing import TYPE_CHECKING

from featherlog.sequence.progress import slack

if TYPE_CHECKING:
    from collections.abc import Mapping

    from featherlog.junction.plan import Plan
    from featherlog.sequence.progress import FractionState


def unequal_sides(
    plan: Plan,
    states: Mapping[int, FractionState],
    next_fraction: int,
    meterset_percent: float,
) -> tuple[str, ...]:
    """Return a sentence for every reason why the next fraction may not be at a new position.

    ``meterset_percent`` is the tolerance within which a meterset counts as delivered in full.
    """
    before = {number: state for number, state in states.items() if number != next_fraction}
    unfinished = [number for number, state in before.items() if not state.complete]
    reasons = [f"fraction {number} was begun and not finished" for number in unfinished]
    had = whole_fractions(plan, before, meterset_percent)
    reasons += [
        f"fields {upper} and {lower} have had {had[upper]} and {had[lower]} whole fractions"
        for upper, lower in pairwise(had)
        if had[upper] != had[lower]
    ]
    return tuple(reasons)


def whole_fractions(
    plan: Plan, states: Mapping[int, FractionState], meterset_percent: float
) -> dict[str, int]:
    """Return how many whole fractions each field has had, by every one of its beams.

    One given twice under one fraction number counts as two; a part is none.
    """
    allowed = slack(meterset_percent)
    return {
        field.field: sum(
            min(math.floor(state.parts[beam.beam] + allowed) for beam in field.beams)
            for state in states.values()
        )
        for field in plan.positions[0].treated
    }
