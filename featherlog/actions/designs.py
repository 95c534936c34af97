"""A design's way to the console: prepared, independently checked, approved, or returned."""

from __future__ import annotations

from typing import TYPE_CHECKING

import msgspec

from featherlog import words
from featherlog.actions.machines import machine_named
from featherlog.actions.next_date import projected_date
from featherlog.actions.signing import signing_desk
from featherlog.actions.stored import Stored, load, load_latest
from featherlog.actions.typed import printable_everywhere, required
from featherlog.errors import RefusedError
from featherlog.exchange.design_file import named_machine, read_design
from featherlog.policy import Act
from featherlog.sequence.planning import plan_course
from featherlog.sequence.revision import continued, revision_faults, unfinished_faults
from featherlog.store import queries
from featherlog.store.entry import Kind, content_hash

if TYPE_CHECKING:
    from pathlib import Path

    from featherlog.actions.desk import Desk, Signer
    from featherlog.junction.plan import Plan
    from featherlog.store.rows import RevisionRow

_WAITING = ("prepared", "checked")


def prepare(
    database: str | None, file: Path, *, by: Signer, verified_by: Signer | None = None
) -> tuple[str, int, Plan]:
    """Solve a design file and store it as the course's next revision.

    Once treatment has begun the plan goes on from what was delivered (``sequence.revision``).

    Returns the course's key, the revision's number and the plan. Raises InputError for a faulty
    file and RefusedError where the machine cannot deliver it, another revision waits, the course
    was ended, or the design cannot go on from what was delivered.
    """
    with signing_desk(database, Act.PREPARE, by, verified_by) as desk:
        machine = machine_named(desk, named_machine(file))
        course = read_design(file, machine)
        number = _next_revision(desk, course.key)
        plan = _going_on(desk, course.key, plan_course(course, machine))
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
    if row.ended_reason:
        raise RefusedError(f"course {key} was ended: {row.ended_reason}")
    return row.revision + 1


def _going_on(desk: Desk, key: str, plan: Plan) -> Plan:
    """Return the plan with all that was delivered before; RefusedError names every fault."""
    if not queries.deliveries(desk.connection, key):
        return plan
    stored = load(desk, key)
    faults = [*revision_faults(stored.plan, plan, stored.states)]
    if stored.approved:
        faults += unfinished_faults(stored.states)
    if faults:
        raise RefusedError("; ".join(faults))
    return continued(stored.plan, plan, stored.states)


def check(
    database: str | None, key: str, *, by: Signer, verified_by: Signer | None = None
) -> RevisionRow:
    """Sign the independent check of the latest revision; its author may not.

    Raises RefusedError where it is not waiting for a check, or its author checks it.
    """
    with signing_desk(database, Act.CHECK, by, verified_by) as desk:
        revision = _latest(desk, key, "prepared", become="checked")
        _refuse_author(desk, revision, "check")
        desk.append(
            Kind.DESIGN_CHECKED,
            {"revision": revision.number},
            course=key,
            meaning=words.MEANING["checked"],
        )
    return revision


def approve(
    database: str | None, key: str, *, by: Signer, verified_by: Signer | None = None
) -> str:
    """Approve the latest revision, fixing its content; return its revision code.

    Raises RefusedError where it was not checked, its author approves it, or treatment went on since
    it was prepared.
    """
    with signing_desk(database, Act.APPROVE, by, verified_by) as desk:
        revision = _latest(desk, key, "checked", become="approved")
        _refuse_author(desk, revision, "approve")
        stored = load_latest(desk, key)
        _refuse_overtaken(stored)
        code = f"R{revision.number}-{revision.content_hash[:6].upper()}"
        desk.append(
            Kind.DESIGN_APPROVED,
            {
                "revision": revision.number,
                "code": code,
                "next_fraction": stored.progress.next_fraction,
                "next_position": stored.progress.position,
                "next_date": _next_date(desk, stored),
            },
            course=key,
            meaning=words.MEANING["approved"],
        )
    return code


def _refuse_overtaken(stored: Stored) -> None:
    """Refuse a revision of a course that was treated, or corrected, since it was prepared."""
    key, revision = stored.row.key, stored.revision
    if stored.row.approved_revision is None:
        return  # all that was delivered was recorded under this very plan, or is part of it
    since = [row for row in stored.deliveries if row.entry > revision.entry]
    if since:
        raise RefusedError(
            f"fraction {since[-1].fraction} of {key} was recorded after revision {revision.number} "
            "was prepared; return it and prepare it again"
        )
    unfinished = [*unfinished_faults(stored.states)]
    if unfinished:
        raise RefusedError("; ".join(unfinished))


def _next_date(desk: Desk, stored: Stored) -> str | None:
    if stored.progress.next_fraction is None:
        return None
    course, today = stored.course, desk.now.date()
    given = {row.fraction for row in stored.deliveries if row.at[:10] == today.isoformat()}
    given.discard(stored.progress.next_fraction)
    return projected_date(desk, course, given)


def send_back(
    database: str | None,
    key: str,
    *,
    by: Signer,
    reason: str,
    verified_by: Signer | None = None,
) -> RevisionRow:
    """Return the latest revision to its author with a reason.

    Raises InputError without a reason and RefusedError where nothing waits.
    """
    reason = required("--reason", reason, "why the design is returned")
    with signing_desk(database, Act.RETURN, by, verified_by) as desk:
        revision = _latest(desk, key, *_WAITING, become="returned")
        desk.append(
            Kind.DESIGN_RETURNED,
            {"revision": revision.number, "reason": reason},
            course=key,
            meaning="I return this design to its author",
        )
    return revision


def _refuse_author(desk: Desk, revision: RevisionRow, what: str) -> None:
    author = revision.prepared_by
    if author in [signatory.who for signatory in desk.signatories]:
        raise RefusedError(
            f"{author} prepared revision {revision.number} of {revision.course}; someone else must "
            f"{what} it"
        )


def _latest(desk: Desk, key: str, *states: str, become: str) -> RevisionRow:
    revision = load_latest(desk, key).revision
    if revision.state not in states:
        raise RefusedError(
            f"revision {revision.number} of {key} is {revision.state}; only one that is "
            f"{' or '.join(states)} can be {become}"
        )
    return revision
