"""Turning a beam so that its edge plane is a neighbour's.

Two steps, each exact. The beam's source must lie in the neighbour's plane, which fixes the couch
angle; the collimator then turns the jaw's edge into that plane, and the jaw follows. Near gantry 0
and 180 a couch turn does not move the source, so there is no such angle. Angles in degrees.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from featherlog.geometry.beams import GeometryError
from featherlog.geometry.frames import patient_from_beam, patient_from_table

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from featherlog.geometry.patient import PatientPosition, Point
    from featherlog.geometry.planes import EdgePlane


@dataclass(frozen=True, slots=True)
class Turn:
    """A beam turned onto a plane: signed collimator and couch angles, and the jaw that forms it."""

    collimator_deg: float
    couch_deg: float
    jaw_cm: float


def turn_onto(
    plane: EdgePlane,
    position: PatientPosition,
    *,
    gantry_deg: float,
    isocentre_cm: Point,
    sad_cm: float,
    axis: int,
    nominal_collimator_deg: float,
    couch_range_deg: tuple[float, float],
) -> Turn:
    """Return the collimator and couch angles and the jaw whose edge plane is ``plane``.

    ``axis`` is 0 for X jaws and 1 for Y jaws; of the collimator angles half a turn apart the one
    nearer ``nominal_collimator_deg`` is taken, of the couch angles the one nearest zero. Raises
    GeometryError when no couch angle within ``couch_range_deg`` puts the source in the plane.

    With the plane's unit normal m in table-top axes, the source direction at couch angle θ is
    (sin g cos θ, -sin g sin θ, cos g); m·source = (c - n·isocentre)/SAD is A cos θ + B sin θ = C.
    """
    normal = np.asarray(plane.normal) / np.linalg.norm(plane.normal)
    offset = plane.offset_cm / float(np.linalg.norm(plane.normal))
    height = (offset - float(normal @ np.asarray(isocentre_cm))) / sad_cm
    couch = _couch_angle(
        patient_from_table(position).T @ normal, gantry_deg, height, couch_range_deg
    )
    across = patient_from_beam(position, gantry_deg, 0.0, couch).T @ normal
    if math.hypot(across[0], across[1]) < 1e-9:  # noqa: PLR2004 - noise of a plane facing the source
        raise GeometryError("the neighbour's edge plane faces the source, so no jaw can form it")
    facing = math.degrees(
        math.atan2(across[1], across[0]) if axis == 0 else math.atan2(-across[0], across[1])
    )
    turns = round((nominal_collimator_deg - facing) / 180.0)
    # Half a turn of the collimator reverses the jaw axis, and with it the sign of the position.
    sign = -1.0 if turns % 2 else 1.0
    jaw = sign * sad_cm * float(across[2]) / math.hypot(across[0], across[1])
    return Turn(signed_angle(facing + 180.0 * turns), couch, jaw)


def signed_angle(angle_deg: float) -> float:
    """Return the angle in (-180, 180]."""
    return 180.0 - (180.0 - angle_deg) % 360.0


def _couch_angle(
    normal: NDArray[np.float64], gantry_deg: float, height: float, allowed: tuple[float, float]
) -> float:
    sine, cosine = math.sin(math.radians(gantry_deg)), math.cos(math.radians(gantry_deg))
    a, b = normal[0] * sine, -normal[1] * sine
    c = height - normal[2] * cosine
    reach = math.hypot(a, b)
    still = reach < 1e-9  # noqa: PLR2004 - noise of gantry 0 and 180, whose source no turn moves
    if still or abs(c) > reach * (1 + 1e-12):
        raise GeometryError(
            "no couch angle puts its source in the neighbour's edge plane", fixed=still
        )
    middle, half = math.atan2(b, a), math.acos(max(-1.0, min(1.0, c / reach)))
    roots = sorted(
        (signed_angle(math.degrees(angle)) for angle in (middle - half, middle + half)), key=abs
    )
    for root in roots:
        if allowed[0] - 1e-9 <= root <= allowed[1] + 1e-9:
            return root + 0.0
    shown = " or ".join(f"{root:+.1f}" for root in roots)
    raise GeometryError(
        f"the couch would have to turn to {shown} degrees, outside {allowed[0]:+.1f} to "
        f"{allowed[1]:+.1f}"
    )
