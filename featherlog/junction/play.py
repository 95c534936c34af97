"""What the mismatch becomes when jaws and angles are off by what the machine is allowed."""

from __future__ import annotations

from itertools import product
from typing import TYPE_CHECKING

from featherlog.geometry.beams import beam_frame
from featherlog.junction.design import End
from featherlog.junction.pairs import worst

if TYPE_CHECKING:
    from collections.abc import Mapping

    from featherlog.geometry.patient import PatientPosition, Point
    from featherlog.junction.machine import Tolerances
    from featherlog.junction.placing import PlacedBeam, PlacedField


def worst_if_off(
    points: Mapping[str, tuple[Point, ...]],
    pair: tuple[PlacedField, PlacedField],
    patient: PatientPosition,
    tolerances: Tolerances,
    *,
    angles: bool,
) -> float:
    """Return the worst mismatch (cm, + gap) when each setting is off by its tolerance.

    Each of two edges is moved by the sum of what its own jaw, and with ``angles`` its gantry,
    collimator and couch, can do at the point: first order, every error against the match.
    """
    found = []
    for x, y, _ in (point for across in points.values() for point in across):
        for above, below in product(pair[0].beams, pair[1].beams):
            apart = above.inferior_edge.z_at(x, y) - below.superior_edge.z_at(x, y)
            play = sum(
                _play(placed, end, (x, y), patient, tolerances, angles=angles)
                for placed, end in ((above, End.INFERIOR), (below, End.SUPERIOR))
            )
            found += [apart + play, apart - play]
    return worst(found)


def _play(
    placed: PlacedBeam,
    end: End,
    at: tuple[float, float],
    patient: PatientPosition,
    tolerances: Tolerances,
    *,
    angles: bool,
) -> float:
    """Return how far (cm) an edge can move at (x, y) within tolerance, errors added up."""
    here = placed.edge(end).z_at(*at)
    jaw = placed.with_jaw(end, placed.jaw_cm(end) + tolerances.jaw_cm)
    moved = abs(jaw.edge(end).z_at(*at) - here)
    if not angles:
        return moved
    off = tolerances.angle_deg
    for gantry, collimator, couch in ((off, 0.0, 0.0), (0.0, off, 0.0), (0.0, 0.0, off)):
        frame = beam_frame(
            patient,
            gantry_deg=placed.beam.gantry_deg + gantry,
            collimator_deg=placed.collimator_deg + collimator,
            couch_deg=placed.couch_deg + couch,
            isocentre_cm=placed.isocentre_cm,
            sad_cm=placed.beam.sad_cm,
        )
        edge = frame.edge(placed.jaw_cm(end), placed.superior.axis)
        moved += abs(edge.z_at(*at) - here)
    return moved
