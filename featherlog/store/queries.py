"""Reading the projections: one query each, plain records back."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any, TypeVar

from sqlalchemy import and_, func, select

from featherlog.store import tables
from featherlog.store.rows import (
    ConfirmationRow,
    CourseRow,
    DeliveryRow,
    DepartureRow,
    EventRow,
    MachineRow,
    ObservationRow,
    PolicyRow,
    RevisionRow,
    StaffKeyRow,
    StaffRow,
    Treatment,
)

if TYPE_CHECKING:
    from collections.abc import Callable

    from sqlalchemy import Connection, Select

Record = TypeVar("Record")


def staff(connection: Connection) -> tuple[StaffRow, ...]:
    """Return everyone, by name."""
    return _all(connection, StaffRow, select(tables.staff).order_by(tables.staff.c.name))


def person(connection: Connection, name: str) -> StaffRow | None:
    """Return one person; None for a stranger."""
    return _first(connection, StaffRow, select(tables.staff).where(tables.staff.c.name == name))


def staff_keys(connection: Connection) -> tuple[StaffKeyRow, ...]:
    """Return every key there ever was, in the order they were made known."""
    query = select(tables.staff_key).order_by(tables.staff_key.c.from_entry)
    return _all(connection, StaffKeyRow, query)


def present_key(connection: Connection, name: str) -> StaffKeyRow | None:
    """Return the key a person signs with now; None where there is none."""
    key = tables.staff_key.c
    query = select(tables.staff_key).where(key.name == name, key.to_entry.is_(None))
    return _first(connection, StaffKeyRow, query)


def failed_signings(connection: Connection, name: str) -> int:
    """Return how many wrong passphrases a person's name has had since it last signed."""
    failed = tables.failed_signing
    query = select(func.count()).select_from(failed).where(failed.c.name == name)
    return connection.execute(query).scalar_one()


def policy(connection: Connection) -> PolicyRow | None:
    """Return the policy in force; None until a department sets one."""
    query = select(tables.policy).order_by(tables.policy.c.version.desc()).limit(1)
    return _first(connection, PolicyRow, query)


def machines(connection: Connection) -> tuple[MachineRow, ...]:
    """Return every machine, by name."""
    return _all(connection, MachineRow, select(tables.machine).order_by(tables.machine.c.name))


def machine_content(connection: Connection, name: str) -> str | None:
    """Return the machine's description as canonical JSON; None where it is not known."""
    query = select(tables.machine.c.content).where(tables.machine.c.name == name)
    return connection.execute(query).scalar()


def courses(connection: Connection) -> tuple[CourseRow, ...]:
    """Return every course, by key."""
    return _all(connection, CourseRow, select(tables.course).order_by(tables.course.c.key))


def course_row(connection: Connection, key: str) -> CourseRow | None:
    """Return one course; None where there is none."""
    return _first(connection, CourseRow, select(tables.course).where(tables.course.c.key == key))


def due(connection: Connection, machine: str | None = None) -> tuple[CourseRow, ...]:
    """Return the courses under treatment, on one machine or all, earliest due first."""
    course = tables.course.c
    query = select(tables.course).where(course.state == "approved")
    if machine is not None:
        query = query.where(course.machine == machine)
    return _all(connection, CourseRow, query.order_by(course.next_date, course.key))


def revision_row(connection: Connection, key: str, number: int) -> RevisionRow | None:
    """Return one revision of a course; None where there is none."""
    revision = tables.revision.c
    query = select(tables.revision).where(revision.course == key, revision.number == number)
    return _first(connection, RevisionRow, query)


def treatment(connection: Connection, key: str) -> Treatment | None:
    """Return the course with its approved revision, in one query; None while it has none."""
    course, revision = tables.course.c, tables.revision.c
    approved = and_(revision.course == course.key, revision.number == course.approved_revision)
    query = select(tables.course, tables.revision).join(tables.revision, approved)
    row = connection.execute(query.where(course.key == key)).one_or_none()
    if row is None:
        return None
    width = len(course)
    return Treatment(course=CourseRow(*row[:width]), revision=RevisionRow(*row[width:]))


def deliveries(connection: Connection, key: str) -> tuple[DeliveryRow, ...]:
    """Return what every beam of the course gave, record by record, beams by their names."""
    delivery = tables.delivery.c
    query = select(tables.delivery).where(delivery.course == key)
    return _all(
        connection, DeliveryRow, query.order_by(delivery.entry, delivery.field, delivery.beam)
    )


def observations(connection: Connection, key: str) -> tuple[ObservationRow, ...]:
    """Return the gaps measured in the course, in the order they were recorded."""
    observation = tables.observation.c
    query = select(tables.observation).where(observation.course == key)
    order = (observation.entry, observation.junction, observation.side)
    return _all(connection, ObservationRow, query.order_by(*order))


def confirmations(connection: Connection, key: str, fraction: int) -> tuple[ConfirmationRow, ...]:
    """Return the checks made before one fraction, the latest last."""
    confirmation = tables.confirmation.c
    query = select(tables.confirmation).where(
        confirmation.course == key, confirmation.fraction == fraction
    )
    return _all(connection, ConfirmationRow, query.order_by(confirmation.entry))


def events(connection: Connection, key: str) -> tuple[EventRow, ...]:
    """Return what else happened in the course, in the order it was recorded."""
    query = select(tables.event).where(tables.event.c.course == key)
    return _all(connection, EventRow, query.order_by(tables.event.c.entry))


def departures(connection: Connection, key: str) -> tuple[DepartureRow, ...]:
    """Return the departures of the course, by number."""
    departure = tables.departure.c
    query = select(tables.departure).where(departure.course == key)
    return _all(connection, DepartureRow, query.order_by(departure.number))


def properties(connection: Connection) -> dict[str, str]:
    """Return what the database was told about itself when it was made."""
    return {row.name: row.value for row in connection.execute(select(tables.store_property))}


def _all(
    connection: Connection, record: Callable[..., Record], query: Select[Any]
) -> tuple[Record, ...]:
    return tuple(record(*row) for row in connection.execute(query))


def _first(
    connection: Connection, record: Callable[..., Record], query: Select[Any]
) -> Record | None:
    row = connection.execute(query).one_or_none()
    return record(*row) if row is not None else None
