"""From a design to the settings of every position, or a refusal that says what would be allowed."""

from __future__ import annotations

from typing import TYPE_CHECKING

from featherlog.errors import RefusedError
from featherlog.geometry.beams import GeometryError
from featherlog.geometry.frames import table_move
from featherlog.junction.edges import match_point, place_exact, place_rounded
from featherlog.junction.limits import limit_faults, nearest_admissible
from featherlog.junction.mismatch import entrance_gap, junction_setting
from featherlog.junction.plan import BeamSetting, FieldSetting, PositionSettings

if TYPE_CHECKING:
    from featherlog.junction.design import Course, Junction, Position
    from featherlog.junction.edges import Chain, PlacedBeam
    from featherlog.junction.machine import Machine


def solve(course: Course, machine: Machine) -> tuple[PositionSettings, ...]:
    """Return the settings of every position of a design on a machine.

    Raises RefusedError naming, for every position that the machine cannot deliver, the limit, the
    value and the nearest admissible offset.
    """
    try:
        depths = match_depths(course, machine)
        refusals: list[str] = []
        settings = []
        for position in course.positions:
            chain = place_rounded(course, machine, depths, position.offset_cm)
            faults = limit_faults(machine, chain)
            if faults:
                hint = nearest_admissible(course, machine, depths, position)
                refusals += [f"position {position.label}: {fault}; {hint}" for fault in faults]
            settings.append(_position_settings(course, machine, depths, position, chain))
    except GeometryError as error:
        raise RefusedError(f"course {course.key}: {error}") from error
    if refusals:
        raise RefusedError("\n".join(refusals))
    return tuple(settings)


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
        chain = place_exact(course, machine, {**depths, junction.name: depth_cm}, offsets)
        asked = junction.skin_gap_cm or 0.0
        return entrance_gap(junction, chain[index], chain[index + 1]) - asked

    if excess(0.0) * excess(deepest) > 0:
        raise RefusedError(
            f"junction {junction.name}: no match depth from 0 to {deepest:.1f} cm gives a skin gap "
            f"of {junction.skin_gap_cm:.2f} cm; depth {deepest:.1f} cm gives "
            f"{excess(deepest) + (junction.skin_gap_cm or 0.0):.2f} cm"
        )
    return float(brentq(excess, 0.0, deepest, xtol=1e-10))


def _position_settings(
    course: Course, machine: Machine, depths: dict[str, float], position: Position, chain: Chain
) -> PositionSettings:
    exact = place_exact(course, machine, depths, position.offset_cm)
    first = chain[0].beams[0].frame.isocentre_cm
    fields = []
    for placed, wanted in zip(chain, exact, strict=True):
        beams = tuple(
            _beam_setting(got, want, position)
            for got, want in zip(placed.beams, wanted.beams, strict=True)
        )
        step = placed.beams[0].frame.isocentre_cm - first
        fields.append(
            FieldSetting(
                field=placed.field.name,
                moved_by=placed.field.moved_by.value,
                moved_cm=placed.moved_cm,
                table_from_a_cm=table_move(course.patient_position, (0.0, 0.0, placed.moved_cm)),
                table_from_first_field_cm=table_move(
                    course.patient_position, (float(step[0]), float(step[1]), float(step[2]))
                ),
                beams=beams,
            )
        )
    junctions = tuple(
        junction_setting(
            junction,
            offset_cm=position.offset_cm[junction.name],
            match_point_cm=match_point(
                junction, depths[junction.name], position.offset_cm[junction.name]
            ),
            match_depth_cm=depths[junction.name],
            exact=(exact[index], exact[index + 1]),
            rounded=(chain[index], chain[index + 1]),
        )
        for index, junction in enumerate(course.junctions)
    )
    return PositionSettings(position.label, tuple(fields), junctions)


def _beam_setting(got: PlacedBeam, want: PlacedBeam, position: Position) -> BeamSetting:
    x, y, z = (float(value) for value in got.frame.isocentre_cm)
    beam = got.beam
    return BeamSetting(
        beam=beam.name,
        energy=beam.energy,
        weight=beam.weight,
        gantry_deg=beam.gantry_deg,
        collimator_deg=beam.collimator_deg,
        couch_deg=beam.couch_deg,
        isocentre_cm=(x, y, z),
        ssd_cm=beam.ssd_cm,
        meterset_mu=position.meterset_mu[beam.name],
        jaw_cm=got.jaws,
        exact_jaw_cm=want.jaws,
        superior_jaw=got.superior.jaw,
        inferior_jaw=got.inferior.jaw,
        superior_edge=got.superior_edge,
        inferior_edge=got.inferior_edge,
    )
