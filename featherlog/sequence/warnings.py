"""What a physicist should look at before approval, each with its figure. Nothing here refuses."""

from __future__ import annotations

from itertools import combinations, pairwise
from typing import TYPE_CHECKING

import numpy as np

from featherlog.junction.design import Technique
from featherlog.sequence.pattern import even_block, shares

if TYPE_CHECKING:
    from collections.abc import Iterator, Sequence

    from featherlog.junction.design import Course, Junction
    from featherlog.junction.machine import Machine
    from featherlog.junction.plan import PlannedFraction, PositionSettings


def warnings(
    course: Course,
    machine: Machine,
    settings: Sequence[PositionSettings],
    fractions: Sequence[PlannedFraction],
) -> tuple[str, ...]:
    """Return one sentence for everything about a solved design that wants a second look."""
    found = [*_uneven_shares([fraction.position for fraction in fractions])]
    for junction in course.junctions:
        found += _skin_slope(junction)
        found += _gap_against_step(course, junction, settings)
        found += _step_against_penumbra(course, machine, junction, settings)
        found += _residual(machine, junction, settings)
    found += _same_meterset(settings)
    return tuple(found)


def _uneven_shares(positions: list[str]) -> Iterator[str]:
    counts = shares(positions)
    if len(set(counts.values())) <= 1:
        return
    shown = ", ".join(f"{label} {count}" for label, count in counts.items())
    block = even_block(positions)
    better = f"; blocks of {block} would make them equal" if block else ""
    yield f"shares are uneven: {shown} of {len(positions)} fractions{better}"


def _skin_slope(junction: Junction) -> Iterator[str]:
    if junction.technique is Technique.SKIN_GAP and junction.skin_slope_deg is None:
        yield (
            f"junction {junction.name}: the skin slope is not entered; on a sloping surface a gap "
            "for flat skin has left 7-9 mm of overlap and 140 % (Keys & Grigsby, IJROBP "
            "1990;18:1183)"
        )


def _steps(course: Course, junction: Junction) -> list[float]:
    places = sorted({position.offset_cm[junction.name] for position in course.positions})
    return [high - low for low, high in pairwise(places)]


def _gap_against_step(
    course: Course, junction: Junction, settings: Sequence[PositionSettings]
) -> Iterator[str]:
    steps = _steps(course, junction)
    gaps = [gap for s in settings for gap in s.junction(junction.name).skin_gaps]
    if not steps or not gaps:
        return
    widest = max(gaps, key=lambda gap: abs(gap.expected_cm))
    if abs(widest.expected_cm) > min(steps) - 1e-9:
        yield (
            f"junction {junction.name}: the gap on the {widest.side} skin "
            f"({widest.expected_cm:+.2f} cm) is not smaller than the feather step "
            f"({min(steps):.2f} cm), so the {'cold' if widest.expected_cm > 0 else 'hot'} bands of "
            "neighbouring positions overlap there"
        )


def _step_against_penumbra(
    course: Course, machine: Machine, junction: Junction, settings: Sequence[PositionSettings]
) -> Iterator[str]:
    steps = _steps(course, junction)
    if not steps:
        return
    index = course.junctions.index(junction)
    energies = {b.energy for f in course.fields[index : index + 2] for b in f.beams}
    depth = settings[0].junction(junction.name).match_depth_cm
    for energy in sorted(energies):
        table = machine.quality(energy).penumbra_80_20_cm
        width = float(np.interp(depth, table.depth_cm, table.value))
        if min(steps) < width:
            yield (
                f"junction {junction.name}: the feather step ({min(steps):.2f} cm) is smaller than "
                f"the 80-20 % penumbra of {energy} at the match depth ({width:.2f} cm), so the "
                "positions hardly smear the junction out"
            )


def _residual(
    machine: Machine, junction: Junction, settings: Sequence[PositionSettings]
) -> Iterator[str]:
    for position in settings:
        places = position.junction(junction.name).mismatches
        if junction.technique is Technique.SKIN_GAP:
            places = tuple(place for place in places if place.place == "match depth")
        worst = max(places, key=lambda place: abs(place.rounded_cm))
        if abs(worst.rounded_cm) > machine.tolerances.jaw_cm + 1e-9:
            what = "gap" if worst.rounded_cm > 0 else "overlap"
            yield (
                f"junction {junction.name}, position {position.label}: {what} of "
                f"{abs(worst.rounded_cm):.2f} cm at {worst.place} (x {worst.x_cm:+.1f}, y "
                f"{worst.y_cm:+.1f}), more than the jaw tolerance of "
                f"{machine.tolerances.jaw_cm:.2f} cm"
            )


def _same_meterset(settings: Sequence[PositionSettings]) -> Iterator[str]:
    for one, other in combinations(settings, 2):
        beams = zip(
            (b for f in one.fields for b in f.beams),
            (b for f in other.fields for b in f.beams),
            strict=True,
        )
        same = [
            first.beam
            for first, second in beams
            if first.jaw_cm != second.jaw_cm and first.meterset_mu == second.meterset_mu
        ]
        if same:
            yield (
                f"positions {one.label} and {other.label} have different jaws but the same MU for "
                f"{', '.join(same)}: MU belong to a position"
            )
