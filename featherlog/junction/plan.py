"""What a solved design says, ready to be stored, printed and delivered.

These records hold no behaviour beyond look-ups and import no numerical library, so that the
console can read an approved plan without one. Lengths in cm, angles in degrees, IEC 61217 signs.
"""

from __future__ import annotations

from dataclasses import dataclass

from featherlog.geometry.planes import EdgePlane
from featherlog.junction.machine import Jaw  # noqa: TC001 - msgspec reads annotations at run time

Triple = tuple[float, float, float]
EdgeLine = EdgePlane


@dataclass(frozen=True, slots=True)
class BeamSetting:
    """One beam at one position.

    ``jaw_cm`` is what the machine is set to, ``exact_jaw_cm`` what the geometry asks for before
    rounding. ``superior_jaw`` and ``inferior_jaw`` name the jaws that form the two ends, and
    ``superior_edge`` and ``inferior_edge`` are their planes after rounding. Exact angles are those
    of a turned beam before anything is rounded; those ``_beside_set`` are solved against the
    neighbour as set, and only then rounded. ``edges_by`` says whether jaws or leaves form the two
    ends.
    """

    beam: str
    energy: str
    weight: float
    gantry_deg: float
    collimator_deg: float
    couch_deg: float
    isocentre_cm: Triple
    ssd_cm: float
    meterset_mu: float
    jaw_cm: dict[Jaw, float]
    exact_jaw_cm: dict[Jaw, float]
    superior_jaw: Jaw
    inferior_jaw: Jaw
    superior_edge: EdgeLine
    inferior_edge: EdgeLine
    sad_cm: float
    exact_collimator_deg: float
    exact_couch_deg: float
    edges_by: str
    collimator_beside_set_deg: float | None = None
    couch_beside_set_deg: float | None = None


@dataclass(frozen=True, slots=True)
class FieldSetting:
    """One field at one position. ``moved_cm`` is its isocentre's move from position A (+ superior).

    ``table_from_a_cm`` is the table move from position A: lateral, longitudinal, vertical.
    ``table_from_first_field_cm`` is the table move from the first field's isocentre to this one's.
    ``dose_per_fraction_gy`` is None where it is the phase's. ``earlier_course`` names the finished
    course of a field that is only a neighbour, with its ``earlier_dose_gy``; else empty.
    """

    field: str
    moved_by: str
    moved_cm: float
    table_from_a_cm: Triple
    table_from_first_field_cm: Triple
    beams: tuple[BeamSetting, ...]
    dose_per_fraction_gy: float | None = None
    earlier_course: str = ""
    earlier_dose_gy: float = 0.0


@dataclass(frozen=True, slots=True)
class SkinGap:
    """The gap between the light-field edges on one skin side (+ gap, - overlap).

    ``superior_part_cm`` and ``inferior_part_cm`` are each field's part, measured from the match
    point's level; ``expected_cm`` is their sum after rounding, ``exact_cm`` before, all along the
    axis. ``along_skin_cm`` is the expected gap measured along a sloping skin.
    """

    side: str
    exact_cm: float
    expected_cm: float
    superior_part_cm: float
    inferior_part_cm: float
    along_skin_cm: float


@dataclass(frozen=True, slots=True)
class Mismatch:
    """The mismatch at one point (+ gap), worst over beam pairs, before and after rounding.

    ``least_cm`` and ``most_cm`` are the least and greatest of any beam pair after rounding: one
    pair may overlap where another gaps.
    """

    place: str
    x_cm: float
    y_cm: float
    exact_cm: float
    rounded_cm: float
    least_cm: float | None = None
    most_cm: float | None = None

    @property
    def opposite_cm(self) -> float | None:
        """Return the farthest mismatch of the other sign; None where every pair has one sign."""
        if self.least_cm is None or self.most_cm is None:
            return None
        other = self.least_cm if self.rounded_cm > 0 else self.most_cm
        return other if other * self.rounded_cm < 0 else None


