"""The rules of a design that no single key shows: positions and their sequence."""

from __future__ import annotations

from itertools import pairwise
from math import ceil
from typing import TYPE_CHECKING

from featherlog.exchange.kinds import either, quoted
from featherlog.junction.design import Pattern, Weekday

if TYPE_CHECKING:
    from collections.abc import Iterable, Iterator

    from featherlog.exchange.toml_fields import Fault
    from featherlog.exchange.toml_lines import Path
    from featherlog.junction.design import Course


def _offset_names(course: Course) -> Iterator[Fault]:
    names = [junction.name for junction in course.junctions]
    for place, position in enumerate(course.positions):
        yield from _same_names(
            ("position", place, "offset_cm"), position.offset_cm, names, "junction"
        )


def _metersets(course: Course) -> Iterator[Fault]:
    names = [beam.name for beam in course.beams]
    for place, position in enumerate(course.positions):
        yield from _same_names(
            ("position", place, "meterset_mu"), position.meterset_mu, names, "beam"
        )


def _same_names(path: Path, given: Iterable[str], names: list[str], what: str) -> Iterator[Fault]:
    allowed = either(names)
    for name in dict.fromkeys(names):
        if name not in given:
            yield path, f"has no number for {quoted(name)}, but must have one for each {what}"
    for name in given:
        if name not in names:
            yield (*path, name), f"is not a {what} of this course, but must be {allowed}"


def _reference(course: Course) -> Iterator[Fault]:
    if any(course.positions[0].offset_cm.values()):
        yield ("position", 0, "offset_cm"), "is not 0, but the first position is the reference"


def _junction_order(course: Course) -> Iterator[Fault]:
    for place, position in enumerate(course.positions):
        z_cm = [j.skin_point_cm[2] + position.offset_cm.get(j.name, 0) for j in course.junctions]
        if any(below >= above for above, below in pairwise(z_cm)):
            path = ("position", place, "offset_cm")
            yield path, "puts one junction at or beyond the next, but they must stay in order"


def _known_positions(course: Course) -> Iterator[Fault]:
    labels = [position.label for position in course.positions]
    for place, label in enumerate(course.sequence.positions):
        if label not in labels:
            path = ("sequence", "positions", place)
            yield path, f"is {quoted(label)}, but must be a position: {either(labels)}"


def _used_positions(course: Course) -> Iterator[Fault]:
    block = course.sequence.block_fractions or 1
    used = course.sequence.positions[: ceil(course.fractions / block)]
    for place, position in enumerate(course.positions):
        if position.label not in used:
            path = ("position", place, "label")
            yield path, f"is {quoted(position.label)}, but the sequence never comes to it"


def _length(course: Course) -> Iterator[Fault]:
    path, count = ("sequence", "positions"), len(course.sequence.positions)
    if course.sequence.pattern is Pattern.LIST and count != course.fractions:
        yield (
            path,
            f"has {count}, but a list must have one for each of {course.fractions} fractions",
        )
    if course.sequence.pattern is Pattern.NO_SHIFT and count != 1:
        yield path, f'has {count}, but with "no shift" it must have exactly 1'


def _start_date(course: Course) -> Iterator[Fault]:
    path, start = ("sequence", "start_date"), course.sequence.start_date
    weekday = list(Weekday)[start.weekday()]
    if weekday not in course.sequence.weekdays:
        yield path, f"is {start}, a {weekday}, but must be one of the weekdays of treatment"
    if start in course.sequence.closed_dates:
        yield path, f"is {start}, but must not be one of the closed_dates"


SEQUENCE_RULES = (
    _offset_names,
    _metersets,
    _reference,
    _junction_order,
    _known_positions,
    _used_positions,
    _length,
    _start_date,
)
"""Every rule about positions and their sequence."""
