"""A design's way to the console: prepared, independently checked, approved, or returned."""

from __future__ import annotations

from typing import TYPE_CHECKING

import msgspec

from featherlog import words
from featherlog.actions.desk import Desk, signing_desk
from featherlog.actions.machines import machine_named
from featherlog.actions.stored import load_latest
from featherlog.actions.typed import printable_everywhere, required
from featherlog.errors import RefusedError
from featherlog.exchange.design_file import named_machine, read_design
from featherlog.sequence.calendar import treatment_days
from featherlog.sequence.planning import plan_course
from featherlog.store import queries
from featherlog.store.entry import Kind, content_hash

if TYPE_CHECKING:
    from pathlib import Path

    from featherlog.junction.plan import Plan
    from featherlog.store.rows import RevisionRow

_WAITING = ("prepared", "checked")


def prepare(database: str | None, file: Path, *, by: str) -> tuple[str, int, Plan]:
    """Solve a design file and store it as the course's next revision.

    Returns the course's key, the revision's number and the plan. Raises InputError for a faulty
    file and RefusedError where the machine cannot deliver it, another revision waits, or treatment
    has begun.
    """
    with signing_desk(database) as desk:
        role = desk.role_of(by, "prepare a design", words.PHYSICIST)
        machine = machine_named(desk, named_machine(file))
        course = read_design(file, machine)
        number = _next_revision(desk, course.key)
        plan = plan_course(course, machine)
        parts = [msgspec.to_builtins(part) for part in (course, plan, machine)]
        printable_everywhere(parts[0])
        desk.append(
            Kind.DESIGN_PREPARED,
            {
                "course": course.key,
                "patient_name": course.patient_name,
                "site": course.site,
                "machine_name": machine.name,
                "fractions": course.fractions,
                "revision": number,
                "design": parts[0],
                "plan": parts[1],
                "machine": parts[2],
                "content_hash": content_hash(*parts),
            },
            course=course.key,
            who=by,
            role=role,
            meaning=words.MEANING["prepared"],
        )
    return course.key, number, plan


def _next_revision(desk: Desk, key: str) -> int:
    row = queries.course_row(desk.connection, key)
    if row is None:
        return 1
    latest = queries.revision_row(desk.connection, key, row.revision)
    if latest is not None and latest.state in _WAITING:
        raise RefusedError(
            f"revision {row.revision} of course {key} is {latest.state} and waits; return it with "
            "`featherlog course return` before preparing another"
        )
    if queries.deliveries(desk.connection, key):
        raise RefusedError(
            f"course {key} has delivered fractions; its design can no longer be replaced"
        )
    return row.revision + 1


def check(database: str | None, key: str, *, by: str) -> RevisionRow:
    """Sign the independent check of the latest revision; its author may not.

    Raises RefusedError where it is not waiting for a check, or its author checks it.
    """
    with signing_desk(database) as desk:
        role = desk.role_of(by, "check a design", words.PHYSICIST)
        revision = _latest(desk, key, "prepared", become="checked")
        if by == revision.prepared_by:
            raise RefusedError(
                f"{by} prepared revision {revision.number} of {key}; someone else must check it"
            )
        desk.append(
            Kind.DESIGN_CHECKED,
            {"revision": revision.number},
            course=key,
            who=by,
            role=role,
            meaning=words.MEANING["checked"],
        )
    return revision


def approve(database: str | None, key: str, *, by: str) -> str:
    """Approve the latest revision, fixing its content; return its revision code.

    Raises RefusedError where it was not checked, or its author approves it.
    """
    with signing_desk(database) as desk:
        role = desk.role_of(by, "approve a design", words.PHYSICIST, words.PHYSICIAN)
        revision = _latest(desk, key, "checked", become="approved")
        if by == revision.prepared_by:
            raise RefusedError(
                f"{by} prepared revision {revision.number} of {key}; someone else must approve it"
            )
        stored = load_latest(desk, key)
        code = f"R{revision.number}-{revision.content_hash[:6].upper()}"
        sequence = stored.course.sequence
        first = max(sequence.start_date, desk.now.date())
        desk.append(
            Kind.DESIGN_APPROVED,
            {
                "revision": revision.number,
                "code": code,
                "next_fraction": stored.progress.next_fraction,
                "next_position": stored.progress.position,
                "next_date": next(treatment_days(sequence, first)).isoformat(),
            },
            course=key,
            who=by,
            role=role,
            meaning=words.MEANING["approved"],
        )
    return code


def send_back(database: str | None, key: str, *, by: str, reason: str) -> RevisionRow:
    """Return the latest revision to its author with a reason.

    Raises InputError without a reason and RefusedError where nothing waits.
    """
    reason = required("--reason", reason, "why the design is returned")
    with signing_desk(database) as desk:
        role = desk.role_of(by, "return a design", words.PHYSICIST, words.PHYSICIAN)
        revision = _latest(desk, key, *_WAITING, become="returned")
        desk.append(
            Kind.DESIGN_RETURNED,
            {"revision": revision.number, "reason": reason},
            course=key,
            who=by,
            role=role,
            meaning="I return this design to its author",
        )
    return revision


def _latest(desk: Desk, key: str, *states: str, become: str) -> RevisionRow:
    revision = load_latest(desk, key).revision
    if revision.state not in states:
        raise RefusedError(
            f"revision {revision.number} of {key} is {revision.state}; only one that is "
            f"{' or '.join(states)} can be {become}"
        )
    return revision
