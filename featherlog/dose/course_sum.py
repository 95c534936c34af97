"""A course's dose along a line parallel to the junction axis.

Edge effects alone: inside its edges every beam gives its share of the prescribed dose at any depth.
Lengths in cm, doses in Gy, points in patient axes.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from featherlog.dose.edges import open_profile
from featherlog.dose.penumbra import depth_in_beam, sigma_at

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from featherlog.dose.amounts import Amounts
    from featherlog.geometry.patient import PatientPosition
    from featherlog.geometry.planes import EdgePlane
    from featherlog.junction.machine import Machine
    from featherlog.junction.plan import BeamSetting, Plan


@dataclass(frozen=True, slots=True)
class AxisLine:
    """The line along the junction axis at lateral x and height y, in a patient on a machine."""

    x_cm: float
    y_cm: float
    patient_position: PatientPosition
    machine: Machine


@dataclass(frozen=True, slots=True)
class EdgeOnLine:
    """Where a field edge crosses a line along the axis, and the sigma of its penumbra there."""

    z_cm: float
    sigma_cm: float


def edge_on_line(line: AxisLine, setting: BeamSetting, edge: EdgePlane) -> EdgeOnLine:
    """Return where one of a beam's edges crosses the line, with its penumbra along the line.

    The penumbra is that of the depth at the crossing, and is stretched by 1/|n_z| along the line
    because the table gives its width square to the edge plane (n its unit normal).
    """
    z_cm = edge.z_at(line.x_cm, line.y_cm)
    crossing_cm = (line.x_cm, line.y_cm, z_cm)
    depth_cm = depth_in_beam(crossing_cm, setting, line.patient_position)
    across_cm = sigma_at(line.machine.quality(setting.energy), depth_cm)
    stretch = float(np.linalg.norm(edge.normal)) / abs(edge.normal[2])
    return EdgeOnLine(z_cm, across_cm * stretch)


def beam_profile(
    z_cm: NDArray[np.float64], line: AxisLine, setting: BeamSetting
) -> NDArray[np.float64]:
    """Return one beam's dose along the line relative to its open field; same shape as ``z_cm``."""
    inferior = edge_on_line(line, setting, setting.inferior_edge)
    superior = edge_on_line(line, setting, setting.superior_edge)
    return open_profile(
        z_cm,
        inferior_edge_cm=inferior.z_cm,
        superior_edge_cm=superior.z_cm,
        inferior_sigma_cm=inferior.sigma_cm,
        superior_sigma_cm=superior.sigma_cm,
        transmission=line.machine.quality(setting.energy).transmission,
    )


def line_dose(
    z_cm: NDArray[np.float64], line: AxisLine, plan: Plan, amounts: Amounts
) -> NDArray[np.float64]:
    """Return the dose (Gy) along the line; same shape as ``z_cm``.

    Each geometry, one beam at one position, is evaluated once and weighted by its amount.
    """
    dose_gy = np.zeros_like(z_cm)
    for position in plan.positions:
        for setting in (beam for field in position.fields for beam in field.beams):
            amount_gy = amounts.get((position.label, setting.beam), 0.0)
            if amount_gy:
                dose_gy += amount_gy * beam_profile(z_cm, line, setting)
    return dose_gy
