"""What a design comes to, before or after it is stored; nothing here writes."""

from __future__ import annotations

from typing import TYPE_CHECKING

from featherlog import words
from featherlog.actions.desk import at_desk
from featherlog.actions.dose import design_dose
from featherlog.actions.stored import load_latest
from featherlog.exchange.design_file import read_design
from featherlog.exchange.machine_file import read_machine
from featherlog.sequence.calendar import project_dates
from featherlog.sequence.pattern import blocks, shares, shift_fractions
from featherlog.sequence.planning import plan_course
from featherlog.views.solution import BlockLine, SolutionView

if TYPE_CHECKING:
    from pathlib import Path

    from featherlog.junction.design import Course
    from featherlog.junction.machine import Machine
    from featherlog.junction.plan import Plan


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
    return _solution(stored.course, stored.machine, stored.plan, depths_cm)


def _solution(
    course: Course, machine: Machine, plan: Plan, depths_cm: tuple[float, ...]
) -> SolutionView:
    positions = [fraction.position for fraction in plan.fractions]
    dates = project_dates(
        course.sequence, course.fractions, course.fractions_a_day, course.sequence.start_date
    )
    return SolutionView(
        course=course,
        machine=machine.name,
        positions=plan.positions,
        blocks=tuple(
            BlockLine(
                block.first,
                block.last,
                block.position,
                dates[block.first - 1].isoformat(),
                dates[block.last - 1].isoformat(),
            )
            for block in blocks(positions)
        ),
        shares=tuple(shares(positions).items()),
        shift_fractions=shift_fractions(positions),
        warnings=plan.warnings,
        dose=design_dose(course, plan, machine, depths_cm=depths_cm),
        caution=words.CAUTION,
    )
