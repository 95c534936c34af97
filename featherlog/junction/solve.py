"""From a design to the settings of every position, or a refusal that says what would be allowed."""

from __future__ import annotations

from typing import TYPE_CHECKING

from featherlog.errors import RefusedError
from featherlog.geometry.beams import GeometryError
from featherlog.geometry.frames import table_move
from featherlog.junction.borders import border_settings
from featherlog.junction.design import Technique
from featherlog.junction.limits import geometry_faults, limit_faults, way_out
from featherlog.junction.mismatch import entrance_gap, junction_setting, lights, skin_rise
from featherlog.junction.placing import Task, meeting_point
from featherlog.junction.plan import BeamSetting, FieldSetting, PositionSettings
from featherlog.junction.points import OUTWARD
from featherlog.junction.rounding import place_beside_set, place_exact, place_rounded

if TYPE_CHECKING:
    from featherlog.junction.design import Course, Junction, Position
    from featherlog.junction.machine import Machine
    from featherlog.junction.placing import Chain, PlacedBeam, PlacedField


def solve(course: Course, machine: Machine) -> tuple[PositionSettings, ...]:
    """Return the settings of every position of a design on a machine.

    Raises RefusedError naming, for every position that the machine cannot deliver, the limit, the
    value and the nearest admissible offset, or that no offset is.
    """
    try:
        task = Task(course, machine, match_depths(course, machine))
    except GeometryError as error:
        raise RefusedError(f"course {course.key}: {error}") from error
    settings: list[PositionSettings] = []
    refusals: list[str] = []
    for position in course.positions:
        try:
            chain = place_rounded(task, position.offset_cm)
            faults = limit_faults(task, chain)
        except GeometryError as error:
            faults = geometry_faults(error)
        if faults:
            hint = way_out(task, position, faults)
            refusals += [f"position {position.label}: {fault.text}; {hint}" for fault in faults]
        else:
            settings.append(_position_settings(task, position, chain))
    refusals += _unlit_gaps(course, settings[:1])
    if refusals:
        raise RefusedError("\n".join(refusals))
    return tuple(settings)


def _unlit_gaps(course: Course, settings: list[PositionSettings]) -> list[str]:
    """Say which skin gaps cannot be set because no pair of beams lights the entrance skin."""
    return [
        f"junction {junction.name}: its fields have no beams that both enter the "
        f"{junction.entrance} skin, so there is no gap to set there"
        for position in settings
        for junction in course.junctions
        if junction.technique is Technique.SKIN_GAP
        and junction.entrance.value
        not in [gap.side for gap in position.junction(junction.name).skin_gaps]
    ]


def match_depths(course: Course, machine: Machine) -> dict[str, float]:
    """Return every junction's match depth (cm), solving those given by their skin gap.

    The gap at the entrance skin grows steadily with match depth, so the depth is the one root of
    gap(depth) = asked, found at position A. Raises RefusedError where no depth gives it.
    """
    depths = {j.name: j.match_depth_cm or 0.0 for j in course.junctions}
    for junction in course.junctions:
        if junction.skin_gap_cm is not None:
            depths[junction.name] = _depth_of_gap(course, machine, depths, junction)
    return depths


def _depth_of_gap(
    course: Course, machine: Machine, depths: dict[str, float], junction: Junction
) -> float:
    from scipy.optimize import brentq  # noqa: PLC0415 - slow to import, and few designs need it

    offsets = {j.name: 0.0 for j in course.junctions}
    index = course.junctions.index(junction)
    deepest = junction.thickness_cm or 50.0

    def excess(depth_cm: float) -> float:
        task = Task(course, machine, {**depths, junction.name: depth_cm})
        chain = place_exact(task, offsets)
        asked = junction.skin_gap_cm or 0.0
        return entrance_gap(junction, chain[index], chain[index + 1]) - asked

    if excess(0.0) * excess(deepest) > 0:
        raise RefusedError(
            f"junction {junction.name}: no match depth from 0 to {deepest:.1f} cm gives a skin gap "
            f"of {junction.skin_gap_cm:.2f} cm; depth {deepest:.1f} cm gives "
            f"{excess(deepest) + (junction.skin_gap_cm or 0.0):.2f} cm"
        )
    return float(brentq(excess, 0.0, deepest, xtol=1e-10))


