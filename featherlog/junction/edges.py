"""The jaws that put every field's ends where they belong, exact and rounded to what can be set.

Each end of a field has a target: a junction's match point moved by its offset, or an outer border.
The point rule then gives the jaw of every beam, each beam for itself.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from itertools import pairwise, product
from typing import TYPE_CHECKING

from featherlog.geometry.beams import BeamFrame, GeometryError, beam_frame
from featherlog.junction.design import Border
from featherlog.junction.machine import Jaw
from featherlog.junction.points import across, places, point_at_depth

if TYPE_CHECKING:
    from collections.abc import Callable, Iterable

    from featherlog.geometry.patient import Point
    from featherlog.geometry.planes import EdgePlane
    from featherlog.junction.design import Beam, Course, Field, Junction
    from featherlog.junction.machine import Machine

SUPERIOR, INFERIOR = 1, -1
_JAWS = {(0, -1): Jaw.X1, (0, 1): Jaw.X2, (1, -1): Jaw.Y1, (1, 1): Jaw.Y2}


@dataclass(frozen=True, slots=True, eq=False)
class End:
    """One end of one beam: its jaw pair (0 X, 1 Y), side (+1, -1) and signed position (cm)."""

    axis: int
    side: int
    jaw_cm: float

    @property
    def jaw(self) -> Jaw:
        """Return the jaw's IEC 61217 name."""
        return _JAWS[self.axis, self.side]


@dataclass(frozen=True, slots=True, eq=False)
class PlacedBeam:
    """A beam with its frame at one position and the jaws of its two ends."""

    beam: Beam
    frame: BeamFrame
    superior: End
    inferior: End

    @property
    def superior_edge(self) -> EdgePlane:
        """Return the plane of the superior edge in patient axes."""
        return self.frame.edge(self.superior.jaw_cm, self.superior.axis)

    @property
    def inferior_edge(self) -> EdgePlane:
        """Return the plane of the inferior edge in patient axes."""
        return self.frame.edge(self.inferior.jaw_cm, self.inferior.axis)

    @property
    def jaws(self) -> dict[Jaw, float]:
        """Return all four signed jaw positions (cm)."""
        sides = (Jaw.X1, Jaw.X2) if self.superior.axis == 1 else (Jaw.Y1, Jaw.Y2)
        values = dict(zip(sides, self.beam.side_jaws_cm, strict=True))
        values[self.superior.jaw] = self.superior.jaw_cm
        values[self.inferior.jaw] = self.inferior.jaw_cm
        return {jaw: values[jaw] for jaw in Jaw}


@dataclass(frozen=True, slots=True, eq=False)
class PlacedField:
    """A field at one position; ``moved_cm`` is its isocentre's move from position A."""

    field: Field
    moved_cm: float
    beams: tuple[PlacedBeam, ...]


Chain = tuple[PlacedField, ...]


def match_point(junction: Junction, depth_cm: float, offset_cm: float) -> Point:
    """Return the match point (cm) moved along the axis by the offset, at constant depth line."""
    return point_at_depth(junction, depth_cm, junction.skin_point_cm[2] + offset_cm)


def field_move(field: Field, offsets_cm: dict[str, float]) -> float:
    """Return how far (cm, + superior) the field's isocentre moves from position A.

    A field moved by its jaws stays; one moved by the couch moves with the junction it follows.
    """
    return 0.0 if field.follows is None else offsets_cm[field.follows]


def place_exact(
    course: Course, machine: Machine, depths: dict[str, float], offsets_cm: dict[str, float]
) -> Chain:
    """Return every field with the jaws that geometry asks for, unrounded.

    ``depths`` and ``offsets_cm`` give each junction's match depth and offset by name. Raises
    GeometryError, naming the beam, where no jaw can do it.
    """
    moves = [field_move(field, offsets_cm) for field in course.fields]
    return _place(course, machine, depths, offsets_cm, moves)


def place_rounded(
    course: Course, machine: Machine, depths: dict[str, float], offsets_cm: dict[str, float]
) -> Chain:
    """Return every field with jaws and table moves rounded to what the machine can set.

    Table moves are rounded first and the jaws solved against them. Border jaws and each junction's
    superior field go to the nearest settable value; the inferior field's jaws then go whichever way
    leaves the least worst change of the mismatch, a tie going to the gap.
    """
    exact = place_exact(course, machine, depths, offsets_cm)
    moves = [to_step(field.moved_cm, machine.steps.table_cm) for field in exact]
    chain = list(_place(course, machine, depths, offsets_cm, moves))
    step = machine.steps.jaw_cm
    chain[0] = _with_ends(chain[0], superior=lambda end: to_step(end.jaw_cm, step))
    chain[-1] = _with_ends(chain[-1], inferior=lambda end: to_step(end.jaw_cm, step))
    for index, junction in enumerate(course.junctions):
        upper = _with_ends(chain[index], inferior=lambda end: to_step(end.jaw_cm, step))
        wanted = (exact[index], exact[index + 1])
        points = stated_points(junction, depths[junction.name], offsets_cm[junction.name])
        chain[index] = upper
        chain[index + 1] = _best_rounding(wanted, upper, chain[index + 1], points, step)
    return tuple(chain)


