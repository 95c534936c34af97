"""How wide a beam's penumbra is at a point, from the machine's table by depth."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from featherlog.dose.edges import sigma_from_80_20
from featherlog.geometry.beams import beam_frame

if TYPE_CHECKING:
    from featherlog.geometry.patient import PatientPosition, Point
    from featherlog.junction.machine import BeamQuality
    from featherlog.junction.plan import BeamSetting


def depth_in_beam(
    point_cm: Point, setting: BeamSetting, patient_position: PatientPosition
) -> float:
    """Return the depth (cm) of a point along a beam from that beam's own entrance surface.

    It is the distance from the source along the beam axis less the SSD, never less than 0.
    """
    frame = beam_frame(
        patient_position,
        gantry_deg=setting.gantry_deg,
        collimator_deg=setting.collimator_deg,
        couch_deg=setting.couch_deg,
        isocentre_cm=setting.isocentre_cm,
        sad_cm=setting.sad_cm,
    )
    from_source_cm = setting.sad_cm - float(frame.to_beam(point_cm)[2])
    return max(0.0, from_source_cm - setting.ssd_cm)


def sigma_at(quality: BeamQuality, depth_cm: float) -> float:
    """Return the Gaussian sigma (cm) of an edge at a depth.

    The 80-20 % width is interpolated linearly between the depths of the table and held constant
    above the first and below the last.
    """
    table = quality.penumbra_80_20_cm
    return sigma_from_80_20(float(np.interp(depth_cm, table.depth_cm, table.value)))
