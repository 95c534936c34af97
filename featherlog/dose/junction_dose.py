"""The dose of a course at each of its junctions, as figures and curves to be shown.

The planned, predicted and unfeathered curves are measured against the junction's reference dose,
which is the whole course's; the delivered one against the part of it that the complete prescribed
fractions stand for, so a fraction beyond the prescribed number shows as excess. While a fraction is
unfinished its two sides cannot be compared, so the delivered curve then has Gy and no percent.

A neighbour of an earlier course had its own dose before this one began. Hot is then judged against
the higher dose of the two sides and cold against the lower.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from featherlog.dose.amounts import (
    completed_dose_gy,
    delivered_amounts,
    earlier_amounts,
    has_unfinished,
    planned_amounts,
    predicted_amounts,
    unfeathered_amounts,
)
from featherlog.dose.course_sum import AxisLine, line_dose
from featherlog.dose.figures import dose_figures
from featherlog.dose.result import (
    DELIVERED,
    PLANNED,
    PREDICTED,
    UNFEATHERED,
    UNFINISHED,
    DoseCurve,
    DoseLine,
    JunctionDose,
)
from featherlog.dose.window import junction_window
from featherlog.junction.points import point_at_depth

if TYPE_CHECKING:
    from collections.abc import Iterable

    from numpy.typing import NDArray

    from featherlog.dose.amounts import Amounts
    from featherlog.junction.design import Course, Junction
    from featherlog.junction.machine import Machine
    from featherlog.junction.plan import Plan
    from featherlog.sequence.progress import DeliveredBeam

# 0.02 cm between grid points, on whole fiftieths so that coordinates print short.
_POINTS_PER_CM = 50


@dataclass(frozen=True, slots=True)
class _CourseSum:
    """What one curve adds up, and the part of the reference dose that it is measured against."""

    name: str
    amounts: Amounts
    reference_part: float
    note: str = ""


def junction_doses(
    course: Course,
    plan: Plan,
    machine: Machine,
    deliveries: Iterable[DeliveredBeam],
    extra_depths_cm: tuple[float, ...] = (),
) -> tuple[JunctionDose, ...]:
    """Return the dose at every junction: at the skin, match, critical and asked depths."""
    sums = _course_sums(plan, tuple(deliveries), machine.tolerances.meterset_percent)
    return tuple(
        JunctionDose(
            junction=junction.name,
            reference_dose_gy=junction.reference_dose_gy,
            position_z_cm=tuple(
                (position.label, position.junction(junction.name).match_point_cm[2])
                for position in plan.positions
            ),
            lines=tuple(
                _dose_line(course, plan, machine, index, sums, depth_cm=depth_cm, place=place)
                for depth_cm, place in _places(junction, plan, extra_depths_cm).items()
            ),
        )
        for index, junction in enumerate(course.junctions)
    )


def _course_sums(
    plan: Plan, deliveries: tuple[DeliveredBeam, ...], meterset_tolerance_percent: float
) -> tuple[_CourseSum, ...]:
    prescribed_gy = sum(fraction.dose_gy for fraction in plan.fractions)
    complete_gy = completed_dose_gy(plan, deliveries, meterset_tolerance_percent)
    earlier = earlier_amounts(plan)
    return (
        _CourseSum(PLANNED, earlier | planned_amounts(plan), 1.0),
        _CourseSum(
            DELIVERED,
            earlier | delivered_amounts(plan, deliveries),
            complete_gy / prescribed_gy,
            UNFINISHED if has_unfinished(plan, deliveries, meterset_tolerance_percent) else "",
        ),
        _CourseSum(PREDICTED, earlier | predicted_amounts(plan, deliveries), 1.0),
        _CourseSum(UNFEATHERED, earlier | unfeathered_amounts(plan), 1.0),
    )


def _places(junction: Junction, plan: Plan, extra_depths_cm: tuple[float, ...]) -> dict[float, str]:
    """Return the depths (cm) to report and their names; equal depths share one line."""
    match_depth_cm = plan.positions[0].junction(junction.name).match_depth_cm
    named = [(0.0, "entrance skin"), (match_depth_cm, "match depth")]
    if junction.critical is not None:
        named.append((junction.critical.depth_cm, junction.critical.name))
    places: dict[float, str] = {}
    for depth_cm, name in named:
        places[depth_cm] = f"{places[depth_cm]}, {name}" if depth_cm in places else name
    for depth_cm in (*junction.report_depths_cm, *extra_depths_cm):
        places.setdefault(depth_cm, "asked depth")
    return places


def _dose_line(
    course: Course,
    plan: Plan,
    machine: Machine,
    index: int,
    sums: tuple[_CourseSum, ...],
    *,
    depth_cm: float,
    place: str,
) -> DoseLine:
    junction = course.junctions[index]
    x_cm, y_cm, _ = point_at_depth(junction, depth_cm, 0.0)
    line = AxisLine(x_cm, y_cm, course.patient_position, machine)
    z_cm = _grid(*junction_window(line, plan, index))
    earlier_gy = _earlier_dose_gy(plan, index)
    curves = tuple(
        _curve(
            each,
            z_cm,
            line_dose(z_cm, line, plan, each.amounts),
            junction.reference_dose_gy * each.reference_part,
            earlier_gy,
        )
        for each in sums
    )
    return DoseLine(place, depth_cm, x_cm, y_cm, tuple(z_cm.tolist()), curves)


def _grid(low_cm: float, high_cm: float) -> NDArray[np.float64]:
    first, last = np.floor(low_cm * _POINTS_PER_CM), np.ceil(high_cm * _POINTS_PER_CM)
    return np.arange(first, last + 1) / _POINTS_PER_CM


def _earlier_dose_gy(plan: Plan, index: int) -> float | None:
    """Return what a neighbour of an earlier course had; None where both fields are treated."""
    beside = plan.positions[0].fields[index : index + 2]
    return next((field.earlier_dose_gy for field in beside if field.earlier_course), None)


def _curve(
    summed: _CourseSum,
    z_cm: NDArray[np.float64],
    dose_gy: NDArray[np.float64],
    own_gy: float,
    earlier_gy: float | None,
) -> DoseCurve:
    sides_gy = [own_gy] if earlier_gy is None else [own_gy, earlier_gy]
    known = own_gy > 0 and not summed.note
    figures = dose_figures(z_cm, dose_gy, max(sides_gy), min(sides_gy)) if known else None
    return DoseCurve(summed.name, tuple(dose_gy.tolist()), figures, summed.note)
