"""From a design to a whole plan: settings of every position, the fractions, and the warnings."""

from __future__ import annotations

from itertools import chain
from typing import TYPE_CHECKING

from featherlog.junction.plan import Plan, PlannedFraction
from featherlog.junction.solve import solve
from featherlog.sequence.pattern import assign
from featherlog.sequence.warnings import warnings

if TYPE_CHECKING:
    from featherlog.junction.design import Course
    from featherlog.junction.machine import Machine


def plan_course(course: Course, machine: Machine) -> Plan:
    """Solve a design on a machine and assign its positions to its fractions.

    Raises RefusedError where the machine cannot deliver a position.
    """
    settings = solve(course, machine)
    fractions = plan_fractions(course)
    return Plan(settings, fractions, warnings(course, machine, settings, fractions))


def plan_fractions(course: Course) -> tuple[PlannedFraction, ...]:
    """Return every prescribed fraction; numbers run through all phases."""
    phases = [[phase.dose_per_fraction_gy] * phase.fractions for phase in course.phases]
    runs = phases if course.sequence.restart_each_phase else [list(chain.from_iterable(phases))]
    steps = [steps for doses in runs for steps in assign(course.sequence, doses)]
    names = [phase.name for phase in course.phases for _ in range(phase.fractions)]
    return tuple(
        PlannedFraction(number, name, dose, step)
        for number, (name, dose, step) in enumerate(
            zip(names, chain.from_iterable(phases), steps, strict=True), start=1
        )
    )
