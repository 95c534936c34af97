"""How a beam's edge moves in the patient from one setting to another; free of numerical libraries.

A jaw that closes while its field is moved by the couch may leave its edge where it was: only the
edge planes say which way an edge goes.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

from featherlog.junction.design import End

if TYPE_CHECKING:
    from featherlog.junction.plan import BeamSetting


def edge_move_cm(
    now: BeamSetting, before: BeamSetting, end: str, at: tuple[float, float] | None = None
) -> float:
    """Return how far (cm, + superior) the edge of one end of a beam moved in the patient.

    ``end`` is superior or inferior. The edge is followed at lateral x and height y ``at``, the
    present isocentre's where none is given.
    """
    x, y = at or now.isocentre_cm[:2]
    planes = (
        beam.superior_edge if end == End.SUPERIOR else beam.inferior_edge for beam in (now, before)
    )
    here, there = (plane.z_at(x, y) for plane in planes)
    return round(here - there, 9) + 0.0
