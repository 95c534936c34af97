"""What a machine cannot do, named with the limit and the value, and the nearest offset it can."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from featherlog.geometry.beams import GeometryError
from featherlog.junction.borders import border_settings
from featherlog.junction.design import Angles, EdgesBy
from featherlog.junction.machine import Jaw
from featherlog.junction.placing import turned_fields
from featherlog.junction.rounding import place_rounded
from featherlog.words import signed

if TYPE_CHECKING:
    from collections.abc import Callable, Iterator

    from featherlog.junction.design import Course, Position
    from featherlog.junction.machine import Machine, Range
    from featherlog.junction.placing import Chain, PlacedBeam, Task

# How far and how finely the nearest admissible offset is looked for, cm.
_SEARCH_CM = 15.0
_COARSE_CM = 0.25
_FINE_CM = 0.01


@dataclass(frozen=True, slots=True)
class Fault:
    """What keeps a position from being set, in words; ``fixed`` when it does at every offset."""

    text: str
    fixed: bool = False


def geometry_faults(error: GeometryError) -> tuple[Fault, ...]:
    """Return what keeps beams from being placed, one fault for each."""
    return tuple(Fault(message, error.fixed) for message in error.messages)


def limit_faults(task: Task, chain: Chain) -> tuple[Fault, ...]:
    """Return every limit that the placed fields pass."""
    following = {
        field
        for field, junction in turned_fields(task.course).items()
        if task.course.junctions[junction].angles is Angles.RECOMPUTED
    }
    limits = (
        fault
        for index, field in enumerate(chain)
        if field.field.earlier is None
        for beam in field.beams
        for fault in (
            *_jaw_faults(task.machine, beam, _still(task.course, index, beam)),
            *_angle_faults(task.machine, beam, turned=index in following),
        )
    )
    return (*limits, *_border_faults(task, chain))


def way_out(task: Task, position: Position, faults: tuple[Fault, ...]) -> str:
    """Say what would be allowed instead of a faulty position, or that no offset would be."""
    first = task.course.positions[0]
    if position is first:
        return f"position {first.label} is where offsets are measured from: change the design"
    if any(fault.fixed for fault in faults):
        return "no offset is admissible: change the design"
    return nearest_admissible(task, position)


def _border_faults(task: Task, chain: Chain) -> Iterator[Fault]:
    for border in border_settings(task.course, chain):
        if border.short_cm > task.machine.steps.jaw_cm:
            yield Fault(
                f"the {border.end} border would be left uncovered by {border.short_cm:.2f} cm "
                f"between its lateral limits"
            )


def nearest_admissible(task: Task, position: Position) -> str:
    """Say which offset nearest to the asked one the machine can deliver.

    All junctions are moved together, outward from the asked offsets in both directions, and the
    boundary is then narrowed to 0.01 cm on the admissible side.
    """

    def admissible(shift_cm: float) -> bool:
        offsets = {name: value + shift_cm for name, value in position.offset_cm.items()}
        try:
            chain = place_rounded(task, offsets)
        except GeometryError:
            return False
        return not limit_faults(task, chain)

    steps = round(_SEARCH_CM / _COARSE_CM)
    for count in range(1, steps + 1):
        for sign in (-1, 1):
            if admissible(sign * count * _COARSE_CM):
                shift = _narrow(admissible, sign, count)
                return f"the nearest admissible offset is {_offsets(position, shift)}"
    return f"no offset within {_SEARCH_CM:.0f} cm of it is admissible"


def _narrow(admissible: Callable[[float], bool], sign: int, count: int) -> float:
    fine = round(_COARSE_CM / _FINE_CM)
    for step in range(fine):
        shift = sign * ((count - 1) * _COARSE_CM + (step + 1) * _FINE_CM)
        if admissible(shift):
            return shift
    return sign * count * _COARSE_CM


def _offsets(position: Position, shift_cm: float) -> str:
    values = {name: value + shift_cm for name, value in position.offset_cm.items()}
    if len(set(values.values())) == 1:
        return _offset(next(iter(values.values())))
    return ", ".join(f"{name} {_offset(value)}" for name, value in values.items())


def _offset(value_cm: float) -> str:
    # Digits that the design wrote are kept, or the offset shown might pass the limit again.
    return f"{signed(value_cm, 2, 6)} cm"


def _still(course: Course, index: int, placed: PlacedBeam) -> set[Jaw]:
    """Return the jaws that no offset moves: side jaws, and those set by their border's reach."""
    still = set(Jaw) - {placed.superior.jaw, placed.inferior.jaw}
    if index == 0 and course.superior_border.point_cm is None:
        still.add(placed.superior.jaw)
    if index == len(course.fields) - 1 and course.inferior_border.point_cm is None:
        still.add(placed.inferior.jaw)
    return still


def _jaw_faults(machine: Machine, placed: PlacedBeam, still: set[Jaw]) -> Iterator[Fault]:
    settings = placed.jaws
    ends = (placed.superior.jaw, placed.inferior.jaw)
    for jaw, value in settings.items():
        travel = machine.jaw_travel_cm[jaw]
        if jaw in ends and placed.beam.edges_by is EdgesBy.LEAVES:
            continue  # a leaf edge stands inside jaws that belong to the plan
        if not travel.holds(value):
            yield Fault(
                f"jaw {jaw} of beam {placed.beam.name} would stand at {signed(value, 2)} cm, "
                f"beyond its travel {_range(travel)} cm",
                fixed=jaw in still,
            )
    for low, high in ((Jaw.X1, Jaw.X2), (Jaw.Y1, Jaw.Y2)):
        opening = settings[high] - settings[low]
        if opening <= 0:
            yield Fault(
                f"jaws {low} and {high} of beam {placed.beam.name} would close on each other",
                fixed={low, high} <= still,
            )
        elif opening > machine.largest_opening_cm + 1e-9:
            yield Fault(
                f"jaws {low} and {high} of beam {placed.beam.name} would open {opening:.2f} cm, "
                f"wider than {machine.largest_opening_cm:.2f} cm",
                fixed={low, high} <= still,
            )


def _angle_faults(machine: Machine, placed: PlacedBeam, *, turned: bool) -> Iterator[Fault]:
    """Yield every angle out of range; those of a ``turned`` beam follow the junction."""
    beam = placed.beam
    for name, value, allowed in (
        ("gantry", beam.gantry_deg, machine.gantry_deg),
        ("collimator", placed.collimator_deg, machine.collimator_deg),
        ("couch", placed.couch_deg, machine.couch_deg),
    ):
        # 270 and -90 degrees are one angle, whichever way a machine's range is written.
        if not any(allowed.holds(value + turn) for turn in (-360.0, 0.0, 360.0)):
            yield Fault(
                f"{name} angle of beam {beam.name} is {value:.1f} degrees, outside "
                f"{_range(allowed)} degrees",
                fixed=name == "gantry" or not turned,
            )


def _range(allowed: Range) -> str:
    return f"{signed(allowed.low)} to {signed(allowed.high)}"
