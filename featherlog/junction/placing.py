"""Where every field's edges are put at one position, exactly.

Each end of a field has a target: a junction's match point moved by its offset (and by its part of a
planned separation), or an outer border. The point rule then gives the jaw of every beam, each beam
for itself. Fields that are not turned come first; a turned field's beams are then turned onto their
neighbour's edge plane.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from functools import partial
from statistics import fmean
from typing import TYPE_CHECKING, TypeVar

from featherlog.geometry.beams import BeamFrame, GeometryError, beam_frame
from featherlog.geometry.matching import turn_onto
from featherlog.geometry.planes import EdgePlane
from featherlog.junction.design import Border, End
from featherlog.junction.machine import Jaw
from featherlog.junction.points import across, places, point_at_depth

if TYPE_CHECKING:
    from collections.abc import Callable, Iterable, Mapping

    from featherlog.geometry.patient import Point
    from featherlog.junction.design import Beam, Course, Field, Junction
    from featherlog.junction.machine import Machine

_JAWS = {(0, -1): Jaw.X1, (0, 1): Jaw.X2, (1, -1): Jaw.Y1, (1, 1): Jaw.Y2}
OTHER_END = {End.SUPERIOR: End.INFERIOR, End.INFERIOR: End.SUPERIOR}
_DIRECTION = {End.SUPERIOR: 1, End.INFERIOR: -1}


@dataclass(frozen=True, slots=True)
class Task:
    """A design on a machine, with every junction's match depth (cm) known by name."""

    course: Course
    machine: Machine
    depth_cm: Mapping[str, float]


@dataclass(frozen=True, slots=True)
class FieldEnd:
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
    """A beam with its frame, its signed angles at this position, and the jaws of its two ends."""

    beam: Beam
    frame: BeamFrame
    collimator_deg: float
    couch_deg: float
    superior: FieldEnd
    inferior: FieldEnd

    @property
    def superior_edge(self) -> EdgePlane:
        """Return the plane of the superior edge in patient axes."""
        return self.frame.edge(self.superior.jaw_cm, self.superior.axis)

    @property
    def inferior_edge(self) -> EdgePlane:
        """Return the plane of the inferior edge in patient axes."""
        return self.frame.edge(self.inferior.jaw_cm, self.inferior.axis)

    @property
    def isocentre_cm(self) -> Point:
        """Return the isocentre (cm) at this position."""
        x, y, z = (float(value) for value in self.frame.isocentre_cm)
        return (x, y, z)

    def edge(self, end: End) -> EdgePlane:
        """Return the plane of one end's edge in patient axes."""
        return self.superior_edge if end is End.SUPERIOR else self.inferior_edge

    def jaw_cm(self, end: End) -> float:
        """Return the signed position (cm) of the jaw that forms one end."""
        return (self.superior if end is End.SUPERIOR else self.inferior).jaw_cm

    def with_jaw(self, end: End, jaw_cm: float) -> PlacedBeam:
        """Return the beam with one end's jaw elsewhere."""
        if end is End.SUPERIOR:
            return replace(self, superior=replace(self.superior, jaw_cm=jaw_cm))
        return replace(self, inferior=replace(self.inferior, jaw_cm=jaw_cm))

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
HeldAngles = dict[str, tuple[float, float]]
"""The collimator and couch angle (degrees) of each turned beam, by its name."""


def place_unturned(task: Task, offset_cm: Mapping[str, float], moves_cm: list[float]) -> Chain:
    """Return every field with its jaws by the point rule, no field turned yet.

    ``offset_cm`` gives each junction's offset by name and ``moves_cm`` each field's isocentre move.
    Raises GeometryError, naming every such beam, where no jaw can do it.
    """
    faults: list[GeometryError] = []
    chain = tuple(
        PlacedField(
            field,
            move,
            _each(
                field.beams,
                partial(_placed, task, index=index, offset_cm=offset_cm, move_cm=move),
                faults,
            ),
        )
        for index, (field, move) in enumerate(zip(task.course.fields, moves_cm, strict=True))
    )
    _raise_all(faults)
    return chain


def turn_fields(
    task: Task,
    chain: Chain,
    offset_cm: Mapping[str, float],
    *,
    angle: Callable[[float], float] = float,
    held: HeldAngles | None = None,
) -> Chain:
    """Return the chain with each turned field turned onto its neighbour as that now stands.

    ``angle`` rounds the angles of a turn; ``held`` gives those of beams whose junction holds them.
    Raises GeometryError, naming every such beam, where no angle within the machine's range can do
    it.
    """
    fields = list(chain)
    faults: list[GeometryError] = []

    def turned(placed: PlacedBeam, match: _Match) -> PlacedBeam:
        kept = (held or {}).get(placed.beam.name)
        angles = kept or _angles(task, placed, match.plane, angle)
        return _turn(task, placed, match, offset_cm, angles)

    for index, junction_index in turned_fields(task.course).items():
        match = _match(task.course, fields, index, junction_index)
        beams = _each(fields[index].beams, partial(turned, match=match), faults)
        fields[index] = replace(fields[index], beams=beams)
    _raise_all(faults)
    return tuple(fields)


