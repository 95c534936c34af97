"""Courses and machines built by hand for the tests of the pure rooms: one place that builds each.

Fields run from superior to inferior; points are in patient axes (x left, y posterior, z superior).
"""

from __future__ import annotations

from dataclasses import replace
from datetime import date
from typing import TYPE_CHECKING

from featherlog.geometry.patient import PatientPosition, Point
from featherlog.junction.design import (
    Angles,
    Beam,
    Border,
    Course,
    CriticalStructure,
    EarlierCourse,
    EdgesBy,
    Field,
    Junction,
    MovedBy,
    Pattern,
    Phase,
    Position,
    SequencePattern,
    Side,
    Technique,
    Weekday,
)
from featherlog.junction.machine import (
    BeamQuality,
    DepthTable,
    Jaw,
    Machine,
    Range,
    Steps,
    Tolerances,
)

if TYPE_CHECKING:
    from collections.abc import Sequence

HFS, HFP, FFS, FFP = PatientPosition
ENERGY = "6 MV"
# So fine that a jaw after rounding differs from the exact one by less than any check can see.
FINE = Steps(jaw_cm=1e-6, table_cm=1e-6, angle_deg=1e-6)
WORKDAYS = tuple(Weekday)[:5]


def machine(
    *,
    steps: Steps = FINE,
    travel: dict[Jaw, Range] | None = None,
    opening_cm: float = 80.0,
    gantry_deg: tuple[float, float] = (0, 360),
    couch_deg: tuple[float, float] = (-95, 95),
) -> Machine:
    """Give a machine of SAD 100 whose wide limits only bite where a test narrows them."""
    penumbra = DepthTable((0.0, 30.0), (0.4, 1.0))
    return Machine(
        name="Alder",
        sad_cm=100.0,
        jaw_travel_cm={jaw: Range(-60, 60) for jaw in Jaw} | (travel or {}),
        largest_opening_cm=opening_cm,
        gantry_deg=Range(*gantry_deg),
        collimator_deg=Range(-180, 180),
        couch_deg=Range(*couch_deg),
        steps=steps,
        tolerances=Tolerances(jaw_cm=0.1, table_cm=0.2, angle_deg=1.0, meterset_percent=2.0),
        qualities=(BeamQuality(ENERGY, penumbra, 0.005),),
    )


def held(x_cm: float, y_cm: float, z_cm: float) -> Border:
    """Give an outer border that stays in the patient."""
    return Border((x_cm, y_cm, z_cm), held=True)


def free(x_cm: float, y_cm: float, z_cm: float) -> Border:
    """Give an outer border that travels with the isocentre."""
    return Border((x_cm, y_cm, z_cm))


def reach(reach_cm: float) -> Border:
    """Give an outer border by its jaw's distance from the beam axis."""
    return Border(reach_cm=reach_cm)


def beam(
    name: str,
    gantry_deg: float,
    isocentre_cm: Point,
    *,
    collimator_deg: float = 0.0,
    couch_deg: float = 0.0,
    weight: float = 1.0,
    sad_cm: float = 100.0,
    ssd_cm: float = 95.0,
    edges_by: EdgesBy = EdgesBy.JAWS,
) -> Beam:
    return Beam(
        name=name,
        energy=ENERGY,
        gantry_deg=gantry_deg,
        collimator_deg=collimator_deg,
        couch_deg=couch_deg,
        isocentre_cm=isocentre_cm,
        sad_cm=sad_cm,
        ssd_cm=ssd_cm,
        side_jaws_cm=(-5.0, 5.0),
        weight=weight,
        edges_by=edges_by,
    )


def field(
    name: str, *beams: Beam, follows: str | None = None, earlier: EarlierCourse | None = None
) -> Field:
    """Give a field of equally weighted beams, moved by the couch when it follows a junction."""
    weighted = tuple(replace(one, weight=1 / len(beams)) for one in beams)
    moved_by = MovedBy.COUCH if follows else MovedBy.JAWS
    return Field(name, weighted, moved_by, follows, earlier=earlier)


def junction(
    name: str,
    skin_point_cm: Point,
    depth_cm: float | None,
    *,
    entrance: Side = Side.POSTERIOR,
    technique: Technique = Technique.SKIN_GAP,
    skin_gap_cm: float | None = None,
    thickness_cm: float | None = None,
    lateral_limits_cm: tuple[float, float] = (-3.0, 3.0),
    critical_depth_cm: float | None = None,
    skin_slope_deg: float | None = 0.0,
    separation_cm: float = 0.0,
    borne_by: str | None = None,
    turned_field: str | None = None,
    matched_beam: str | None = None,
    angles: Angles = Angles.RECOMPUTED,
) -> Junction:
    """Give a junction; one with a turned field is rotated, whatever technique is named."""
    critical = None if critical_depth_cm is None else CriticalStructure("cord", critical_depth_cm)
    return Junction(
        name=name,
        technique=Technique.ROTATED if turned_field else technique,
        entrance=entrance,
        skin_point_cm=skin_point_cm,
        match_depth_cm=depth_cm,
        skin_gap_cm=skin_gap_cm,
        thickness_cm=thickness_cm,
        lateral_limits_cm=lateral_limits_cm,
        critical=critical,
        report_depths_cm=(),
        reference_dose_gy=36.0,
        gap_tolerance_cm=0.3,
        skin_slope_deg=skin_slope_deg,
        separation_cm=separation_cm,
        borne_by=borne_by,
        turned_field=turned_field,
        matched_beam=matched_beam,
        angles=angles,
    )


