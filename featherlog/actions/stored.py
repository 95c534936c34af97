"""A course as the database holds it: its revision, its plan and how far it has come."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import datetime
from typing import TYPE_CHECKING

import msgspec

from featherlog.errors import NotFoundError
from featherlog.junction.design import Course
from featherlog.junction.machine import Machine
from featherlog.junction.plan import Plan
from featherlog.sequence.progress import (
    DeliveredBeam,
    FractionState,
    Progress,
    fraction_states,
    progress,
)
from featherlog.store import queries
from featherlog.views.common import DepartureLine, Heading

if TYPE_CHECKING:
    from collections.abc import Iterable

    from featherlog.actions.desk import Desk
    from featherlog.store.rows import CourseRow, DeliveryRow, DepartureRow, RevisionRow


@dataclass(frozen=True, slots=True)
class Stored:
    """One course with the revision it is treated by, or its latest while none is approved."""

    row: CourseRow
    revision: RevisionRow
    course: Course
    plan: Plan
    machine: Machine
    deliveries: tuple[DeliveryRow, ...]
    states: dict[int, FractionState]
    progress: Progress

    @property
    def approved(self) -> bool:
        """Tell whether the revision shown is the approved one."""
        return self.row.approved_revision == self.revision.number

    def heading(self, *, demo: bool) -> Heading:
        """Return who and what a page about this course is about."""
        return Heading(
            course=self.course.key,
            patient_name=self.course.patient_name,
            identifiers=tuple(self.course.identifiers.items()),
            site=self.course.site,
            patient_position=self.course.patient_position.value,
            machine=self.row.machine if self.approved else self.course.machine,
            plan_label=self.course.plan_label,
            state=self.revision.state,
            revision=self.revision.code or f"R{self.revision.number} (not approved)",
            demo=demo,
        )


def load(desk: Desk, key: str) -> Stored:
    """Return a course with its approved revision, or with its latest where none is approved.

    Raises NotFoundError where there is no such course.
    """
    treatment = queries.treatment(desk.connection, key)
    if treatment is not None:
        return _stored(desk, treatment.course, treatment.revision)
    return load_latest(desk, key)


def load_latest(desk: Desk, key: str) -> Stored:
    """Return a course with its latest revision, approved or not; errors as ``load``."""
    row = queries.course_row(desk.connection, key)
    revision = queries.revision_row(desk.connection, key, row.revision) if row else None
    if row is None or revision is None:
        raise NotFoundError(f"there is no course {key!r}; see `featherlog course list`")
    return _stored(desk, row, revision)


def _stored(desk: Desk, row: CourseRow, revision: RevisionRow) -> Stored:
    plan = msgspec.json.decode(revision.plan, type=Plan)
    machine = msgspec.json.decode(revision.machine, type=Machine)
    deliveries = _in_treatment_order(plan, queries.deliveries(desk.connection, row.key))
    states = fraction_states(plan, delivered_beams(deliveries), machine.tolerances.meterset_percent)
    return Stored(
        row=row,
        revision=revision,
        course=msgspec.json.decode(revision.design, type=Course),
        plan=plan,
        machine=machine,
        deliveries=deliveries,
        states=states,
        progress=progress(plan, states, machine.tolerances.meterset_percent),
    )


def _in_treatment_order(plan: Plan, rows: tuple[DeliveryRow, ...]) -> tuple[DeliveryRow, ...]:
    """Return deliveries by when they were treated, the beams of one record in field order.

    A late entry or a correction belongs where it was treated. The database knows no order within a
    record, and names sort otherwise than people treat.
    """
    beams = [beam.beam for one in plan.positions[0].fields for beam in one.beams]
    return tuple(
        sorted(
            rows,
            key=lambda row: (datetime.fromisoformat(row.at), row.entry, beams.index(row.beam)),
        )
    )


def delivered_beams(rows: Iterable[DeliveryRow]) -> list[DeliveredBeam]:
    """Return the delivered beams that database rows hold."""
    return [
        DeliveredBeam(
            row.fraction, row.field, row.beam, row.position, row.meterset_mu, row.planned_mu
        )
        for row in rows
    ]


def departure_lines(rows: Iterable[DepartureRow]) -> tuple[DepartureLine, ...]:
    """Return departures as they are listed."""
    return tuple(
        DepartureLine(
            row.number,
            row.fraction,
            row.kind,
            row.grade,
            row.detail,
            row.reason,
            row.status,
            row.decision or "",
        )
        for row in rows
    )
