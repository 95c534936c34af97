"""Where a beam's jaws put its edges in the patient, and which jaw puts an edge through a point.

Everything about a junction is a statement about two edge planes. Lengths in cm, angles in degrees.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from featherlog.geometry.frames import patient_from_beam
from featherlog.geometry.planes import EdgePlane

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from featherlog.geometry.patient import PatientPosition, Point

# An end of a field belongs to a jaw only while the jaw faces it within this angle.
MOST_EDGE_TILT_DEG = 30.0


class GeometryError(ValueError):
    """Beams cannot do what is asked of them for geometric reasons, one message for each.

    ``fixed`` is true where one of them holds wherever the junctions are put.
    """

    def __init__(self, *messages: str, fixed: bool = False) -> None:
        super().__init__("; ".join(messages))
        self.messages = messages
        self.fixed = fixed


@dataclass(frozen=True, slots=True, eq=False)
class BeamFrame:
    """A beam's axes in the patient.

    ``axes`` (3 x 3) carries beam-axes vectors to patient axes, ``isocentre_cm`` (3) is in patient
    axes and the source stands ``sad_cm`` above it along the third column.
    """

    axes: NDArray[np.float64]
    isocentre_cm: NDArray[np.float64]
    sad_cm: float

    @property
    def toward_source(self) -> NDArray[np.float64]:
        """Return the unit vector (3) from isocentre to source in patient axes."""
        return self.axes[:, 2]

    def to_beam(self, point_cm: Point) -> NDArray[np.float64]:
        """Return a patient point in beam axes (3), cm; z is its height toward the source."""
        beam: NDArray[np.float64] = self.axes.T @ (np.asarray(point_cm) - self.isocentre_cm)
        return beam

    def jaw_through(self, point_cm: Point, axis: int) -> float:
        """Return the signed jaw position (cm) whose edge passes through a patient point.

        ``axis`` is 0 for X jaws and 1 for Y jaws. p = q·SAD / (SAD - q_z), by similar triangles
        from the source. Raises GeometryError for a point level with the source or beyond it.
        """
        q = self.to_beam(point_cm)
        distance = self.sad_cm - q[2]
        if distance <= 0:
            raise GeometryError(
                f"the point {_shown(point_cm)} lies level with the source or beyond it"
            )
        return float(q[axis] * self.sad_cm / distance)

    def edge(self, jaw_cm: float, axis: int) -> EdgePlane:
        """Return the edge plane of a jaw at a signed position, in patient axes.

        In beam axes its normal is the jaw's axis plus (p/SAD) of the beam axis, its offset p: it
        holds the source and the jaw's edge at the isocentre plane. Raises GeometryError for a plane
        that the junction axis never crosses.
        """
        normal_beam = np.zeros(3)
        normal_beam[axis] = 1.0
        normal_beam[2] = jaw_cm / self.sad_cm
        normal = self.axes @ normal_beam
        if abs(normal[2]) < 1e-9:  # noqa: PLR2004 - noise of a plane parallel to the axis
            raise GeometryError("the edge lies along the junction axis, so it has no place on it")
        offset = jaw_cm + float(normal @ self.isocentre_cm)
        return EdgePlane((float(normal[0]), float(normal[1]), float(normal[2])), offset)

    def end_axis(self, direction: int) -> tuple[int, int]:
        """Return the jaw pair (0 for X, 1 for Y) and side (+1, -1) facing an end of the z axis.

        ``direction`` is +1 for superior and -1 for inferior. The jaw is the one whose outward
        normal is most nearly parallel to that direction; GeometryError beyond 30 degrees.
        """
        facing = {(axis, side): side * self.axes[2, axis] for axis in (0, 1) for side in (1, -1)}
        axis, side = max(facing, key=lambda jaw: facing[jaw] * direction)
        tilt = float(np.degrees(np.arccos(min(1.0, facing[axis, side] * direction))))
        if tilt > MOST_EDGE_TILT_DEG:
            raise GeometryError(
                f"no jaw faces the junction within {MOST_EDGE_TILT_DEG:.0f} degrees: the nearest "
                f"is turned {tilt:.1f} degrees from the junction axis",
                fixed=True,
            )
        return axis, side


def beam_frame(
    position: PatientPosition,
    *,
    gantry_deg: float,
    collimator_deg: float,
    couch_deg: float,
    isocentre_cm: Point,
    sad_cm: float,
) -> BeamFrame:
    """Return the frame of a beam at IEC 61217 angles for a patient lying in ``position``."""
    axes = patient_from_beam(position, gantry_deg, collimator_deg, couch_deg)
    return BeamFrame(axes, np.asarray(isocentre_cm, dtype=np.float64), sad_cm)


def _shown(point_cm: Point) -> str:
    return "(" + ", ".join(f"{value:.2f}" for value in point_cm) + ")"
