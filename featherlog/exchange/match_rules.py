"""The rules of a design that no single key shows: how fields are matched at their junctions."""

from __future__ import annotations

from itertools import pairwise
from typing import TYPE_CHECKING, NamedTuple

from featherlog.exchange.kinds import either, quoted
from featherlog.exchange.toml_lines import path_text
from featherlog.junction.design import Technique

if TYPE_CHECKING:
    from collections.abc import Iterator

    from featherlog.exchange.toml_fields import Fault
    from featherlog.junction.design import Beam, Course, Field, Junction

_SAME_CM = 1e-3


class _Match(NamedTuple):
    """A junction with its place and the two fields beside it."""

    place: int
    junction: Junction
    fields: tuple[Field, Field]


class _Turn(NamedTuple):
    """A field that is turned at a junction, and the neighbour that it is turned onto."""

    place: int
    junction: Junction
    field: Field
    neighbour: Field


def _matches(course: Course) -> Iterator[_Match]:
    # Another rule says so where there are too many junctions, or too few.
    for (place, junction), fields in zip(
        enumerate(course.junctions), pairwise(course.fields), strict=False
    ):
        yield _Match(place, junction, fields)


def _turns(course: Course) -> Iterator[_Turn]:
    for place, junction, (upper, lower) in _matches(course):
        if junction.turned_field == upper.name:
            yield _Turn(place, junction, upper, lower)
        elif junction.turned_field == lower.name:
            yield _Turn(place, junction, lower, upper)


def _named_fields(course: Course) -> Iterator[Fault]:
    for place, junction, fields in _matches(course):
        names = [field.name for field in fields]
        for key, name in (
            ("turned_field", junction.turned_field),
            ("borne_by", junction.borne_by),
        ):
            if name is not None and name not in names:
                sentence = f"is {quoted(name)}, but must be a field of this junction"
                yield ("junction", place, key), f"{sentence}: {either(names)}"


def _turned_once(course: Course) -> Iterator[Fault]:
    first: dict[str, int] = {}
    for turn in _turns(course):
        at = first.setdefault(turn.field.name, turn.place)
        if at != turn.place:
            sentence = f"is {quoted(turn.field.name)}, but {path_text(('junction', at))}"
            yield ("junction", turn.place, "turned_field"), f"{sentence} turns that field already"


def _steady_neighbours(course: Course) -> Iterator[Fault]:
    turned = {turn.field.name for turn in _turns(course)}
    for turn in _turns(course):
        if turn.neighbour.name in turned:
            sentence = f"is {quoted(turn.field.name)}, but its neighbour"
            yield (
                ("junction", turn.place, "turned_field"),
                f"{sentence} {quoted(turn.neighbour.name)} must not be turned itself",
            )


def _matched_beams(course: Course) -> Iterator[Fault]:
    for turn in _turns(course):
        names = [beam.name for beam in turn.neighbour.beams]
        wanted = turn.junction.matched_beam
        if wanted not in names and (wanted is not None or len(names) > 1):
            seen = "missing" if wanted is None else quoted(wanted)
            sentence = f"is {seen}, but must be a beam of {quoted(turn.neighbour.name)}"
            yield ("junction", turn.place, "matched_beam"), f"{sentence}: {either(names)}"


def _half_beams(course: Course) -> Iterator[Fault]:
    for place, junction, fields in _matches(course):
        if junction.technique is Technique.HALF_BEAM:
            z_cm = junction.skin_point_cm[2]
            for beam in (beam for field in fields if not field.earlier for beam in field.beams):
                if abs(beam.isocentre_cm[2] - z_cm) > _SAME_CM:
                    yield ("junction", place, "skin_point_cm"), _off_axis(z_cm, beam)


def _off_axis(z_cm: float, beam: Beam) -> str:
    isocentre = f"the isocentre of {quoted(beam.name)} at z {beam.isocentre_cm[2]:g}"
    return f"has z {z_cm:g}, but a half-beam junction must lie in the plane of {isocentre}"


MATCH_RULES = (_named_fields, _turned_once, _steady_neighbours, _matched_beams, _half_beams)
"""Every rule about how fields are matched."""
