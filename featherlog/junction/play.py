"""By how much the mismatch may change when settings are off by what the machine is allowed."""

from __future__ import annotations

from typing import TYPE_CHECKING

from featherlog.geometry.beams import beam_frame
from featherlog.junction.design import End, MovedBy
from featherlog.junction.plan import Play

if TYPE_CHECKING:
    from collections.abc import Iterable, Iterator, Mapping

    from featherlog.geometry.patient import PatientPosition, Point
    from featherlog.geometry.planes import EdgePlane
    from featherlog.junction.machine import Tolerances
    from featherlog.junction.placing import PlacedBeam, PlacedField

_WAYS = (-1, 1)


def play_if_off(
    points: Mapping[str, tuple[Point, ...]],
    pair: tuple[PlacedField, PlacedField],
    patient: PatientPosition,
    tolerances: Tolerances,
    *,
    everything: bool,
) -> Play:
    """Return by how much (cm, either way) the mismatch as set may change at the stated points.

    ``points`` are named by depth, "match depth" among them. Each of two edges is moved by the sum
    of what its own jaw, and with ``everything`` its gantry, collimator, couch and the table under a
    field moved by the couch, can do at the point: first order, every error against the match. One
    isocentre for both fields is one table setting, whose error they share.
    """
    isocentres = {beam.isocentre_cm for field in pair for beam in field.beams}

    def worst(at: Iterable[Point]) -> float:
        return max(sum(farthest(*edge, point) for edge in edges) for point in at)

    def farthest(field: PlacedField, end: End, point: Point) -> float:
        table = everything and len(isocentres) > 1 and field.field.moved_by is MovedBy.COUCH
        return (tolerances.table_cm if table else 0.0) + max(
            _moved(beam, end, point, off(beam, end)) for beam in field.beams
        )

    def off(beam: PlacedBeam, end: End) -> Iterator[list[EdgePlane]]:
        yield _jaw_off(beam, end, tolerances.jaw_cm)
        if everything:
            yield from _angles_off(beam, end, patient, tolerances.angle_deg)

    edges = tuple(zip(pair, (End.INFERIOR, End.SUPERIOR), strict=True))
    every = (point for across in points.values() for point in across)
    return Play(worst(points["match depth"]), worst(every))


def _moved(placed: PlacedBeam, end: End, at: Point, off: Iterable[list[EdgePlane]]) -> float:
    """Return how far (cm) an edge moves at a point, the worse way of each error added up."""
    x, y = at[:2]
    here = placed.edge(end).z_at(x, y)
    return sum(max(abs(edge.z_at(x, y) - here) for edge in ways) for ways in off)


def _jaw_off(placed: PlacedBeam, end: End, off_cm: float) -> list[EdgePlane]:
    return [placed.with_jaw(end, placed.jaw_cm(end) + way * off_cm).edge(end) for way in _WAYS]


def _angles_off(
    placed: PlacedBeam, end: End, patient: PatientPosition, off_deg: float
) -> Iterator[list[EdgePlane]]:
    """Yield the edge with each angle in turn off either way."""
    for gantry, collimator, couch in ((1, 0, 0), (0, 1, 0), (0, 0, 1)):
        frames = (
            beam_frame(
                patient,
                gantry_deg=placed.beam.gantry_deg + way * gantry * off_deg,
                collimator_deg=placed.collimator_deg + way * collimator * off_deg,
                couch_deg=placed.couch_deg + way * couch * off_deg,
                isocentre_cm=placed.isocentre_cm,
                sad_cm=placed.beam.sad_cm,
            )
            for way in _WAYS
        )
        yield [frame.edge(placed.jaw_cm(end), placed.superior.axis) for frame in frames]
