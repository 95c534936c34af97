"""Positions as a machine can be set to: table moves, jaws and angles in whole steps.

Each neighbour is rounded first and the other field solved against it; signed angles are rounded,
then the jaw of the later field goes whichever way leaves the least worst change of the mismatch, a
tie going to the gap.
"""

from __future__ import annotations

import math
from dataclasses import replace
from itertools import product
from typing import TYPE_CHECKING

from featherlog.junction.design import Angles, End
from featherlog.junction.pairs import pair_mismatches, worst
from featherlog.junction.placing import (
    place_unturned,
    stated_points,
    turn_fields,
    turned_fields,
    turned_index,
)

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping

    from featherlog.geometry.patient import Point
    from featherlog.junction.design import Field
    from featherlog.junction.placing import Chain, HeldAngles, PlacedField, Task


def place_exact(task: Task, offset_cm: Mapping[str, float]) -> Chain:
    """Return every field with the jaws and angles that geometry asks for, unrounded.

    ``offset_cm`` gives each junction's offset by name. Raises GeometryError, naming the beam, where
    no jaw or angle can do it.
    """
    chain = place_unturned(task, offset_cm, [field_move(f, offset_cm) for f in task.course.fields])
    return turn_fields(task, chain, offset_cm, held=_held(task, offset_cm, place_exact))


def place_rounded(task: Task, offset_cm: Mapping[str, float]) -> Chain:
    """Return every field as the machine can be set; errors as ``place_exact``."""
    exact = place_exact(task, offset_cm)
    steps = task.machine.steps
    turned = turn_fields(
        task,
        _neighbours_set(task, offset_cm),
        offset_cm,
        angle=lambda value: to_step(value, steps.angle_deg),
        held=_held(task, offset_cm, place_rounded),
    )
    fields = list(turned)
    fields[0] = _nearest(fields[0], End.SUPERIOR, steps.jaw_cm)
    fields[-1] = _nearest(fields[-1], End.INFERIOR, steps.jaw_cm)
    for index in range(len(task.course.junctions)):
        fields[index : index + 2] = _round_junction(task, index, exact, fields, offset_cm)
    return tuple(fields)


def place_beside_set(task: Task, offset_cm: Mapping[str, float]) -> Chain:
    """Return every turned field solved against its neighbour as set, and not yet rounded.

    Its edges are those of no machine: only the angles are of use, to see what rounding the
    neighbour does to them. Errors as ``place_exact``.
    """
    chain = _neighbours_set(task, offset_cm)
    return turn_fields(task, chain, offset_cm, held=_held(task, offset_cm, place_beside_set))


def _neighbours_set(task: Task, offset_cm: Mapping[str, float]) -> Chain:
    """Return the fields, none turned, with table moves and neighbours of turned fields rounded."""
    step = task.machine.steps.table_cm
    moves = [to_step(field_move(field, offset_cm), step) for field in task.course.fields]
    return _round_neighbours(task, place_unturned(task, offset_cm, moves))


def field_move(field: Field, offset_cm: Mapping[str, float]) -> float:
    """Return how far (cm, + superior) the field's isocentre moves from position A.

    A field moved by its jaws stays; one moved by the couch moves with the junction it follows.
    """
    return 0.0 if field.follows is None else offset_cm[field.follows]


def to_step(value: float, step: float) -> float:
    """Round to a multiple of a step, halves away from zero."""
    steps = math.floor(abs(value) / step + 0.5 + 1e-9)
    return round(math.copysign(steps * step, value), 9) + 0.0


def _held(
    task: Task,
    offset_cm: Mapping[str, float],
    place: Callable[[Task, Mapping[str, float]], Chain],
) -> HeldAngles:
    """Return the angles of position A for every beam whose junction holds them."""
    holding = [
        field
        for field, junction in turned_fields(task.course).items()
        if task.course.junctions[junction].angles is Angles.HELD
    ]
    if not holding or not any(offset_cm.values()):
        return {}
    reference = place(task, dict.fromkeys(offset_cm, 0.0))
    return {
        placed.beam.name: (placed.collimator_deg, placed.couch_deg)
        for index in holding
        for placed in reference[index].beams
    }


def _round_neighbours(task: Task, chain: Chain) -> Chain:
    fields = list(chain)
    for index, junction in turned_fields(task.course).items():
        other, end = (junction, End.INFERIOR) if index > junction else (junction + 1, End.SUPERIOR)
        fields[other] = _nearest(fields[other], end, task.machine.steps.jaw_cm)
    return tuple(fields)


def _round_junction(
    task: Task,
    index: int,
    exact: Chain,
    fields: list[PlacedField],
    offset_cm: Mapping[str, float],
) -> tuple[PlacedField, PlacedField]:
    """Round the two edges of a junction: the neighbour's, then the turned or inferior field's."""
    step = task.machine.steps.jaw_cm
    junction = task.course.junctions[index]
    upper, lower = fields[index : index + 2]
    points = [
        point
        for across in stated_points(
            junction, task.depth_cm[junction.name], offset_cm[junction.name]
        ).values()
        for point in across
    ]
    planned = _all_mismatches(exact[index], exact[index + 1], points)

    def cost(pair: tuple[PlacedField, PlacedField]) -> tuple[float, float]:
        got = _all_mismatches(*pair, points)
        change = worst(a - b for a, b in zip(got, planned, strict=True))
        return round(abs(change), 9), -change

    if turned_index(task.course, index) == index:
        lower = _nearest(lower, End.SUPERIOR, step)
        pairs = [(choice, lower) for choice in _choices(upper, End.INFERIOR, step)]
    else:
        upper = _nearest(upper, End.INFERIOR, step)
        pairs = [(upper, choice) for choice in _choices(lower, End.SUPERIOR, step)]
    return min(pairs, key=cost)


def _all_mismatches(upper: PlacedField, lower: PlacedField, points: list[Point]) -> list[float]:
    return [value for point in points for value in pair_mismatches(upper, lower, point)]


def _nearest(field: PlacedField, end: End, step: float) -> PlacedField:
    beams = tuple(beam.with_jaw(end, to_step(beam.jaw_cm(end), step)) for beam in field.beams)
    return field if field.field.earlier else replace(field, beams=beams)


def _choices(field: PlacedField, end: End, step: float) -> list[PlacedField]:
    """Return the field with its jaws at one end at every combination of settable values near by."""
    if field.field.earlier:
        return [field]
    values = [_neighbours(beam.jaw_cm(end), step) for beam in field.beams]
    return [
        replace(
            field,
            beams=tuple(
                beam.with_jaw(end, jaw) for beam, jaw in zip(field.beams, jaws, strict=True)
            ),
        )
        for jaws in product(*values)
    ]


def _neighbours(value: float, step: float) -> tuple[float, ...]:
    # One step either way even from a value that can be set: the other side may have been rounded.
    nearest = to_step(value, step)
    return tuple(round(nearest + steps * step, 9) + 0.0 for steps in (-1, 0, 1))
