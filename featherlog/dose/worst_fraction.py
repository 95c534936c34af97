"""The extremes of single fractions, which the sum over a course hides."""

from __future__ import annotations

from typing import TYPE_CHECKING

from featherlog.dose.amounts import delivered_amounts, fraction_amounts, prescribed_dose_gy
from featherlog.dose.course_sum import AxisLine, line_dose
from featherlog.dose.figures import dose_figures

if TYPE_CHECKING:
    from collections.abc import Iterable

    import numpy as np
    from numpy.typing import NDArray

    from featherlog.dose.result import DoseFigures
    from featherlog.junction.plan import Plan
    from featherlog.sequence.progress import DeliveredBeam


def figures_by_position(
    z_cm: NDArray[np.float64], line: AxisLine, plan: Plan
) -> dict[str, DoseFigures]:
    """Return the figures of one planned fraction of 1 Gy at each position, by position label."""
    return {
        position.label: dose_figures(
            z_cm, line_dose(z_cm, line, plan, fraction_amounts(plan, position.label, 1.0)), 1.0
        )
        for position in plan.positions
    }


def figures_by_fraction(
    z_cm: NDArray[np.float64], line: AxisLine, plan: Plan, deliveries: Iterable[DeliveredBeam]
) -> dict[int, DoseFigures]:
    """Return the figures of each fraction as delivered, against its prescribed dose, by number.

    Fields of one fraction may stand at different positions here, as they truly did.
    """
    given: dict[int, list[DeliveredBeam]] = {}
    for delivery in deliveries:
        given.setdefault(delivery.fraction, []).append(delivery)
    return {
        number: dose_figures(
            z_cm,
            line_dose(z_cm, line, plan, delivered_amounts(plan, given[number])),
            prescribed_dose_gy(plan, number),
        )
        for number in sorted(given)
    }