@dataclass(frozen=True, slots=True)
class Play:
    """By how much (cm, ±) the mismatch may differ from the one as set, settings being off.

    ``at_match_depth_cm`` is the worst at the match depth, ``worst_cm`` at any stated point.
    """

    at_match_depth_cm: float
    worst_cm: float


@dataclass(frozen=True, slots=True)
class JunctionSetting:
    """One junction at one position.

    ``match_point_cm`` is where the edges meet: the match point moved by the offset, or the edge of
    an earlier course's field, which never moves. ``match_depth_cm`` is the depth at position A and
    ``depth_below_skin_cm`` the depth here, which differs on a sloping skin. ``separation_cm`` is
    the planned gap (+) at the match point. ``rounding_cm`` is the worst change of any beam pair's
    mismatch that rounding makes. ``three_field_overlap_cm`` is the length at the critical depth
    covered by more beams than either field has, and ``gap_without_overlap_cm`` the skin gap that
    would remove it. ``if_jaws_off`` and ``if_all_off`` say what becomes of the mismatch as set when
    both fields' jaws, or jaws, all angles and the table under a field moved by the couch, are off
    by the machine's tolerance the worst way.
    """

    junction: str
    offset_cm: float
    match_point_cm: Triple
    match_depth_cm: float
    skin_gaps: tuple[SkinGap, ...]
    mismatches: tuple[Mismatch, ...]
    rounding_cm: float
    depth_below_skin_cm: float
    separation_cm: float
    three_field_overlap_cm: float | None
    gap_without_overlap_cm: float | None
    if_jaws_off: Play | None = None
    if_all_off: Play | None = None


@dataclass(frozen=True, slots=True)
class BorderSetting:
    """An outer border at one position: where its edge lies, and what it leaves uncovered.

    ``z_cm`` holds the least generous edge coordinate of the field's beams at each ``x_cm``.
    ``short_cm`` is how far the border's point stays uncovered (0 when it is covered).
    """

    end: str
    x_cm: tuple[float, ...]
    z_cm: tuple[float, ...]
    short_cm: float


@dataclass(frozen=True, slots=True)
class PositionSettings:
    """Everything to set at one position."""

    label: str
    fields: tuple[FieldSetting, ...]
    junctions: tuple[JunctionSetting, ...]
    borders: tuple[BorderSetting, ...] = ()

    @property
    def treated(self) -> tuple[FieldSetting, ...]:
        """Return the fields of this course, without those of an earlier one."""
        return tuple(field for field in self.fields if not field.earlier_course)

    def junction(self, name: str) -> JunctionSetting:
        """Return the named junction's setting."""
        return next(junction for junction in self.junctions if junction.junction == name)

    def meterset(self, beam: str) -> float:
        """Return the named beam's planned meterset (MU)."""
        return next(b.meterset_mu for f in self.fields for b in f.beams if b.beam == beam)


@dataclass(frozen=True, slots=True)
class FractionStep:
    """One position of a fraction, with the part of the fraction's dose given there."""

    position: str
    weight: float


@dataclass(frozen=True, slots=True)
class PlannedFraction:
    """One prescribed fraction: its number in the course, its phase, dose and steps.

    An ordinary fraction has one step; one that is split over several positions has one for each.
    """

    number: int
    phase: str
    dose_gy: float
    steps: tuple[FractionStep, ...]

    @property
    def position(self) -> str:
        """Return the position's label, or those of a split fraction joined by +."""
        return "+".join(step.position for step in self.steps)


@dataclass(frozen=True, slots=True)
class Plan:
    """A solved design: settings of every position, the fractions, and what to be warned of."""

    positions: tuple[PositionSettings, ...]
    fractions: tuple[PlannedFraction, ...]
    warnings: tuple[str, ...]

    def position(self, label: str) -> PositionSettings:
        """Return the settings of the labelled position; ``KeyError`` where there is none."""
        for position in self.positions:
            if position.label == label:
                return position
        raise KeyError(label)

    def fraction(self, number: int) -> PlannedFraction:
        """Return the planned fraction of that number, counted from 1."""
        return self.fractions[number - 1]