def _position_settings(task: Task, position: Position, chain: Chain) -> PositionSettings:
    course = task.course
    exact = place_exact(task, position.offset_cm)
    junctions = tuple(
        junction_setting(
            junction,
            offset_cm=position.offset_cm[junction.name],
            match_point_cm=meeting_point(task, index, position.offset_cm),
            match_depth_cm=task.depth_cm[junction.name],
            exact=(exact[index], exact[index + 1]),
            rounded=(chain[index], chain[index + 1]),
            patient=course.patient_position,
            tolerances=task.machine.tolerances,
        )
        for index, junction in enumerate(course.junctions)
    )
    beside = place_beside_set(task, position.offset_cm)
    fields = tuple(
        _field_setting(course, position, ways, chain[0])
        for ways in zip(chain, exact, beside, strict=True)
    )
    return PositionSettings(position.label, fields, junctions, border_settings(course, chain))


def _field_setting(
    course: Course, position: Position, ways: tuple[PlacedField, ...], first: PlacedField
) -> FieldSetting:
    """Return the setting of a field placed three ways: as set, exactly, and beside what is set."""
    placed = ways[0]
    field = placed.field
    here, there = placed.beams[0].isocentre_cm, first.beams[0].isocentre_cm
    step = (here[0] - there[0], here[1] - there[1], here[2] - there[2])
    return FieldSetting(
        field=field.name,
        moved_by=field.moved_by.value,
        moved_cm=placed.moved_cm,
        table_from_a_cm=table_move(course.patient_position, (0.0, 0.0, placed.moved_cm)),
        table_from_first_field_cm=table_move(course.patient_position, step),
        beams=tuple(
            _beam_setting(course, position, placed, beams)
            for beams in zip(*(way.beams for way in ways), strict=True)
        ),
        dose_per_fraction_gy=field.dose_per_fraction_gy,
        earlier_course=field.earlier.label if field.earlier else "",
        earlier_dose_gy=field.earlier.dose_gy if field.earlier else 0.0,
    )


def _beam_setting(
    course: Course, position: Position, field: PlacedField, ways: tuple[PlacedBeam, ...]
) -> BeamSetting:
    got, want, beside = ways
    beam = got.beam
    turned = any(junction.turned_field == field.field.name for junction in course.junctions)
    return BeamSetting(
        beam=beam.name,
        energy=beam.energy,
        weight=beam.weight,
        gantry_deg=beam.gantry_deg,
        collimator_deg=got.collimator_deg,
        couch_deg=got.couch_deg,
        isocentre_cm=got.isocentre_cm,
        ssd_cm=beam.ssd_cm - _nearer_skin(course, field, got),
        meterset_mu=position.meterset_mu.get(beam.name, 0.0),
        jaw_cm=got.jaws,
        exact_jaw_cm=want.jaws,
        superior_jaw=got.superior.jaw,
        inferior_jaw=got.inferior.jaw,
        superior_edge=got.superior_edge,
        inferior_edge=got.inferior_edge,
        sad_cm=beam.sad_cm,
        exact_collimator_deg=want.collimator_deg,
        exact_couch_deg=want.couch_deg,
        edges_by=beam.edges_by.value,
        collimator_beside_set_deg=beside.collimator_deg if turned else None,
        couch_beside_set_deg=beside.couch_deg if turned else None,
    )


def _nearer_skin(course: Course, field: PlacedField, placed: PlacedBeam) -> float:
    """Return by how much (cm) a beam's SSD falls when a sloping skin is moved under it.

    The isocentre's height stays. The skin is a plane that rises by its slope toward the head, met
    by the beam axis: per cm of rise under the axis 1 / (toward · outward - slope · toward_z), which
    is 1 / cos of the angle between them where the axis runs across the junction axis. Only beams
    that enter the sloping skin see it.
    """
    junction = next((j for j in course.junctions if j.name == field.field.follows), None)
    if junction is None or not lights(placed, junction.entrance):
        return 0.0
    axis, sign = OUTWARD[junction.entrance]
    toward = placed.frame.toward_source
    facing = float(sign * toward[axis] - skin_rise(junction, 1.0) * toward[2])
    return skin_rise(junction, field.moved_cm) / facing if facing > 0 else 0.0
