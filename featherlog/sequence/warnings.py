"""What a physicist should look at before approval, each with its figure. Nothing here refuses."""

from __future__ import annotations

from itertools import combinations, pairwise
from typing import TYPE_CHECKING

import numpy as np

from featherlog.junction.design import Angles, Technique
from featherlog.junction.hand_check import JAW_RULE, hand_checks
from featherlog.junction.pairs import worst as worst_of
from featherlog.junction.rounding import to_step
from featherlog.sequence.pattern import evener_blocks, weighted_shares
from featherlog.words import figure

if TYPE_CHECKING:
    from collections.abc import Iterator, Sequence

    from featherlog.junction.design import Course, Junction
    from featherlog.junction.machine import Machine
    from featherlog.junction.plan import BeamSetting, Mismatch, PlannedFraction, PositionSettings


def warnings(
    course: Course,
    machine: Machine,
    settings: Sequence[PositionSettings],
    fractions: Sequence[PlannedFraction],
) -> tuple[str, ...]:
    """Return one sentence for everything about a solved design that wants a second look."""
    found = [*_uneven_shares(fractions), *_not_settable(course, machine)]
    for junction in course.junctions:
        found += _skin_slope(junction)
        found += _gap_against_step(course, junction, settings)
        found += _step_against_penumbra(course, machine, junction, settings)
        found += _residual(machine, junction, settings)
    found += _same_settings(course, settings)
    found += _ssd_against_skin(course, settings[0])
    return tuple(found)


def _uneven_shares(fractions: Sequence[PlannedFraction]) -> Iterator[str]:
    counts = weighted_shares(fractions)
    # Whole fractions that do not divide by the positions leave some of them one more.
    least = 1.0 if len(fractions) % len(counts) else 0.0
    if max(counts.values()) - min(counts.values()) < least + _EVEN:
        return
    shown = ", ".join(f"{label} {count:g}" for label, count in counts.items())
    yield f"shares are uneven: {shown} of {len(fractions)} fractions{_better(fractions)}"


# Shares are the same within this part of a fraction.
_EVEN = 0.01


def _better(fractions: Sequence[PlannedFraction]) -> str:
    positions = [fraction.position for fraction in fractions]
    better = evener_blocks(positions)
    if better is None:
        return ""
    shown = ", ".join(f"{block.position} {block.last - block.first + 1}" for block in better)
    return f"; as many shift days with blocks of {shown} would be more even"


def _not_settable(course: Course, machine: Machine) -> Iterator[str]:
    """Name what is typed in the design, and so never rounded, between the machine's steps."""
    turned = {junction.turned_field for junction in course.junctions}
    steps = machine.steps
    for field in (field for field in course.fields if field.earlier is None):
        for beam in field.beams:
            typed = [("gantry angle", beam.gantry_deg, steps.angle_deg, "degrees")]
            if field.name not in turned:  # a turned field's are solved and rounded
                typed += [
                    ("collimator angle", beam.collimator_deg, steps.angle_deg, "degrees"),
                    ("couch angle", beam.couch_deg, steps.angle_deg, "degrees"),
                ]
            typed += [("side jaw", value, steps.jaw_cm, "cm") for value in beam.side_jaws_cm]
            for what, value, step, unit in typed:
                if abs(to_step(value, step) - value) > _NOISE:
                    yield (
                        f"beam {beam.name}: {what} {figure(value, 1, 4)} {unit} cannot be set in "
                        f"the machine's steps of {figure(step, 1, 4)} {unit}"
                    )


# Typed decimals are off by less than this.
_NOISE = 1e-9


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
            # Off the match depth a gap or overlap belongs to the technique.
            places = tuple(place for place in places if place.place == "match depth")
        left = [(_left_over(place, junction.separation_cm), place) for place in places]
        residual, worst = max(left, key=lambda pair: abs(pair[0]))
        if abs(residual) > machine.tolerances.jaw_cm + 1e-9:
            what = "gap" if residual > 0 else "overlap"
            beyond = " beyond the planned separation" if junction.separation_cm else ""
            held = " with held angles" if junction.angles is Angles.HELD else ""
            yield (
                f"junction {junction.name}, position {position.label}: {what} of "
                f"{abs(residual):.2f} cm{beyond}{held} at {worst.place} (x {worst.x_cm:+.1f}, y "
                f"{worst.y_cm:+.1f}), more than the jaw tolerance of "
                f"{machine.tolerances.jaw_cm:.2f} cm"
            )


def _left_over(place: Mismatch, separation_cm: float) -> float:
    """Return the mismatch beyond the planned separation (cm), of the pair of beams it is worst for.

    The pair farthest from a match need not be the one farthest from what was planned.
    """
    found = (place.rounded_cm, place.least_cm, place.most_cm)
    return worst_of(value - separation_cm for value in found if value is not None)


def _same_settings(course: Course, settings: Sequence[PositionSettings]) -> Iterator[str]:
    turned = {junction.turned_field for junction in course.junctions}
    names = {beam.name for field in course.fields if field.name in turned for beam in field.beams}
    for one, other in combinations(settings, 2):
        pairs = [
            (first, second)
            for first, second in zip(_beams(one), _beams(other), strict=True)
            if first.jaw_cm != second.jaw_cm
        ]
        where = f"positions {one.label} and {other.label} have different jaws but the same"
        meterset = [a.beam for a, b in pairs if a.meterset_mu == b.meterset_mu]
        if meterset:
            yield f"{where} MU for {', '.join(meterset)}: MU belong to a position"
        angles = [
            a.beam
            for a, b in pairs
            if a.beam in names and _turn(a) == _turn(b) and a.exact_jaw_cm != b.exact_jaw_cm
        ]
        if angles:
            yield f"{where} angles for {', '.join(angles)}: angles belong to a position"


def _beams(position: PositionSettings) -> list[BeamSetting]:
    return [beam for field in position.treated for beam in field.beams]


def _turn(beam: BeamSetting) -> tuple[float, float]:
    return beam.collimator_deg, beam.couch_deg


# An SSD and an isocentre that place the skin farther apart than this do not belong together.
_SKIN_CM = 0.5


def _ssd_against_skin(course: Course, position: PositionSettings) -> Iterator[str]:
    told = set()
    for check in hand_checks(course, (position,)):
        apart = abs(check.by_formula - check.exact) / max(check.exact, 1.0)
        if check.formula == JAW_RULE and apart > _SKIN_CM / 100 and check.subject not in told:
            told.add(check.subject)
            yield (
                f"{check.subject}: SSD and match depth give {check.by_formula:.2f} cm by hand, the "
                f"isocentre gives {check.exact:.2f} cm; SSD, skin point and isocentre disagree"
            )