def stated_points(
    junction: Junction, depth_cm: float, offset_cm: float
) -> dict[str, tuple[Point, ...]]:
    """Return the points at which a junction's mismatch is stated, by the name of their depth."""
    z = junction.skin_point_cm[2] + offset_cm
    return {
        name: across(junction, point_at_depth(junction, depth, z))
        for name, depth in places(junction, depth_cm).items()
    }


def to_step(value: float, step: float) -> float:
    """Round to a multiple of a step, halves away from zero."""
    steps = math.floor(abs(value) / step + 0.5 + 1e-9)
    return round(math.copysign(steps * step, value), 9) + 0.0


def pair_mismatches(upper: PlacedField, lower: PlacedField, point: Point) -> list[float]:
    """Return the mismatch (cm, + gap) at a point for every pair of a superior and inferior beam."""
    x, y = point[:2]
    ends = [beam.inferior_edge.z_at(x, y) for beam in upper.beams]
    starts = [beam.superior_edge.z_at(x, y) for beam in lower.beams]
    return [end - start for end, start in product(ends, starts)]


def worst(values: Iterable[float]) -> float:
    """Return the value farthest from zero, with its sign; a tie goes to the gap."""
    return max(values, key=lambda value: (round(abs(value), 9), value))


def _place(
    course: Course,
    machine: Machine,
    depths: dict[str, float],
    offsets_cm: dict[str, float],
    moves: list[float],
) -> Chain:
    targets: list[Point | Border] = [
        course.superior_border,
        *(match_point(j, depths[j.name], offsets_cm[j.name]) for j in course.junctions),
        course.inferior_border,
    ]
    return tuple(
        PlacedField(
            field,
            move,
            tuple(_place_beam(course, machine, beam, move, ends) for beam in field.beams),
        )
        for field, move, ends in zip(course.fields, moves, pairwise(targets), strict=True)
    )


def _place_beam(
    course: Course,
    machine: Machine,
    beam: Beam,
    move_cm: float,
    ends: tuple[Point | Border, Point | Border],
) -> PlacedBeam:
    x, y, z = beam.isocentre_cm
    frame = beam_frame(
        course.patient_position,
        gantry_deg=beam.gantry_deg,
        collimator_deg=beam.collimator_deg,
        couch_deg=beam.couch_deg,
        isocentre_cm=(x, y, z + move_cm),
        sad_cm=machine.sad_cm,
    )
    try:
        superior, inferior = (
            _end(frame, target, direction, move_cm)
            for target, direction in zip(ends, (SUPERIOR, INFERIOR), strict=True)
        )
    except GeometryError as error:
        raise GeometryError(f"beam {beam.name}: {error}") from error
    return PlacedBeam(beam, frame, superior, inferior)


def _end(frame: BeamFrame, target: Point | Border, direction: int, move_cm: float) -> End:
    axis, side = frame.end_axis(direction)
    if not isinstance(target, Border):
        return End(axis, side, frame.jaw_through(target, axis))
    if target.point_cm is None:
        return End(axis, side, side * (target.reach_cm or 0.0))
    x, y, z = target.point_cm
    point = (x, y, z if target.held else z + move_cm)
    return End(axis, side, frame.jaw_through(point, axis))


def _with_ends(
    field: PlacedField,
    *,
    superior: Callable[[End], float] | None = None,
    inferior: Callable[[End], float] | None = None,
) -> PlacedField:
    beams = tuple(
        replace(
            beam,
            superior=replace(beam.superior, jaw_cm=superior(beam.superior))
            if superior
            else beam.superior,
            inferior=replace(beam.inferior, jaw_cm=inferior(beam.inferior))
            if inferior
            else beam.inferior,
        )
        for beam in field.beams
    )
    return replace(field, beams=beams)


def _best_rounding(
    wanted: tuple[PlacedField, PlacedField],
    upper: PlacedField,
    lower: PlacedField,
    points: dict[str, tuple[Point, ...]],
    step: float,
) -> PlacedField:
    every = [point for at_depth in points.values() for point in at_depth]
    planned = [value for point in every for value in pair_mismatches(*wanted, point)]

    def cost(candidate: PlacedField) -> tuple[float, float]:
        got = [value for point in every for value in pair_mismatches(upper, candidate, point)]
        change = worst(a - b for a, b in zip(got, planned, strict=True))
        return round(abs(change), 9), -change

    choices = [_neighbours(beam.superior.jaw_cm, step) for beam in lower.beams]
    return min((_set_superior(lower, jaws) for jaws in product(*choices)), key=cost)


def _set_superior(field: PlacedField, jaws_cm: tuple[float, ...]) -> PlacedField:
    beams = tuple(
        replace(beam, superior=replace(beam.superior, jaw_cm=jaw))
        for beam, jaw in zip(field.beams, jaws_cm, strict=True)
    )
    return replace(field, beams=beams)


def _neighbours(value: float, step: float) -> tuple[float, ...]:
    # One step either way even from a value that can be set: the other side may have been rounded.
    nearest = to_step(value, step)
    return tuple(round(nearest + steps * step, 9) + 0.0 for steps in (-1, 0, 1))
