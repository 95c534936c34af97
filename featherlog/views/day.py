"""The therapist's day: what to set for one fraction, and the list of courses due."""

from __future__ import annotations

from dataclasses import dataclass

from featherlog.views.common import (  # noqa: TC001 - msgspec reads annotations at run time
    DepartureLine,
    Heading,
)


@dataclass(frozen=True, slots=True)
class JawView:
    """One jaw. ``edge`` is superior, inferior or side; ``previous_cm`` None at the first fraction.

    ``words`` says which way the edge it forms moves in the patient, empty when it stays.
    ``edges_by`` is ``leaves`` where leaves form this edge: they belong to the plan and are not set
    by hand.
    """

    jaw: str
    edge: str
    edges_by: str
    cm: float
    previous_cm: float | None
    words: str


@dataclass(frozen=True, slots=True)
class BeamView:
    """One beam to set.

    The previous angles are those of the fraction before, None at the first. ``planned_mu`` is the
    meterset of this step of the fraction, ``delivered_mu`` what the step has had and
    ``to_deliver_mu`` what remains of it. ``console`` holds (name, value) pairs as
    the machine's own console shows them, empty where that shows IEC 61217.
    """

    beam: str
    energy: str
    gantry_deg: float
    collimator_deg: float
    couch_deg: float
    previous_collimator_deg: float | None
    previous_couch_deg: float | None
    ssd_cm: float
    planned_mu: float
    delivered_mu: float
    to_deliver_mu: float
    jaws: tuple[JawView, ...]
    console: tuple[tuple[str, float], ...]


@dataclass(frozen=True, slots=True)
class TableMoveView:
    """A table move in IEC 61217 signs and in words; ``words`` is empty when nothing moves."""

    lateral_cm: float
    longitudinal_cm: float
    vertical_cm: float
    words: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class TableTargetView:
    """Where the table must stand (IEC 61217), in figures and in words."""

    lateral_cm: float
    longitudinal_cm: float
    vertical_cm: float
    words: str


@dataclass(frozen=True, slots=True)
class FieldView:
    """One field to set.

    ``from_field_before`` is the one table move to make for it, from the field treated before it on
    the same day, and ``before_from_field_before`` what that move was last time (figures only); both
    are None for the first field, whose move is ``since_last``: against the last fraction. For later
    fields ``since_last`` only explains, it is part of the move already. ``previous_position`` is
    where the field stood last, empty at the first fraction; ``begun`` is true when it was treated
    already in this fraction and nothing of it moves. ``orders`` say in words what to do with the
    table, each once, and ``notes`` explain. ``target`` is where the table must then stand, None
    while moves are relative only.
    """

    field: str
    moved_by: str
    previous_position: str
    begun: bool
    since_last: TableMoveView
    from_field_before: TableMoveView | None
    before_from_field_before: TableMoveView | None
    orders: tuple[str, ...]
    notes: tuple[str, ...]
    beams: tuple[BeamView, ...]
    target: TableTargetView | None = None


@dataclass(frozen=True, slots=True)
class GapView:
    """The gap to measure on one skin side (+ gap, - overlap) and the range that is accepted."""

    side: str
    expected_cm: float
    tolerance_cm: float


@dataclass(frozen=True, slots=True)
class EdgeView:
    """One field edge for the side view: axis coordinate at the entrance skin and at depth."""

    field: str
    beam: str
    z_at_skin_cm: float
    z_at_depth_cm: float


@dataclass(frozen=True, slots=True)
class SideView:
    """The edges that meet at a junction, seen from the side.

    The entrance skin is at depth 0; edges are drawn from there to ``depth_cm``.
    ``previous_edges`` are those of the fraction before, empty when nothing moved.
    """

    entrance: str
    depth_cm: float
    match_depth_cm: float
    match_z_cm: float
    critical_name: str
    critical_depth_cm: float | None
    superior_edges: tuple[EdgeView, ...]
    inferior_edges: tuple[EdgeView, ...]
    previous_edges: tuple[EdgeView, ...]


@dataclass(frozen=True, slots=True)
class JunctionView:
    """One junction today. ``moves_cm`` is its move since the last fraction (+ toward the head)."""

    junction: str
    technique: str
    superior_field: str
    inferior_field: str
    offset_cm: float
    moves_cm: float
    words: str
    gaps: tuple[GapView, ...]
    side_view: SideView


@dataclass(frozen=True, slots=True)
class NextShift:
    """The next fraction whose position differs, with its projected date (ISO 8601)."""

    fraction: int
    position: str
    projected_date: str


@dataclass(frozen=True, slots=True)
class DayView:
    """One fraction of one course, as the therapist needs it.

    ``status`` is ``ready``, ``complete`` (nothing left to treat) or ``stop``; ``stop_reasons`` say
    why and whom to call. ``shift`` is ``yes``, ``no`` or ``first`` (there is no earlier fraction).
    ``previous_position`` is where all fields stood last, None at the first fraction; where they
    stood apart it names each. ``step`` of ``steps`` counts the positions of a fraction that is
    split over several.
    ``part_delivered`` is true when this fraction was begun and its remainder is locked to
    ``position``. ``table_reference`` says what absolute table targets rest on, or why there are
    none. ``page_code`` names this page's state of the course. ``call`` says whom to call where the
    day stops, ``raised_risk`` what makes a mistake more likely to go unseen.
    """

    heading: Heading
    status: str
    stop_reasons: tuple[str, ...]
    fraction: int
    fractions: int
    step: int
    steps: int
    phase: str
    dose_gy: float
    projected_date: str
    position: str
    previous_position: str | None
    shift: str
    shift_words: str
    part_delivered: bool
    junctions: tuple[JunctionView, ...]
    fields: tuple[FieldView, ...]
    table_reference: str
    open_departures: tuple[DepartureLine, ...]
    next_shift: NextShift | None
    page_code: str
    ledger_head: str
    printed_at: str
    caution: str
    call: str = ""
    raised_risk: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class DueLine:
    """One course in the list of a day."""

    course: str
    patient_name: str
    machine: str
    fraction: int
    fractions: int
    position: str
    shift: str
    due: str
    projected_date: str
    attention: str


@dataclass(frozen=True, slots=True)
class DueList:
    """The courses due on a date, on one machine or all."""

    date: str
    machine: str
    lines: tuple[DueLine, ...]
    demo: bool
    caution: str
