"""The rules of a design that no single key shows: positions and their sequence."""

from __future__ import annotations

from itertools import pairwise
from typing import TYPE_CHECKING

from featherlog.exchange.kinds import either, quoted
from featherlog.junction.design import Pattern, Weekday
from featherlog.sequence.planning import plan_fractions

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
    treated = [beam.name for field in course.fields if not field.earlier for beam in field.beams]
    earlier = [beam.name for beam in course.beams if beam.name not in treated]
    if not treated:
        return  # another rule says so
    for place, position in enumerate(course.positions):
        path = ("position", place, "meterset_mu")
        given = [name for name in position.meterset_mu if name not in earlier]
        yield from _same_names(path, given, treated, "beam")
        for name in earlier:
            if name in position.meterset_mu:
                yield (
                    (*path, name),
                    "is given, but a beam of an earlier course is not treated again",
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
    used = _used(course)
    for place, position in enumerate(course.positions):
        if position.label not in used:
            path = ("position", place, "label")
            yield path, f"is {quoted(position.label)}, but the sequence never comes to it"


def _used(course: Course) -> set[str]:
    if any(True for _ in _length(course)):
        return set(course.sequence.positions)  # what it would come to cannot be told yet
    return {step.position for fraction in plan_fractions(course) for step in fraction.steps}


def _length(course: Course) -> Iterator[Fault]:
    sequence = course.sequence
    path, count = ("sequence", "positions"), len(sequence.positions)
    if sequence.pattern is Pattern.LIST and count != course.fractions:
        yield (
            path,
            f"has {count}, but a list must have one for each of {course.fractions} fractions",
        )
    if sequence.pattern is Pattern.NO_SHIFT and count != 1:
        yield path, f'has {count}, but with "no shift" it must have exactly 1'
    if sequence.pattern is Pattern.SPLIT and len(sequence.weights) != count:
        sentence = f"has {len(sequence.weights)}, but must have one for each of {count} positions"
        yield ("sequence", "weights"), sentence


def _split_once(course: Course) -> Iterator[Fault]:
    labels = course.sequence.positions
    for place, label in enumerate(labels):
        if course.sequence.pattern is Pattern.SPLIT and label in labels[:place]:
            path = ("sequence", "positions", place)
            yield path, f"is {quoted(label)} again, but a fraction is split over it only once"


def _start_date(course: Course) -> Iterator[Fault]:
    sequence = course.sequence
    path, start = ("sequence", "start_date"), sequence.start_date
    weekday = list(Weekday)[start.weekday()]
    if weekday not in sequence.weekdays:
        yield path, f"is {start}, a {weekday}, but must be one of the weekdays of treatment"
    if start in sequence.closed_dates:
        yield path, f"is {start}, but must not be one of the course's or machine's closed_dates"
    if start in sequence.holidays:
        yield path, f"is {start}, but must not be a public holiday of {sequence.holiday_calendar}"


SEQUENCE_RULES = (
    _offset_names,
    _metersets,
    _reference,
    _junction_order,
    _known_positions,
    _used_positions,
    _length,
    _split_once,
    _start_date,
)
"""Every rule about positions and their sequence."""
