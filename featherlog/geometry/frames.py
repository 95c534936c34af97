"""Frames and rotations of IEC 61217 and their relation to the patient.

Patient axes (DICOM): x to the patient's left, y to posterior, z to superior. Table-top axes
follow IEC 61217: x to the right of a viewer facing the gantry, y toward the gantry, z up. Beam
axes: y and x are the directions of the Y2 and X2 jaws, z points from the isocentre to the source.
This is the only module that holds a sign convention. Lengths in cm, angles in degrees.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from featherlog.geometry.patient import PatientPosition, Point

if TYPE_CHECKING:
    from numpy.typing import NDArray

__all__ = [
    "PatientPosition",
    "Point",
    "patient_from_beam",
    "patient_from_table",
    "rotation_y",
    "rotation_z",
    "table_move",
]

# Rows: patient x, y, z. Columns: table-top x, y, z.
_PATIENT_FROM_TABLE = {
    PatientPosition.HFS: ((1, 0, 0), (0, 0, -1), (0, 1, 0)),
    PatientPosition.HFP: ((-1, 0, 0), (0, 0, 1), (0, 1, 0)),
    PatientPosition.FFS: ((-1, 0, 0), (0, 0, -1), (0, -1, 0)),
    PatientPosition.FFP: ((1, 0, 0), (0, 0, 1), (0, -1, 0)),
}


def patient_from_table(position: PatientPosition) -> NDArray[np.float64]:
    """Return the 3 x 3 matrix that carries table-top vectors to patient axes."""
    return np.array(_PATIENT_FROM_TABLE[position], dtype=np.float64)


def rotation_y(angle_deg: float) -> NDArray[np.float64]:
    """Return the right-handed 3 x 3 rotation about +y."""
    cosine, sine = _cosine_sine(angle_deg)
    return np.array([[cosine, 0, sine], [0, 1, 0], [-sine, 0, cosine]])


def rotation_z(angle_deg: float) -> NDArray[np.float64]:
    """Return the right-handed 3 x 3 rotation about +z."""
    cosine, sine = _cosine_sine(angle_deg)
    return np.array([[cosine, -sine, 0], [sine, cosine, 0], [0, 0, 1]])


def _cosine_sine(angle_deg: float) -> tuple[float, float]:
    # Quarter turns are exact, so that a gantry at 180 gives an edge plane with no stray x.
    quarters = angle_deg / 90.0
    if quarters == round(quarters):
        turn = round(quarters) % 4
        return (1.0, 0.0, -1.0, 0.0)[turn], (0.0, 1.0, 0.0, -1.0)[turn]
    radians = np.deg2rad(angle_deg)
    return float(np.cos(radians)), float(np.sin(radians))


def patient_from_beam(
    position: PatientPosition, gantry_deg: float, collimator_deg: float, couch_deg: float
) -> NDArray[np.float64]:
    """Return the 3 x 3 matrix that carries beam-axes vectors to patient axes.

    It is M · Rz(-couch) · Ry(gantry) · Rz(collimator), M being the map of the patient position
    (IEC 61217 rotations; right-handed).
    """
    matrix: NDArray[np.float64] = (
        patient_from_table(position)
        @ rotation_z(-couch_deg)
        @ rotation_y(gantry_deg)
        @ rotation_z(collimator_deg)
    )
    return matrix


def table_move(position: PatientPosition, isocentre_move_cm: Point) -> Point:
    """Return the table-top move (lateral, longitudinal, vertical; cm, IEC 61217 signs).

    Moving the isocentre by Δ in the patient needs the table top to move by -Δ carried to table-top
    axes, whatever the couch angle.
    """
    move = -patient_from_table(position).T @ np.asarray(isocentre_move_cm, dtype=np.float64)
    return (float(move[0]) + 0.0, float(move[1]) + 0.0, float(move[2]) + 0.0)
