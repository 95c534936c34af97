"""The rules of a design that no single key shows: fields of an earlier course."""

from __future__ import annotations

from typing import TYPE_CHECKING

from featherlog.exchange.kinds import quoted
from featherlog.junction.design import MovedBy

if TYPE_CHECKING:
    from collections.abc import Iterator

    from featherlog.exchange.toml_fields import Fault
    from featherlog.junction.design import Course


def _at_an_end(course: Course) -> Iterator[Fault]:
    for place, field in enumerate(course.fields[1:-1], start=1):
        if field.earlier is not None:
            sentence = "is given, but only the first or last field may be of an earlier course"
            yield ("field", place, "earlier_course"), sentence


def _something_new(course: Course) -> Iterator[Fault]:
    if all(field.earlier is not None for field in course.fields):
        yield ("field",), "has only fields of earlier courses, but one must be treated in this one"


def _never_moved(course: Course) -> Iterator[Fault]:
    for place, field in enumerate(course.fields):
        if field.earlier is not None and field.moved_by is not MovedBy.JAWS:
            sentence = f'is "{field.moved_by}", but must be "{MovedBy.JAWS}"'
            yield ("field", place, "moved_by"), f"{sentence}: a field of an earlier course stays"


def _own_dose(course: Course) -> Iterator[Fault]:
    for place, field in enumerate(course.fields):
        if field.earlier is not None and field.dose_per_fraction_gy is not None:
            sentence = "is given, but the dose of an earlier course stands in its earlier_course"
            yield ("field", place, "dose_per_fraction_gy"), sentence


def _fixed_junctions(course: Course) -> Iterator[Fault]:
    # That nothing is moved at the first position is a rule for every junction.
    for place, position in enumerate(course.positions[1:], start=1):
        for name in _touching(course):
            offset_cm = position.offset_cm.get(name, 0.0)
            if offset_cm:
                sentence = f"is {offset_cm:g} for {quoted(name)}, but must be 0 there"
                yield (
                    ("position", place, "offset_cm"),
                    f"{sentence}: a field of an earlier course stays",
                )


def _touching(course: Course) -> Iterator[str]:
    for place, junction in enumerate(course.junctions):
        if any(field.earlier is not None for field in course.fields[place : place + 2]):
            yield junction.name


def _left_as_it_was(course: Course) -> Iterator[Fault]:
    for place, junction in enumerate(course.junctions):
        beside = course.fields[place : place + 2]
        earlier = [field.name for field in beside if field.earlier is not None]
        for key, name, verb in (
            ("turned_field", junction.turned_field, "is never turned"),
            ("borne_by", junction.borne_by, "stays"),
        ):
            if name is not None and name in earlier:
                sentence = f"is {quoted(name)}, but must be the other field"
                yield (
                    ("junction", place, key),
                    f"{sentence}: a field of an earlier course {verb}",
                )


EARLIER_RULES = (
    _at_an_end,
    _something_new,
    _never_moved,
    _own_dose,
    _fixed_junctions,
    _left_as_it_was,
)
"""Every rule about fields of an earlier course."""
