"""What the projections hold, as plain records: one for each table, fields in its column order."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class StaffRow:
    """A person and the role that says what they may sign; ``left_entry`` where they have left."""

    name: str
    role: str
    entry: int
    left_entry: int | None


@dataclass(frozen=True, slots=True)
class StaffKeyRow:
    """A person's key, good for the entries from ``from_entry`` to ``to_entry`` (None: until now).

    ``wrapped`` is the key as its owner's passphrase locks it, canonical JSON.
    """

    public: str
    name: str
    wrapped: str
    from_entry: int
    to_entry: int | None


@dataclass(frozen=True, slots=True)
class FailedSigningRow:
    """A wrong passphrase since the person last signed."""

    entry: int
    name: str


@dataclass(frozen=True, slots=True)
class PolicyRow:
    """One version of the department's policy, canonical JSON."""

    version: int
    content: str
    entry: int


@dataclass(frozen=True, slots=True)
class MachineRow:
    """A machine; ``content`` is its description as canonical JSON."""

    name: str
    content: str
    entry: int


@dataclass(frozen=True, slots=True)
class CourseRow:
    """Where a course stands.

    ``revision`` is the latest revision's number, ``approved_revision`` the one that is treated.
    ``next_*`` say what is due and are None when nothing is; ``next_date`` is ISO 8601.
    ``state_hash`` is the hash of the last entry that changed the course.
    """

    key: str
    patient_name: str
    site: str
    machine: str
    state: str
    revision: int
    approved_revision: int | None
    fractions: int
    next_fraction: int | None
    next_position: str | None
    next_date: str | None
    part_delivered: bool
    fractions_complete: int
    open_departures: int
    state_hash: str
    entry: int
    paused_reason: str | None
    ended_reason: str | None


@dataclass(frozen=True, slots=True)
class RevisionRow:
    """One design with its plan and machine as canonical JSON, and how far it was approved.

    ``entry`` is the entry that prepared it; ``code`` is empty until it is approved.
    """

    course: str
    number: int
    code: str
    state: str
    design: str
    plan: str
    machine: str
    prepared_by: str
    checked_by: str | None
    approved_by: str | None
    returned_reason: str | None
    prepared_at: str
    checked_at: str | None
    approved_at: str | None
    content_hash: str
    entry: int


@dataclass(frozen=True, slots=True)
class Treatment:
    """A course and the revision it is treated by."""

    course: CourseRow
    revision: RevisionRow


@dataclass(frozen=True, slots=True)
class DeliveryRow:
    """What one beam gave in one record of a fraction."""

    entry: int
    course: str
    fraction: int
    field: str
    beam: str
    position: str
    meterset_mu: float
    planned_mu: float
    performer: str
    verifier: str
    at: str
    late: bool


@dataclass(frozen=True, slots=True)
class ObservationRow:
    """A gap measured on the skin (+ gap, - overlap)."""

    entry: int
    course: str
    fraction: int
    junction: str
    side: str
    gap_cm: float


@dataclass(frozen=True, slots=True)
class ConfirmationRow:
    """A check before the beam, and the state of the course it was made against."""

    entry: int
    course: str
    fraction: int
    position: str
    state_hash: str
    performer: str
    verifier: str
    at: str


@dataclass(frozen=True, slots=True)
class DepartureRow:
    """What differed from the sequence; ``status`` is open or explained."""

    course: str
    number: int
    fraction: int
    kind: str
    grade: str
    detail: str
    reason: str
    status: str
    entry: int
    explained_entry: int | None
    decision: str | None
    decided_entry: int | None


@dataclass(frozen=True, slots=True)
class EventRow:
    """Something else that happened in a course; ``content`` is canonical JSON."""

    entry: int
    course: str
    fraction: int | None
    kind: str
    who: str
    at: str
    content: str
