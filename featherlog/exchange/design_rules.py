"""The rules of a design that no single key shows: the machine, names, fields and depths.

Each rule yields its own faults as a path and the sentence that goes on from it, and assumes nothing
about the others.
"""

from __future__ import annotations

from itertools import pairwise
from typing import TYPE_CHECKING

from featherlog.exchange.earlier_rules import EARLIER_RULES
from featherlog.exchange.kinds import either, quoted, text
from featherlog.exchange.match_rules import MATCH_RULES
from featherlog.exchange.sequence_rules import SEQUENCE_RULES
from featherlog.exchange.toml_fields import Fault, repeated
from featherlog.junction.design import MovedBy, Side, Technique

if TYPE_CHECKING:
    from collections.abc import Iterator

    from featherlog.exchange.toml_lines import Path
    from featherlog.junction.design import Beam, Course, Field, Junction
    from featherlog.junction.machine import Machine

_SAD_SLACK_CM = 10.0  # a beam's own source may lie so far from the machine's
_SUM_SLACK = 1e-6
_IDENTIFIERS = 2
_IDENTIFIER_NAME = text(30)


def broken_rules(course: Course, machine: Machine) -> Iterator[Fault]:
    """Yield every fault of a course whose keys are each allowed by themselves."""
    yield from _machine(course, machine)
    yield from _source_distances(course, machine)
    for rule in (*_RULES, *MATCH_RULES, *EARLIER_RULES, *SEQUENCE_RULES):
        yield from rule(course)


def _machine(course: Course, machine: Machine) -> Iterator[Fault]:
    if course.machine != machine.name:
        sentence = f"is {quoted(course.machine)}, but the machine is {quoted(machine.name)}"
        yield ("course", "machine"), sentence
    energies = [quality.name for quality in machine.qualities]
    for path, beam in _placed_beams(course):
        if beam.energy not in energies:
            sentence = f"is {quoted(beam.energy)}, but must be one of {machine.name}'s"
            yield (*path, "energy"), f"{sentence}: {either(energies)}"


def _source_distances(course: Course, machine: Machine) -> Iterator[Fault]:
    for path, beam in _placed_beams(course):
        # An earlier course may have been given on another machine.
        treated = course.fields[int(path[1])].earlier is None
        if treated and abs(beam.sad_cm - machine.sad_cm) > _SAD_SLACK_CM:
            sentence = f"is {beam.sad_cm:g}, but must be within {_SAD_SLACK_CM:g} cm of"
            yield (*path, "sad_cm"), f"{sentence} {machine.name}'s {machine.sad_cm:g}"


def _identifiers(course: Course) -> Iterator[Fault]:
    count = len(course.identifiers)
    if count != _IDENTIFIERS:
        yield ("course", "identifiers"), f"holds {count}, but must hold exactly {_IDENTIFIERS}"
    for name in course.identifiers:
        if _IDENTIFIER_NAME.read(name) is None:
            yield (
                ("course", "identifiers", name),
                f"has a name that must be {_IDENTIFIER_NAME.allowed}",
            )


def _names(course: Course) -> Iterator[Fault]:
    yield from repeated((("phase", i, "name"), p.name) for i, p in enumerate(course.phases))
    yield from repeated((("field", i, "name"), f.name) for i, f in enumerate(course.fields))
    yield from repeated(((*path, "name"), beam.name) for path, beam in _placed_beams(course))
    yield from repeated((("junction", i, "name"), j.name) for i, j in enumerate(course.junctions))
    yield from repeated((("position", i, "label"), p.label) for i, p in enumerate(course.positions))


def _junction_count(course: Course) -> Iterator[Fault]:
    count, needed = len(course.junctions), len(course.fields) - 1
    if count != needed:
        yield ("junction",), f"has {count}, but must have {needed}, one between each two fields"


def _follows(course: Course) -> Iterator[Fault]:
    names = [junction.name for junction in course.junctions]
    for place, field in enumerate(course.fields):
        path, touched = ("field", place, "follows"), names[max(0, place - 1) : place + 1]
        if field.moved_by is MovedBy.JAWS:
            if field.follows is not None:
                yield path, "is given, but only a field moved by the couch follows a junction"
        elif field.follows not in touched and touched:
            seen = "missing" if field.follows is None else quoted(field.follows)
            yield path, f"is {seen}, but must be a junction of this field: {either(touched)}"


def _weights(course: Course) -> Iterator[Fault]:
    for place, field in enumerate(course.fields):
        total = sum(beam.weight for beam in field.beams)
        if abs(total - 1) > _SUM_SLACK:
            yield ("field", place, "beam"), f"has weights of {total:g} in all, but must have 1"


def _field_order(course: Course) -> Iterator[Fault]:
    for place, (upper, lower) in enumerate(pairwise(course.fields)):
        above, below = min(_isocentre_z(upper)), max(_isocentre_z(lower))
        # Two half-beam fields may share one isocentre, in the match plane.
        shared = below == above and _technique(course, place) is Technique.HALF_BEAM
        if below >= above and not shared:
            sentence = f"has its isocentre at z {below:g}, but must lie inferior to the field"
            yield ("field", place + 1), f"{sentence} before it at z {above:g}"


def _depths(course: Course) -> Iterator[Fault]:
    for place, junction in enumerate(course.junctions):
        thickness_cm = junction.thickness_cm
        for path, depth_cm in _placed_depths(junction):
            if thickness_cm is not None and depth_cm > thickness_cm:
                sentence = f"is {depth_cm:g}, but must be within the thickness_cm"
                yield ("junction", place, *path), f"{sentence} of {thickness_cm:g}"


def _placed_depths(junction: Junction) -> Iterator[tuple[Path, float]]:
    if junction.match_depth_cm is not None:
        yield ("match_depth_cm",), junction.match_depth_cm
    if junction.critical is not None:
        yield ("critical", "depth_cm"), junction.critical.depth_cm
    for place, depth_cm in enumerate(junction.report_depths_cm):
        yield ("report_depths_cm", place), depth_cm


def _lateral_limits(course: Course) -> Iterator[Fault]:
    for place, junction in enumerate(course.junctions):
        axis = 0 if junction.entrance in {Side.ANTERIOR, Side.POSTERIOR} else 1
        across_cm, (low, high) = junction.skin_point_cm[axis], junction.lateral_limits_cm
        if not low <= across_cm <= high:
            sentence = f"is [{low:g}, {high:g}], but must hold the skin point's {'xy'[axis]}"
            yield ("junction", place, "lateral_limits_cm"), f"{sentence}, {across_cm:g}"


def _placed_beams(course: Course) -> Iterator[tuple[Path, Beam]]:
    for f, field in enumerate(course.fields):
        for b, beam in enumerate(field.beams):
            yield ("field", f, "beam", b), beam


def _isocentre_z(field: Field) -> list[float]:
    return [beam.isocentre_cm[2] for beam in field.beams]


def _technique(course: Course, place: int) -> Technique | None:
    return course.junctions[place].technique if place < len(course.junctions) else None


_RULES = (
    _identifiers,
    _names,
    _junction_count,
    _follows,
    _weights,
    _field_order,
    _depths,
    _lateral_limits,
)