_Item = TypeVar("_Item")


def _each(
    beams: Iterable[_Item], place: Callable[[_Item], PlacedBeam], faults: list[GeometryError]
) -> tuple[PlacedBeam, ...]:
    """Place every beam that can be; what keeps the others from it is added to ``faults``."""
    placed = []
    for beam in beams:
        try:
            placed.append(place(beam))
        except GeometryError as error:
            faults.append(error)
    return tuple(placed)


def _raise_all(faults: list[GeometryError]) -> None:
    if faults:
        messages = dict.fromkeys(message for fault in faults for message in fault.messages)
        raise GeometryError(*messages, fixed=any(fault.fixed for fault in faults))


def turned_index(course: Course, index: int) -> int | None:
    """Return which field is turned at a junction; None where none is."""
    turned = course.junctions[index].turned_field
    names = [field.name for field in course.fields[index : index + 2]]
    return index + names.index(turned) if turned is not None else None


def turned_fields(course: Course) -> dict[int, int]:
    """Return each turned field's index with the index of the junction it is turned at."""
    pairs = ((turned_index(course, index), index) for index in range(len(course.junctions)))
    return {field: junction for field, junction in pairs if field is not None}


def match_point(junction: Junction, depth_cm: float, offset_cm: float) -> Point:
    """Return the match point (cm), moved along the axis by the offset at constant x and y."""
    return point_at_depth(junction, depth_cm, junction.skin_point_cm[2] + offset_cm)


def meeting_point(task: Task, index: int, offset_cm: Mapping[str, float]) -> Point:
    """Return the point (cm) where the edges of a junction are to meet.

    It is the match point moved by the offset. Beside a field of an earlier course, which never
    moves, it lies on that field's edge: the mean of its beams' edges, or the edge that a turned
    neighbour is turned onto.
    """
    junction = task.course.junctions[index]
    x, y, z = match_point(junction, task.depth_cm[junction.name], offset_cm[junction.name])
    for other, end in ((index, End.INFERIOR), (index + 1, End.SUPERIOR)):
        field = task.course.fields[other]
        if field.earlier is not None:
            beams = field.beams if junction.turned_field is None else [_matched(junction, field)]
            placed = (_placed(task, beam, other, offset_cm, 0.0) for beam in beams)
            z = fmean(each.edge(end).z_at(x, y) for each in placed)
    return (x, y, z)


def _matched(junction: Junction, neighbour: Field) -> Beam:
    """Return the beam of a field onto whose edge its neighbour is turned: the first, or named."""
    wanted = junction.matched_beam or neighbour.beams[0].name
    return next(beam for beam in neighbour.beams if beam.name == wanted)


def separation_part(course: Course, index: int, end: End) -> float:
    """Return how far (cm, + superior) one edge stands off the match point by the planned gap.

    ``end`` is the edge's end of its own field: inferior for the field above the junction. A planned
    separation is split evenly, or borne by the field that is named.
    """
    junction = course.junctions[index]
    field = course.fields[index if end is End.INFERIOR else index + 1]
    part = 0.5 if junction.borne_by is None else float(junction.borne_by == field.name)
    return (1 if end is End.INFERIOR else -1) * part * junction.separation_cm


def stated_points(
    junction: Junction, depth_cm: float, offset_cm: float
) -> dict[str, tuple[Point, ...]]:
    """Return the points at which a junction's mismatch is stated, by the name of their depth."""
    z = junction.skin_point_cm[2] + offset_cm
    return {
        name: across(junction, point_at_depth(junction, depth, z))
        for name, depth in places(junction, depth_cm).items()
    }


def _placed(
    task: Task, beam: Beam, index: int, offset_cm: Mapping[str, float], move_cm: float
) -> PlacedBeam:
    frame = _frame(task, beam, move_cm, beam.collimator_deg, beam.couch_deg)
    targets = {end: _target(task, index, end, offset_cm) for end in (End.SUPERIOR, End.INFERIOR)}
    try:
        ends = {end: _end(frame, target, end, move_cm) for end, target in targets.items()}
    except GeometryError as error:
        raise GeometryError(f"beam {beam.name}: {error}", fixed=error.fixed) from error
    return PlacedBeam(
        beam, frame, beam.collimator_deg, beam.couch_deg, ends[End.SUPERIOR], ends[End.INFERIOR]
    )


