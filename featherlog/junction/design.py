"""The junction design of one course: what a physicist decides before anything is solved.

Lengths in cm, angles in degrees, doses in Gy. Points are in patient axes (DICOM): x to the
patient's left, y to posterior, z to superior.
"""

from __future__ import annotations

from dataclasses import dataclass
from datetime import date  # noqa: TC003 - msgspec reads the annotations at run time
from enum import StrEnum

from featherlog.geometry.patient import PatientPosition, Point  # noqa: TC001 - as above


class Technique(StrEnum):
    """How the match at a junction is made."""

    SKIN_GAP = "skin gap"
    HALF_BEAM = "half-beam"
    ROTATED = "rotated"


class Angles(StrEnum):
    """Whether a turned field's angles follow the junction or stay as at position A."""

    RECOMPUTED = "recomputed"
    HELD = "held"


class EdgesBy(StrEnum):
    """What forms a beam's edges: jaws that are set, or leaves that belong to the plan."""

    JAWS = "jaws"
    LEAVES = "leaves"


class MovedBy(StrEnum):
    """What moves a field when the junction moves: its jaws, or the table under it."""

    JAWS = "jaws"
    COUCH = "couch"


class End(StrEnum):
    """The two ends of a field along the junction axis."""

    SUPERIOR = "superior"
    INFERIOR = "inferior"


class Side(StrEnum):
    """The side of the patient on which a beam enters."""

    ANTERIOR = "anterior"
    POSTERIOR = "posterior"
    LEFT = "left"
    RIGHT = "right"


class Pattern(StrEnum):
    """How positions are assigned to fractions."""

    BLOCKS = "blocks"
    DAILY = "daily"
    DOSE = "dose"
    LIST = "list"
    SPLIT = "split"
    NO_SHIFT = "no shift"


class Weekday(StrEnum):
    """Days of the week, in calendar order."""

    MONDAY = "Monday"
    TUESDAY = "Tuesday"
    WEDNESDAY = "Wednesday"
    THURSDAY = "Thursday"
    FRIDAY = "Friday"
    SATURDAY = "Saturday"
    SUNDAY = "Sunday"


@dataclass(frozen=True, slots=True)
class Phase:
    """Consecutive fractions with one prescription."""

    name: str
    fractions: int
    dose_per_fraction_gy: float


@dataclass(frozen=True, slots=True)
class Beam:
    """One beam at its position A geometry; of a turned field, before it is turned.

    ``side_jaws_cm`` are the signed IEC positions of the two jaws that do not form junction edges.
    ``weight`` is the beam's part of its field's dose; the weights of a field sum to 1.
    """

    name: str
    energy: str
    gantry_deg: float
    collimator_deg: float
    couch_deg: float
    isocentre_cm: Point
    sad_cm: float
    ssd_cm: float
    side_jaws_cm: tuple[float, float]
    weight: float
    edges_by: EdgesBy = EdgesBy.JAWS


@dataclass(frozen=True, slots=True)
class Border:
    """The outer end of the first or last field: a point its edge passes through, or a jaw reach.

    A ``held`` point stays in the patient; a free one travels with the isocentre. ``reach_cm`` is
    the distance from the beam axis to the edge at the isocentre plane, positive away from the axis
    on the field's own side and negative across it. Exactly one of point and reach is given.
    ``cover_x_cm`` are two lateral coordinates at which the border's z must stay covered as well.
    """

    point_cm: Point | None = None
    held: bool = False
    reach_cm: float | None = None
    cover_x_cm: tuple[float, float] | None = None


@dataclass(frozen=True, slots=True)
class EarlierCourse:
    """A field of a finished course: fixed, with its dose, never set or recorded again.

    ``junction_reach_cm`` is the distance at the isocentre plane from the beam axis to its edge at
    the junction, positive on the field's own side.
    """

    label: str
    dose_gy: float
    fractions: int
    junction_reach_cm: float


@dataclass(frozen=True, slots=True)
class Field:
    """One treated region.

    ``follows`` names the junction whose offset the table follows; None when moved by the jaws.
    ``dose_per_fraction_gy`` is the field's own dose where it is not the phase's.
    """

    name: str
    beams: tuple[Beam, ...]
    moved_by: MovedBy
    follows: str | None
    dose_per_fraction_gy: float | None = None
    earlier: EarlierCourse | None = None


