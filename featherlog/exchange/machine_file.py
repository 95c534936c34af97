"""Machine files: what a linear accelerator can do, ``featherlog machine 1``."""

from __future__ import annotations

from typing import TYPE_CHECKING

from featherlog.exchange.console_scale import read_display
from featherlog.exchange.kinds import day, interval, number, rising, several, text
from featherlog.exchange.quantities import DEPTH_CM, JAW_CM, SAD_CM
from featherlog.exchange.toml_fields import Fault, Reading, Table, repeated
from featherlog.exchange.toml_text import read_text
from featherlog.junction.machine import (
    BeamQuality,
    DepthTable,
    Jaw,
    Machine,
    Range,
    Steps,
    Tolerances,
)

if TYPE_CHECKING:
    from collections.abc import Iterator
    from datetime import date
    from pathlib import Path

FORMAT = "featherlog machine 1"

_STEP_CM = number("cm", 0, 2, low_open=True)
_STEP_DEG = number("degrees", 0, 5, low_open=True)
_TRAVEL_CM = interval(JAW_CM)
_SIGNED_DEG = interval(number("degrees", -185, 185))
_GANTRY_DEG = interval(number("degrees", -185, 365))
_DEPTHS_CM = rising(DEPTH_CM)
_WIDTHS_CM = several(number("cm", 0, 10, low_open=True), at_least=1)


def read_machine(path: Path) -> Machine:
    """Read a machine file.

    Raises:
        NotFoundError: where there is no such file.
        InputError: naming every fault of the file, each with its line and what is allowed.
    """
    return parse_machine(read_text(path), path.name)


def parse_machine(text: str, name: str) -> Machine:
    """Read a machine from the text of a file called ``name``; errors as ``read_machine``."""
    reading = Reading(text, name)
    reading.require_format(FORMAT)
    machine = _machine(reading.root)
    reading.finish()
    reading.check(_rules(machine))
    return machine


def _machine(root: Table) -> Machine:
    travel = root.table("jaw_travel_cm")
    angles = root.table("angle_ranges_deg")
    return Machine(
        name=root.take("name", text()),
        sad_cm=root.take("sad_cm", SAD_CM),
        jaw_travel_cm={jaw: Range(*travel.take(jaw.value, _TRAVEL_CM)) for jaw in Jaw},
        largest_opening_cm=root.take("largest_opening_cm", number("cm", 0, 60, low_open=True)),
        gantry_deg=Range(*angles.take("gantry", _GANTRY_DEG)),
        collimator_deg=Range(*angles.take("collimator", _SIGNED_DEG)),
        couch_deg=Range(*angles.take("couch", _SIGNED_DEG)),
        steps=_steps(root.table("settable_steps")),
        tolerances=_tolerances(root.table("tolerances")),
        qualities=tuple(_quality(table) for table in root.tables("energy")),
        closed_dates=_closed_dates(root),
        display=read_display(root.table_or_none("display")),
    )


def _closed_dates(root: Table) -> tuple[date, ...]:
    given = root.take_or("closed_dates", several(day()), ())
    return tuple(sorted({*given}))


def _steps(table: Table) -> Steps:
    return Steps(
        jaw_cm=table.take("jaw_cm", _STEP_CM),
        table_cm=table.take("table_cm", _STEP_CM),
        angle_deg=table.take("angle_deg", _STEP_DEG),
    )


def _tolerances(table: Table) -> Tolerances:
    return Tolerances(
        jaw_cm=table.take("jaw_cm", _STEP_CM),
        table_cm=table.take("table_cm", _STEP_CM),
        angle_deg=table.take("angle_deg", _STEP_DEG),
        meterset_percent=table.take("meterset_percent", number("percent", 0, 20, low_open=True)),
    )


def _quality(table: Table) -> BeamQuality:
    penumbra = table.table("penumbra")
    return BeamQuality(
        name=table.take("name", text(20)),
        penumbra_80_20_cm=DepthTable(
            depth_cm=penumbra.take("depth_cm", _DEPTHS_CM),
            value=penumbra.take("width_80_20_cm", _WIDTHS_CM),
        ),
        transmission=table.take("transmission", number("", 0, 0.1)),
    )


def _rules(machine: Machine) -> Iterator[Fault]:
    """Find what no key shows alone."""
    yield from repeated(
        (("energy", place, "name"), quality.name) for place, quality in enumerate(machine.qualities)
    )
    for place, quality in enumerate(machine.qualities):
        depths = len(quality.penumbra_80_20_cm.depth_cm)
        widths = len(quality.penumbra_80_20_cm.value)
        if depths != widths:
            path = ("energy", place, "penumbra", "width_80_20_cm")
            yield path, f"has {widths}, but must have one for each of the {depths} in depth_cm"