def _frame(
    task: Task, beam: Beam, move_cm: float, collimator_deg: float, couch_deg: float
) -> BeamFrame:
    x, y, z = beam.isocentre_cm
    return beam_frame(
        task.course.patient_position,
        gantry_deg=beam.gantry_deg,
        collimator_deg=collimator_deg,
        couch_deg=couch_deg,
        isocentre_cm=(x, y, z + move_cm),
        sad_cm=beam.sad_cm,
    )


def _target(task: Task, index: int, end: End, offset_cm: Mapping[str, float]) -> Point | Border:
    course = task.course
    if index == 0 and end is End.SUPERIOR:
        return course.superior_border
    if index == len(course.fields) - 1 and end is End.INFERIOR:
        return course.inferior_border
    if (earlier := course.fields[index].earlier) is not None:
        return Border(reach_cm=earlier.junction_reach_cm)
    place = index - 1 if end is End.SUPERIOR else index
    x, y, z = meeting_point(task, place, offset_cm)
    return (x, y, z + separation_part(course, place, end))


def _end(frame: BeamFrame, target: Point | Border, end: End, move_cm: float) -> FieldEnd:
    axis, side = frame.end_axis(_DIRECTION[end])
    return FieldEnd(axis, side, _jaw(frame, target, axis, side, move_cm))


def _jaw(frame: BeamFrame, target: Point | Border, axis: int, side: int, move_cm: float) -> float:
    if not isinstance(target, Border):
        return frame.jaw_through(target, axis)
    if target.point_cm is None:
        return side * (target.reach_cm or 0.0)
    x, y, z = target.point_cm
    z += 0.0 if target.held else move_cm
    points = [(x, y, z), *((limit, y, z) for limit in target.cover_x_cm or ())]
    # The edge of a turned beam is tilted: the outermost jaw covers every point.
    return side * max(side * frame.jaw_through(point, axis) for point in points)


@dataclass(frozen=True, slots=True)
class _Match:
    """Where a turned field meets its neighbour: its own end, and the plane to turn onto."""

    index: int
    end: End
    plane: EdgePlane
    moved_cm: float


def _match(course: Course, fields: list[PlacedField], index: int, junction_index: int) -> _Match:
    """Return the plane to match: the neighbour's edge, moved along the axis by the separation."""
    end = End.SUPERIOR if index > junction_index else End.INFERIOR
    theirs = OTHER_END[end]
    neighbour = fields[junction_index if end is End.SUPERIOR else junction_index + 1]
    matched = _matched(course.junctions[junction_index], neighbour.field)
    plane = next(placed for placed in neighbour.beams if placed.beam is matched).edge(theirs)
    apart = separation_part(course, junction_index, end) - separation_part(
        course, junction_index, theirs
    )
    moved = EdgePlane(plane.normal, plane.offset_cm + plane.normal[2] * apart)
    return _Match(index, end, moved, fields[index].moved_cm)


def _angles(
    task: Task, placed: PlacedBeam, plane: EdgePlane, angle: Callable[[float], float]
) -> tuple[float, float]:
    allowed = task.machine.couch_deg
    try:
        turn = turn_onto(
            plane,
            task.course.patient_position,
            gantry_deg=placed.beam.gantry_deg,
            isocentre_cm=placed.isocentre_cm,
            sad_cm=placed.beam.sad_cm,
            axis=placed.superior.axis,
            nominal_collimator_deg=placed.beam.collimator_deg,
            couch_range_deg=(allowed.low, allowed.high),
        )
    except GeometryError as error:
        raise GeometryError(f"beam {placed.beam.name}: {error}", fixed=error.fixed) from error
    return angle(turn.collimator_deg), angle(turn.couch_deg)


def _turn(
    task: Task,
    placed: PlacedBeam,
    match: _Match,
    offset_cm: Mapping[str, float],
    angles: tuple[float, float],
) -> PlacedBeam:
    """Return the beam at its turned angles: its matched edge through the neighbour's edge."""
    frame = _frame(task, placed.beam, match.moved_cm, *angles)
    turned = replace(placed, frame=frame, collimator_deg=angles[0], couch_deg=angles[1])
    for end, was in ((End.SUPERIOR, placed.superior), (End.INFERIOR, placed.inferior)):
        target = _target(task, match.index, end, offset_cm)
        if end is match.end and not isinstance(target, Border):
            target = (target[0], target[1], match.plane.z_at(target[0], target[1]))
        turned = turned.with_jaw(end, _jaw(frame, target, was.axis, was.side, match.moved_cm))
    return turned
