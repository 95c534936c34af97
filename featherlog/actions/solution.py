"""What a design comes to, before or after it is stored; nothing here writes."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

from featherlog import words
from featherlog.actions.desk import at_desk
from featherlog.actions.dose import design_dose
from featherlog.actions.stored import load_latest
from featherlog.exchange.design_file import read_design
from featherlog.exchange.machine_file import read_machine
from featherlog.junction.hand_check import hand_checks
from featherlog.sequence.calendar import project_dates
from featherlog.sequence.pattern import (
    blocks,
    evener_blocks,
    shift_fractions,
    weighted_shares,
)
from featherlog.sequence.planning import plan_course
from featherlog.views.solution import BlockLine, Signature, SolutionView

if TYPE_CHECKING:
    from pathlib import Path

    from featherlog.junction.design import Course
    from featherlog.junction.machine import Machine
    from featherlog.junction.plan import Plan
    from featherlog.sequence.pattern import Block


def solve_files(design: Path, machine: Path, *, depths_cm: tuple[float, ...] = ()) -> SolutionView:
    """Solve a design file for a machine file, with no database.

    Raises InputError for faulty files and RefusedError where the machine cannot deliver it.
    """
    known = read_machine(machine)
    course = read_design(design, known)
    return _solution(course, known, plan_course(course, known), depths_cm)


def stored_solution(
    database: str | None, key: str, *, depths_cm: tuple[float, ...] = ()
) -> SolutionView:
    """Return the latest revision of a stored course as it was solved when it was prepared.

    Raises NotFoundError where there is no such course.
    """
    with at_desk(database) as desk:
        stored = load_latest(desk, key)
        heading, printed_at = stored.heading(demo=desk.demo), desk.stamp
    revision = stored.revision
    return replace(
        _solution(stored.course, stored.machine, stored.plan, depths_cm),
        heading=heading,
        content_hash=revision.content_hash,
        signatures=(
            Signature("prepared", revision.prepared_by, revision.prepared_at),
            Signature("checked", revision.checked_by or "", revision.checked_at or ""),
            Signature("approved", revision.approved_by or "", revision.approved_at or ""),
        ),
        returned_reason=revision.returned_reason or "",
        printed_at=printed_at,
    )


def _solution(
    course: Course, machine: Machine, plan: Plan, depths_cm: tuple[float, ...]
) -> SolutionView:
    positions = [fraction.position for fraction in plan.fractions]
    dates = [
        day.isoformat()
        for day in project_dates(
            course.sequence, course.fractions, course.fractions_a_day, course.sequence.start_date
        )
    ]
    return SolutionView(
        heading=None,
        content_hash="",
        signatures=(),
        returned_reason="",
        course=course,
        machine=machine.name,
        positions=plan.positions,
        blocks=_block_lines(blocks(positions), dates),
        shares=tuple(weighted_shares(plan.fractions).items()),
        more_even=_block_lines(evener_blocks(positions) or (), dates),
        shift_fractions=shift_fractions(plan.fractions),
        warnings=plan.warnings,
        hand_checks=hand_checks(course, plan.positions),
        dose=design_dose(course, plan, machine, depths_cm=depths_cm),
        printed_at="",
        caution=words.CAUTION,
    )


def _block_lines(found: tuple[Block, ...], dates: list[str]) -> tuple[BlockLine, ...]:
    return tuple(
        BlockLine(
            block.first, block.last, block.position, dates[block.first - 1], dates[block.last - 1]
        )
        for block in found
    )
