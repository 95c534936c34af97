"""The design in the dossier: what was asked for, before anything was solved."""

from __future__ import annotations

from itertools import pairwise
from typing import TYPE_CHECKING

from featherlog.paper.fonts import join, safe, strong
from featherlog.paper.layout import section, space
from featherlog.paper.style import grouped, para, ruled
from featherlog.words import figure, signed

if TYPE_CHECKING:
    from reportlab.platypus import Flowable, Table

    from featherlog.geometry.patient import Point
    from featherlog.junction.design import Beam, Border, Course, Field, Junction

_BEAM_HEADS = (
    "Beam", "Energy", "Weight", "Gantry°", "Coll.°", "Couch°", "Isocentre x, y, z cm", "SAD cm",
    "SSD cm", "Side jaws cm", "Edges by",
)  # fmt: skip
_BEAM_PARTS = (82, 34, 36, 40, 34, 36, 92, 38, 38, 62, 42)


def design(course: Course, width: float) -> list[Flowable]:
    """Return the prescription, fields with their beams, borders, and junctions with offsets."""
    return [
        *section("DESIGN"),
        *([para(safe(f"Note: {course.note}")), space(3)] if course.note else []),
        _prescription(course, width),
        space(5),
        *_fields(course, width),
        space(5),
        _junctions(course, width),
    ]


def _prescription(course: Course, width: float) -> Table:
    rows = [
        [
            strong(phase.name),
            safe(str(phase.fractions)),
            safe(figure(phase.dose_per_fraction_gy, most=3)),
            safe(figure(phase.fractions * phase.dose_per_fraction_gy)),
            safe(str(course.fractions_a_day)),
        ]
        for phase in course.phases
    ]
    heads = ("Prescription", "Fractions", "Gy a fraction", "Gy in all", "Fractions a day")
    return ruled(heads, rows, width, (40, 20, 20, 20, 20))


def _fields(course: Course, width: float) -> list[Flowable]:
    groups = [
        (_field_line(field), [_beam(beam) for beam in field.beams]) for field in course.fields
    ]
    borders = (("Superior", course.superior_border), ("Inferior", course.inferior_border))
    return [
        grouped(_BEAM_HEADS, groups, width, _BEAM_PARTS),
        space(2),
        *(para(safe(f"{end} border: {_border(border)}")) for end, border in borders),
    ]


def _field_line(field: Field) -> Flowable:
    return para(join("  ·  ", [strong(field.name), safe(_field_facts(field))]))


def _field_facts(field: Field) -> str:
    facts = [f"moved by {field.moved_by.value}"]
    if field.follows:
        facts.append(f"table follows junction {field.follows}")
    if field.dose_per_fraction_gy is not None:
        facts.append(f"own dose {figure(field.dose_per_fraction_gy, most=3)} Gy a fraction")
    if field.earlier is not None:
        earlier = field.earlier
        facts.append(
            f"field of the earlier course {earlier.label}: {figure(earlier.dose_gy)} Gy in "
            f"{earlier.fractions} fractions, edge at the junction "
            f"{figure(earlier.junction_reach_cm)} cm from its axis, never set"
        )
    return "; ".join(facts)


def _beam(beam: Beam) -> list[Flowable]:
    low, high = beam.side_jaws_cm
    facts = (
        beam.energy,
        f"{figure(100 * beam.weight, least=0)} %",
        figure(beam.gantry_deg),
        figure(beam.collimator_deg),
        figure(beam.couch_deg),
        _point(beam.isocentre_cm),
        figure(beam.sad_cm),
        figure(beam.ssd_cm),
        f"{figure(low)}, {figure(high)}",
        beam.edges_by.value,
    )
    return [para(strong(beam.name)), *(para(safe(fact)) for fact in facts)]


def _border(border: Border) -> str:
    if border.point_cm is None:
        return f"{figure(border.reach_cm or 0.0)} cm from the beam axis at the isocentre plane"
    kept = "held in the patient" if border.held else "travels with the isocentre"
    text = f"through {_point(border.point_cm)} cm, {kept}"
    if border.cover_x_cm is not None:
        low, high = border.cover_x_cm
        text += f", also covered at x {figure(low)} and {figure(high)} cm"
    return text


def _junctions(course: Course, width: float) -> Table:
    facts = [
        dict([*_junction(junction, upper.name, lower.name), *_offsets(course, junction)])
        for junction, (upper, lower) in zip(course.junctions, pairwise(course.fields), strict=True)
    ]
    # A line that no junction has anything to say to is left out.
    names = [name for name in facts[0] if any(each[name] for each in facts)]
    rows = [[safe(name), *(safe(each[name] or "–") for each in facts)] for name in names]
    heads = ("Junction", *(junction.name for junction in course.junctions))
    return ruled(heads, rows, width, (30, *[40] * len(facts)), strong_heads=True)


def _junction(junction: Junction, upper: str, lower: str) -> list[tuple[str, str]]:
    low, high = junction.lateral_limits_cm
    depths = ", ".join(map(figure, junction.report_depths_cm))
    critical = junction.critical
    slope = junction.skin_slope_deg
    turned = junction.turned_field
    return [
        ("fields", f"{upper} | {lower}"),
        ("technique", junction.technique.value),
        ("entrance side", junction.entrance.value),
        ("point on the entrance skin", f"{_point(junction.skin_point_cm)} cm"),
        ("match depth", _cm(junction.match_depth_cm)),
        ("skin gap asked for", _cm(junction.skin_gap_cm)),
        ("thickness to the opposite skin", _cm(junction.thickness_cm)),
        ("mismatch stated across at", f"{figure(low)} and {figure(high)} cm"),
        ("critical structure", f"{critical.name}, {_cm(critical.depth_cm)}" if critical else ""),
        ("further depths for the dose", f"{depths} cm" if depths else ""),
        ("reference dose", f"{figure(junction.reference_dose_gy)} Gy"),
        ("tolerance of a measured gap", f"±{figure(junction.gap_tolerance_cm)} cm"),
        ("slope of the skin", "not stated" if slope is None else f"{signed(slope)}°"),
        ("planned separation", _separation(junction)),
        ("turned field", f"{turned}, angles {junction.angles.value}" if turned else ""),
        ("turned onto the edge of", junction.matched_beam or ""),
    ]


def _offsets(course: Course, junction: Junction) -> list[tuple[str, str]]:
    return [
        (f"position {position.label}", f"{signed(position.offset_cm[junction.name])} cm from A")
        for position in course.positions
    ]


def _separation(junction: Junction) -> str:
    if not junction.separation_cm:
        return ""
    kind = "gap" if junction.separation_cm > 0 else "overlap"
    borne = f"borne by {junction.borne_by}" if junction.borne_by else "split evenly"
    return f"{signed(junction.separation_cm)} cm ({kind}), {borne}"


def _point(point_cm: Point) -> str:
    return ", ".join(figure(value) for value in point_cm)


def _cm(value: float | None) -> str:
    return "" if value is None else f"{figure(value)} cm"