def sequence(
    pattern: Pattern = Pattern.BLOCKS,
    positions: Sequence[str] = ("A", "B", "C"),
    block_fractions: int | None = 5,
    *,
    start_date: date = date(2031, 3, 3),
    weekdays: tuple[Weekday, ...] = WORKDAYS,
    closed_dates: tuple[date, ...] = (),
) -> SequencePattern:
    """Give an assignment rule; 3 March 2031 is a Monday."""
    return SequencePattern(
        pattern, tuple(positions), block_fractions, start_date, weekdays, closed_dates
    )


def course(
    position: PatientPosition,
    fields: Sequence[Field],
    junctions: Sequence[Junction],
    borders: tuple[Border, Border],
    *,
    offsets_cm: Sequence[float | dict[str, float]] = (0.0,),
    fractions: int = 20,
    order: SequencePattern | None = None,
) -> Course:
    """Give a course whose positions A, B, C… lie at the offsets, by one number or by junction."""
    labels = tuple("ABCDEFG"[: len(offsets_cm)])
    names = [one.name for one in junctions]
    beams = [one.name for each in fields for one in each.beams]
    positions = tuple(
        Position(
            label=label,
            offset_cm=offset if isinstance(offset, dict) else dict.fromkeys(names, offset),
            meterset_mu=dict.fromkeys(beams, 100.0 + number),
        )
        for number, (label, offset) in enumerate(zip(labels, offsets_cm, strict=True))
    )
    return Course(
        key="finch-2031",
        patient_name="Rowan Finch",
        identifiers={"Hospital number": "FH-004217", "Born": "2019-04-02"},
        site="craniospinal axis",
        plan_label="CSI-1",
        note="",
        patient_position=position,
        machine="Alder",
        fractions_a_day=1,
        phases=(Phase("Phase 1", fractions, 1.8),),
        fields=tuple(fields),
        superior_border=borders[0],
        inferior_border=borders[1],
        junctions=tuple(junctions),
        positions=positions,
        sequence=order or sequence(positions=labels),
    )


def posterior_gantry(position: PatientPosition) -> float:
    return 180.0 if position in (HFS, FFS) else 0.0


def spine(
    position: PatientPosition = HFS,
    *,
    brain_follows: str | None = None,
    upper_follows: str | None = None,
    lower_follows: str | None = None,
    offsets_cm: Sequence[float | dict[str, float]] = (0.0, -1.0, -2.0),
    fractions: int = 20,
    order: SequencePattern | None = None,
    borders: tuple[Border, Border] | None = None,
    angles: Angles = Angles.RECOMPUTED,
) -> Course:
    """Give two laterals turned onto the upper of two posterior spine fields, matched at 5 and 6 cm.

    It is the course of the known answers (derived): SAD 100, posterior skin at y = 0.
    """
    gantry = posterior_gantry(position)
    laterals = (
        beam("left lateral", 90, (0, -8, 9)),
        beam("right lateral", 270, (0, -8, 9)),
    )
    return course(
        position,
        (
            field("BRAIN", *laterals, follows=brain_follows),
            field("UPPER", beam("upper", gantry, (0, 0, -14)), follows=upper_follows),
            field("LOWER", beam("lower", gantry, (0, 0, -44)), follows=lower_follows),
        ),
        (
            junction("J1", (0, 0, 0), 5.0, turned_field="BRAIN", angles=angles),
            junction("J2", (0, 0, -30), 6.0),
        ),
        borders or (held(0, -8, 20), held(0, -6, -56)),
        offsets_cm=offsets_cm,
        fractions=fractions,
        order=order,
    )


def pair(
    upper: Sequence[Beam],
    lower: Sequence[Beam],
    between: Junction,
    *,
    position: PatientPosition = HFS,
    follows: str | None = None,
    offsets_cm: Sequence[float] = (0.0,),
    borders: tuple[Border, Border] = (reach(15.0), reach(15.0)),
) -> Course:
    """Give two fields with one junction between them, their outer ends set by the jaw."""
    fields = (field("UPPER", *upper, follows=follows), field("LOWER", *lower, follows=follows))
    return course(position, fields, (between,), borders, offsets_cm=offsets_cm)
