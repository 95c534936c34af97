"""Small plans written out by hand for head-first supine patients, collimator and couch at 0.

Edge planes come from similar triangles here, not from the program's own geometry.
"""

from __future__ import annotations

import math
from datetime import date

from featherlog.geometry.patient import PatientPosition
from featherlog.geometry.planes import EdgePlane
from featherlog.junction.design import (
    Beam,
    Border,
    Course,
    CriticalStructure,
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
from featherlog.junction.plan import (
    BeamSetting,
    FieldSetting,
    FractionStep,
    JunctionSetting,
    Plan,
    PlannedFraction,
    PositionSettings,
)

SAD_CM = 100.0
MATCH_DEPTH_CM = 5.0


def toward_source(gantry_deg: float) -> tuple[float, float]:
    """Patient x and y of the direction to the source; gantry 0 is anterior, 90 is left."""
    angle = math.radians(gantry_deg)
    return math.sin(angle), -math.cos(angle)


def edge(jaw_cm: float, gantry_deg: float, isocentre_cm: tuple[float, float, float]) -> EdgePlane:
    x, y = (jaw_cm / SAD_CM * part for part in toward_source(gantry_deg))
    return EdgePlane(
        (x, y, 1.0), jaw_cm + x * isocentre_cm[0] + y * isocentre_cm[1] + isocentre_cm[2]
    )


def beam(
    name: str,
    *,
    inferior_jaw_cm: float,
    superior_jaw_cm: float,
    gantry_deg: float = 180.0,
    isocentre_cm: tuple[float, float, float] = (0.0, -MATCH_DEPTH_CM, 0.0),
    ssd_cm: float = SAD_CM - MATCH_DEPTH_CM,
    weight: float = 1.0,
    energy: str = "6 MV",
) -> BeamSetting:
    jaws = {Jaw.X1: -5.0, Jaw.X2: 5.0, Jaw.Y1: inferior_jaw_cm, Jaw.Y2: superior_jaw_cm}
    return BeamSetting(
        beam=name,
        energy=energy,
        weight=weight,
        gantry_deg=gantry_deg,
        collimator_deg=0.0,
        couch_deg=0.0,
        isocentre_cm=isocentre_cm,
        ssd_cm=ssd_cm,
        meterset_mu=100.0,
        jaw_cm=jaws,
        exact_jaw_cm=jaws,
        superior_jaw=Jaw.Y2,
        inferior_jaw=Jaw.Y1,
        superior_edge=edge(superior_jaw_cm, gantry_deg, isocentre_cm),
        inferior_edge=edge(inferior_jaw_cm, gantry_deg, isocentre_cm),
        sad_cm=SAD_CM,
        exact_collimator_deg=0.0,
        exact_couch_deg=0.0,
        edges_by="jaws",
    )


def position(
    label: str, fields: list[list[BeamSetting]], junctions: tuple[JunctionSetting, ...] = ()
) -> PositionSettings:
    still = (0.0, 0.0, 0.0)
    return PositionSettings(
        label,
        tuple(
            FieldSetting(f"FIELD {number}", "jaws", 0.0, still, still, tuple(beams))
            for number, beams in enumerate(fields, start=1)
        ),
        junctions,
    )


def plan(positions: list[PositionSettings], fractions: list[tuple[str, float]]) -> Plan:
    return Plan(
        tuple(positions),
        tuple(
            PlannedFraction(number, "whole", dose_gy, (FractionStep(label, 1.0),))
            for number, (label, dose_gy) in enumerate(fractions, start=1)
        ),
        (),
    )


def half_beam_position(label: str, offset_cm: float, gap_cm: float = 0.0) -> PositionSettings:
    """UPPER and LOWER meet at ``offset_cm`` on the match depth, posterior, one isocentre."""
    match = JunctionSetting(
        junction="spine",
        offset_cm=offset_cm,
        match_point_cm=(0.0, -MATCH_DEPTH_CM, offset_cm),
        match_depth_cm=MATCH_DEPTH_CM,
        skin_gaps=(),
        mismatches=(),
        rounding_cm=0.0,
        depth_below_skin_cm=MATCH_DEPTH_CM,
        separation_cm=0.0,
        three_field_overlap_cm=None,
        gap_without_overlap_cm=None,
    )
    upper = beam("UPPER", inferior_jaw_cm=offset_cm + gap_cm / 2, superior_jaw_cm=15.0)
    lower = beam("LOWER", inferior_jaw_cm=-15.0, superior_jaw_cm=offset_cm - gap_cm / 2)
    return position(label, [[upper], [lower]], (match,))


def half_beam_plan(labels: str, dose_gy: float = 1.8, gap_cm: float = 0.0) -> Plan:
    """Positions A, B, C a step of 1 cm apart toward the feet; ``labels`` is one for a fraction."""
    offsets = {"A": 0.0, "B": -1.0, "C": -2.0}
    positions = [half_beam_position(label, z, gap_cm) for label, z in offsets.items()]
    return plan(positions, [(label, dose_gy) for label in labels])


def quality(
    width_cm: float | tuple[float, ...] = 0.5,
    *,
    depth_cm: tuple[float, ...] = (0.0,),
    transmission: float = 0.0,
    name: str = "6 MV",
) -> BeamQuality:
    widths = (width_cm,) if isinstance(width_cm, float) else width_cm
    return BeamQuality(name, DepthTable(depth_cm, widths), transmission)


def machine(*qualities: BeamQuality) -> Machine:
    whole_turn = Range(-360.0, 360.0)
    return Machine(
        name="Alder",
        sad_cm=SAD_CM,
        jaw_travel_cm={jaw: Range(-20.0, 20.0) for jaw in Jaw},
        largest_opening_cm=40.0,
        gantry_deg=whole_turn,
        collimator_deg=whole_turn,
        couch_deg=whole_turn,
        steps=Steps(0.1, 0.1, 1.0),
        tolerances=Tolerances(0.1, 0.2, 1.0, 2.0),
        qualities=qualities or (quality(),),
    )


def course(
    fractions: int, dose_gy: float = 1.8, report_depths_cm: tuple[float, ...] = ()
) -> Course:
    """The design of the half-beam plan: what the dose reads from it is the junction."""
    junction = Junction(
        name="spine",
        technique=Technique.HALF_BEAM,
        entrance=Side.POSTERIOR,
        skin_point_cm=(0.0, 0.0, 0.0),
        match_depth_cm=MATCH_DEPTH_CM,
        skin_gap_cm=None,
        thickness_cm=None,
        lateral_limits_cm=(-5.0, 5.0),
        critical=CriticalStructure("spinal cord", MATCH_DEPTH_CM),
        report_depths_cm=report_depths_cm,
        reference_dose_gy=fractions * dose_gy,
        gap_tolerance_cm=0.2,
        skin_slope_deg=0.0,
    )
    return Course(
        key="rowan",
        patient_name="Rowan Finch",
        identifiers={"hospital number": "0001"},
        site="spine",
        plan_label="SPINE",
        note="",
        patient_position=PatientPosition.HFS,
        machine="Alder",
        fractions_a_day=1,
        phases=(Phase("whole", fractions, dose_gy),),
        fields=tuple(_field(name) for name in ("UPPER", "LOWER")),
        superior_border=Border(reach_cm=15.0),
        inferior_border=Border(reach_cm=15.0),
        junctions=(junction,),
        positions=tuple(
            Position(label, {"spine": z}, {"UPPER": 100.0, "LOWER": 100.0})
            for label, z in (("A", 0.0), ("B", -1.0), ("C", -2.0))
        ),
        sequence=SequencePattern(
            Pattern.LIST, ("A",) * fractions, None, date(2031, 1, 6), tuple(Weekday)[:5], ()
        ),
    )


def _field(name: str) -> Field:
    isocentre_cm = (0.0, -MATCH_DEPTH_CM, 0.0)
    only = Beam(name, "6 MV", 180.0, 0.0, 0.0, isocentre_cm, SAD_CM, 95.0, (-5.0, 5.0), 1.0)
    return Field(name, (only,), MovedBy.JAWS, None)