@dataclass(frozen=True, slots=True)
class CriticalStructure:
    """A structure whose dose at the junction is reported, by its depth below the entrance skin."""

    name: str
    depth_cm: float


@dataclass(frozen=True, slots=True)
class Junction:
    """Where the inferior edge of one field meets the superior edge of the next.

    ``skin_point_cm`` is the point on the entrance skin straight above the match point; depths are
    measured from it into the patient. Exactly one of ``match_depth_cm`` and ``skin_gap_cm`` is
    given. ``thickness_cm`` puts the opposite skin; ``lateral_limits_cm`` are the two coordinates
    across the axis at which the mismatch is stated. ``reference_dose_gy`` is the whole course's
    dose that every percent at this junction names. ``skin_slope_deg`` is positive where the
    entrance skin rises outward toward the head.

    ``separation_cm`` is a planned gap (+) or overlap (-) of the edges at the match point, split
    evenly or borne by the field named in ``borne_by``. At a rotated junction ``turned_field`` is
    turned onto the edge of ``matched_beam`` of its neighbour.
    """

    name: str
    technique: Technique
    entrance: Side
    skin_point_cm: Point
    match_depth_cm: float | None
    skin_gap_cm: float | None
    thickness_cm: float | None
    lateral_limits_cm: tuple[float, float]
    critical: CriticalStructure | None
    report_depths_cm: tuple[float, ...]
    reference_dose_gy: float
    gap_tolerance_cm: float
    skin_slope_deg: float | None
    separation_cm: float = 0.0
    borne_by: str | None = None
    turned_field: str | None = None
    matched_beam: str | None = None
    angles: Angles = Angles.RECOMPUTED


@dataclass(frozen=True, slots=True)
class Position:
    """One of the places the junctions are put.

    ``offset_cm`` holds each junction's signed move from position A, positive to superior;
    ``meterset_mu`` each beam's meterset at this position.
    """

    label: str
    offset_cm: dict[str, float]
    meterset_mu: dict[str, float]


@dataclass(frozen=True, slots=True)
class SequencePattern:
    """The rule that assigns positions to fractions, and the treatment days.

    ``positions`` is the order for blocks, dose and daily cycling, the full assignment for a list,
    and the single position for no shift. ``block_fractions`` belongs to blocks; by dose, the
    junction moves once a position has had at least ``block_dose_gy``. ``weights`` split every
    fraction over the positions. ``restart_each_phase`` begins the order again with each phase.
    ``closed_dates`` are the course's and the machine's, ``holidays`` the public ones of the
    ``holiday_calendar`` (country, region).
    """

    pattern: Pattern
    positions: tuple[str, ...]
    block_fractions: int | None
    start_date: date
    weekdays: tuple[Weekday, ...]
    closed_dates: tuple[date, ...]
    block_dose_gy: float | None = None
    weights: tuple[float, ...] = ()
    restart_each_phase: bool = False
    holiday_calendar: str = ""
    holidays: tuple[date, ...] = ()


@dataclass(frozen=True, slots=True)
class Course:
    """The whole design of one patient's matched-field treatment.

    Fields run from superior to inferior and junction k lies between field k and field k + 1, so
    there is one junction fewer than fields. ``identifiers`` holds the two identifiers by name.
    """

    key: str
    patient_name: str
    identifiers: dict[str, str]
    site: str
    plan_label: str
    note: str
    patient_position: PatientPosition
    machine: str
    fractions_a_day: int
    phases: tuple[Phase, ...]
    fields: tuple[Field, ...]
    superior_border: Border
    inferior_border: Border
    junctions: tuple[Junction, ...]
    positions: tuple[Position, ...]
    sequence: SequencePattern

    @property
    def fractions(self) -> int:
        """The prescribed number of fractions, all phases together."""
        return sum(phase.fractions for phase in self.phases)

    @property
    def beams(self) -> tuple[Beam, ...]:
        """Every beam, in field order."""
        return tuple(beam for field in self.fields for beam in field.beams)
