"""Textbook formulas with their numbers, beside what the edge planes give, for a checker's pencil.

Everything is before rounding, so that the two agree wherever the formula is exact. Lengths in cm,
angles in degrees.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from itertools import pairwise, product
from typing import TYPE_CHECKING

from featherlog.geometry.frames import patient_from_beam
from featherlog.junction.design import Technique
from featherlog.junction.machine import Jaw
from featherlog.junction.points import OUTWARD
from featherlog.words import figure

if TYPE_CHECKING:
    from collections.abc import Iterator

    from featherlog.junction.design import Course, Junction
    from featherlog.junction.plan import (
        BeamSetting,
        FieldSetting,
        JunctionSetting,
        PositionSettings,
    )

JAW_RULE = "jaw = distance from the beam axis × SAD / distance from the source"
GAP_RULE = "gap = depth × (j1 / SAD1 + j2 / SAD2)"
OVERLAP_RULE = "overlap = (j1 / SAD1 − j2 / SAD2) × (depth of structure − match depth)"
COLLIMATOR_RULE = "collimator ≈ atan(neighbour's jaw toward the junction / SAD)"
COUCH_RULE = "couch ≈ atan(own jaw toward the junction after turning / SAD)"
COLLIMATOR_EXACT = "tan(collimator) = (neighbour's jaw / SAD) / cos(couch)"
COUCH_EXACT = "tan(couch) = (own jaw after turning / SAD) / cos(collimator)"
HALF_BEAM_RULE = (
    "mismatch ≈ δ / SAD × (s1 − s2), δ the junction off the axis, s the distance past the "
    "isocentre along the superior (1) and inferior (2) beam, less the match point's"
)
KHAN = "Khan, The Physics of Radiation Therapy, adjacent fields (from memory)"
SIMILAR = "similar triangles"
DIVERGENCE = "derived from the divergence of two beams of one isocentre and SAD"
SAGITTAL = "derived; a lateral beam against a neighbour in the sagittal plane"


@dataclass(frozen=True, slots=True)
class HandCheck:
    """One formula with its numbers: ``by_formula`` beside ``exact``, both in ``unit``."""

    position: str
    subject: str
    formula: str
    numbers: str
    by_formula: float
    exact: float
    unit: str
    source: str


def hand_checks(course: Course, positions: tuple[PositionSettings, ...]) -> tuple[HandCheck, ...]:
    """Return every textbook formula that applies to a solved design, position by position."""
    return tuple(
        check
        for position in positions
        for junction, fields in zip(course.junctions, pairwise(position.fields), strict=True)
        for check in _junction(
            course, junction, position.label, position.junction(junction.name), fields
        )
    )


def _junction(
    course: Course,
    junction: Junction,
    label: str,
    setting: JunctionSetting,
    fields: tuple[FieldSetting, FieldSetting],
) -> Iterator[HandCheck]:
    turned = junction.turned_field
    for field, end in zip(fields, ("inferior", "superior"), strict=True):
        if field.field == turned:
            neighbour = fields[1] if field is fields[0] else fields[0]
            yield from _turned(junction, label, field, neighbour, end)
        elif not field.earlier_course and not junction.separation_cm:
            for beam in field.beams:
                jaw = beam.inferior_jaw if end == "inferior" else beam.superior_jaw
                entry = entry_depth(course, junction, setting, beam)
                yield from _jaw(junction, label, beam, setting, entry=entry, jaw=jaw)
    if turned is None and not junction.separation_cm:
        yield from _half_beam(course, junction, label, setting, fields)
        pair = _square_pair(course, junction, fields)
        if pair is not None:
            yield from _gaps(junction, label, setting, pair)
            yield from _overlap(junction, label, setting, pair)


def _jaw(
    junction: Junction,
    label: str,
    beam: BeamSetting,
    setting: JunctionSetting,
    *,
    entry: tuple[float, float] | None,
    jaw: Jaw,
) -> Iterator[HandCheck]:
    if entry is None:
        return
    edge_z = setting.match_point_cm[2]
    across = abs(edge_z - beam.isocentre_cm[2])
    ssd, depth = entry
    yield HandCheck(
        label,
        f"{beam.beam}, jaw {jaw} toward {junction.name}",
        JAW_RULE,
        f"{across:.3f} × {beam.sad_cm:.1f} / ({ssd:.2f} + {depth:.2f})",
        across * beam.sad_cm / (ssd + depth),
        abs(beam.exact_jaw_cm[jaw]),
        "cm",
        SIMILAR,
    )


def entry_depth(
    course: Course, junction: Junction, setting: JunctionSetting, beam: BeamSetting
) -> tuple[float, float] | None:
    """Return a beam's SSD and its depth to the match point (cm), where it enters square to a skin.

    None for a turned or oblique beam, and where the skin it enters is not known.
    """
    facing = _facing(course, junction, beam)
    if facing == 1:
        # Below the skin where the SSD was taken, which a table move along a slope raises or lowers.
        planned_cm = next(one.ssd_cm for one in course.beams if one.name == beam.beam)
        return beam.ssd_cm, setting.match_depth_cm + planned_cm - beam.ssd_cm
    if facing == -1 and junction.thickness_cm is not None:
        return beam.ssd_cm, junction.thickness_cm - setting.match_depth_cm
    return None


def _facing(course: Course, junction: Junction, beam: BeamSetting) -> int:
    """Return 1 for a straight beam square to the entrance skin, -1 to the opposite one, else 0."""
    if not _straight(beam):
        return 0
    axis, sign = OUTWARD[junction.entrance]
    toward = patient_from_beam(course.patient_position, beam.gantry_deg, 0.0, 0.0)[axis, 2]
    return int(round(float(sign * toward), 6))


def _square_pair(
    course: Course, junction: Junction, fields: tuple[FieldSetting, FieldSetting]
) -> tuple[BeamSetting, BeamSetting] | None:
    """Return a beam of each field that enter the entrance skin squarely; None where none do."""
    upper, lower = (
        next((beam for beam in field.beams if _facing(course, junction, beam) == 1), None)
        for field in fields
    )
    return None if upper is None or lower is None else (upper, lower)


def _gaps(
    junction: Junction,
    label: str,
    setting: JunctionSetting,
    pair: tuple[BeamSetting, BeamSetting],
) -> Iterator[HandCheck]:
    upper, lower = pair
    gap = next(gap for gap in setting.skin_gaps if gap.side == junction.entrance.value)
    j1, j2 = _toward(upper, upper.inferior_jaw), _toward(lower, lower.superior_jaw)
    depth = setting.match_depth_cm
    yield HandCheck(
        label,
        f"gap on the {gap.side} skin at {setting.junction}",
        GAP_RULE,
        f"{depth:.3f} × ({j1:.3f} / {upper.sad_cm:.1f} + {j2:.3f} / {lower.sad_cm:.1f})",
        depth * (j1 / upper.sad_cm + j2 / lower.sad_cm),
        gap.exact_cm,
        "cm",
        KHAN,
    )


def _overlap(
    junction: Junction,
    label: str,
    setting: JunctionSetting,
    pair: tuple[BeamSetting, BeamSetting],
) -> Iterator[HandCheck]:
    if setting.three_field_overlap_cm is None or junction.critical is None:
        return
    upper, lower = pair
    j1, j2 = _toward(upper, upper.inferior_jaw), _toward(lower, lower.superior_jaw)
    beyond = abs(junction.critical.depth_cm - setting.match_depth_cm)
    yield HandCheck(
        label,
        f"three-field overlap at {junction.critical.name}",
        OVERLAP_RULE,
        f"({j1:.3f} / {upper.sad_cm:.1f} − {j2:.3f} / {lower.sad_cm:.1f}) × {beyond:.3f}",
        abs(j1 / upper.sad_cm - j2 / lower.sad_cm) * beyond,
        setting.three_field_overlap_cm,
        "cm",
        KHAN,
    )


def _half_beam(
    course: Course,
    junction: Junction,
    label: str,
    setting: JunctionSetting,
    fields: tuple[FieldSetting, FieldSetting],
) -> Iterator[HandCheck]:
    """Yield what half beams of different gantry angles leave, where it is worst.

    An edge through the match point at δ from the axis lies at δ·(SAD + s)/(SAD + s_match): to first
    order δ/SAD times how much farther past the isocentre than the match point it is looked at.
    """
    beams = [beam for field in fields for beam in field.beams]
    at, sads = {beam.isocentre_cm for beam in beams}, {beam.sad_cm for beam in beams}
    gantries = {round(beam.gantry_deg % 360.0, 6) for beam in beams}
    new = not any(field.earlier_course for field in fields)
    half = new and junction.technique is Technique.HALF_BEAM and all(map(_straight, beams))
    if not half or len(at) > 1 or len(sads) > 1 or len(gantries) == 1:
        return
    place = max(setting.mismatches, key=lambda each: abs(each.exact_cm))
    (isocentre,), (sad,) = at, sads
    delta = setting.match_point_cm[2] - isocentre[2]

    def past(beam: BeamSetting) -> float:
        toward = patient_from_beam(course.patient_position, beam.gantry_deg, 0.0, 0.0)[:, 2]
        x, y, _ = setting.match_point_cm
        return float(toward[0] * (x - place.x_cm) + toward[1] * (y - place.y_cm))

    pairs = [
        (past(above), past(below), above, below)
        for above, below in product(fields[0].beams, fields[1].beams)
    ]
    sign = math.copysign(delta, place.exact_cm * delta)  # of the pairs, the one that is worst there
    s1, s2, above, below = max(pairs, key=lambda pair: sign * (pair[0] - pair[1]))
    yield HandCheck(
        label,
        f"{above.beam} and {below.beam} at {place.place} "
        f"(x {figure(place.x_cm)}, y {figure(place.y_cm)})",
        HALF_BEAM_RULE,
        f"{figure(delta, 3, 3)} / {sad:.1f} × ({figure(s1, 3, 3)} − ({figure(s2, 3, 3)}))",
        delta / sad * (s1 - s2) + 0.0,
        place.exact_cm,
        "cm",
        DIVERGENCE,
    )


def _turned(
    junction: Junction, label: str, field: FieldSetting, neighbour: FieldSetting, end: str
) -> Iterator[HandCheck]:
    wanted = junction.matched_beam or neighbour.beams[0].beam
    matched = next(beam for beam in neighbour.beams if beam.beam == wanted)
    theirs = matched.superior_jaw if end == "inferior" else matched.inferior_jaw
    j_theirs = abs(matched.exact_jaw_cm[theirs])
    neighbours = f"{j_theirs:.3f} / {matched.sad_cm:.1f}", j_theirs / matched.sad_cm
    for beam in field.beams:
        own = beam.inferior_jaw if end == "inferior" else beam.superior_jaw
        j_own = abs(beam.exact_jaw_cm[own])
        owns = f"{j_own:.3f} / {beam.sad_cm:.1f}", j_own / beam.sad_cm
        collimator, couch = abs(beam.exact_collimator_deg), abs(beam.exact_couch_deg)
        yield _angle(
            label, f"{beam.beam}, collimator angle", COLLIMATOR_RULE, neighbours, collimator
        )
        yield _angle(label, f"{beam.beam}, couch angle", COUCH_RULE, owns, couch)
        if _lateral(beam) and _sagittal(matched):
            yield _angle(
                label,
                f"{beam.beam}, collimator angle",
                COLLIMATOR_EXACT,
                neighbours,
                collimator,
                over=couch,
            )
            yield _angle(
                label, f"{beam.beam}, couch angle", COUCH_EXACT, owns, couch, over=collimator
            )


def _angle(
    label: str,
    subject: str,
    formula: str,
    ratio: tuple[str, float],
    exact_deg: float,
    *,
    over: float | None = None,
) -> HandCheck:
    """Return an angle by its tangent: a ratio, over the cosine of another angle where given."""
    numbers, tangent = ratio
    if over is not None:
        numbers += f" / cos {over:.3f}°"
        tangent /= math.cos(math.radians(over))
    source = KHAN if over is None else SAGITTAL
    by_formula = math.degrees(math.atan(tangent))
    return HandCheck(
        label, subject, formula, f"atan({numbers})", by_formula, exact_deg, "degrees", source
    )


def _toward(beam: BeamSetting, jaw: Jaw) -> float:
    """Return a jaw's distance from the axis (cm), positive on its own side, before rounding."""
    value = beam.exact_jaw_cm[jaw]
    return value if jaw in (Jaw.X2, Jaw.Y2) else -value


def _straight(beam: BeamSetting) -> bool:
    square = beam.exact_collimator_deg % 90 == 0  # a jaw across the axis
    return square and beam.couch_deg == 0 and beam.exact_couch_deg == 0


def _lateral(beam: BeamSetting) -> bool:
    return beam.gantry_deg % 180 == 90  # noqa: PLR2004 - gantry 90 and 270


def _sagittal(beam: BeamSetting) -> bool:
    return beam.gantry_deg % 180 == 0 and _straight(beam)
