"""Design files: one course's matched fields as a physicist types them, ``featherlog design 1``.

A file is read in two passes. The first finds every key that is missing, unknown or not allowed by
itself; only when there is none are the rules that span keys looked at.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

from featherlog.exchange.design_fields import read_borders, read_fields
from featherlog.exchange.design_junctions import read_junction, read_position
from featherlog.exchange.design_rules import broken_rules
from featherlog.exchange.kinds import choice, day, letters, number, several, text, whole
from featherlog.exchange.toml_fields import Reading, Table
from featherlog.exchange.toml_text import read_text
from featherlog.geometry.frames import PatientPosition
from featherlog.junction.design import Course, Pattern, Phase, SequencePattern, Weekday

if TYPE_CHECKING:
    from pathlib import Path

    from featherlog.junction.machine import Machine

FORMAT = "featherlog design 1"

_WORKING_WEEK = (
    Weekday.MONDAY,
    Weekday.TUESDAY,
    Weekday.WEDNESDAY,
    Weekday.THURSDAY,
    Weekday.FRIDAY,
)


def read_design(path: Path, machine: Machine) -> Course:
    """Read a design file for the machine that it names.

    Raises:
        NotFoundError: where there is no such file.
        InputError: naming every fault of the file, each with its line and what is allowed.
    """
    return parse_design(read_text(path), path.name, machine)


def parse_design(text: str, name: str, machine: Machine) -> Course:
    """Read a design from the text of a file called ``name``; errors as ``read_design``."""
    reading = Reading(text, name)
    reading.require_format(FORMAT)
    course = _course(reading.root, machine.sad_cm)
    reading.finish()
    reading.check(broken_rules(course, machine))
    return course


def named_machine(path: Path) -> str:
    """Return the name of the machine that a design file is for; errors as ``read_design``."""
    reading = Reading(read_text(path), path.name)
    reading.require_format(FORMAT)
    name = reading.root.table("course").take("machine", text())
    reading.refuse()
    return name


def _course(root: Table, sad_cm: float) -> Course:
    about = root.table("course")
    phases = tuple(_phase(table) for table in root.tables("phase"))
    dose_gy = sum(phase.fractions * phase.dose_per_fraction_gy for phase in phases)
    junctions = tuple(read_junction(table, dose_gy) for table in root.tables("junction"))
    names = tuple(junction.name for junction in junctions)
    position = about.take("patient_position", choice(PatientPosition))
    field_tables = root.tables("field", at_least=2)
    superior_border, inferior_border = read_borders(field_tables)
    return Course(
        key=about.take("key", letters(20, dashes=True)),
        patient_name=about.take("patient_name", text(private=True)),
        identifiers=about.named("identifiers", text(private=True)),
        site=about.take("site", text()),
        plan_label=about.take("plan_label", text(16)),
        note=about.take_or("note", text(500, empty=True), ""),
        patient_position=position,
        machine=about.take("machine", text()),
        fractions_a_day=about.take("fractions_a_day", whole(1, 2)),
        phases=phases,
        fields=read_fields(field_tables, names, position, sad_cm),
        superior_border=superior_border,
        inferior_border=inferior_border,
        junctions=junctions,
        positions=tuple(read_position(table, names) for table in root.tables("position")),
        sequence=_sequence(root.table("sequence")),
    )


def _phase(table: Table) -> Phase:
    return Phase(
        name=table.take("name", text()),
        fractions=table.take("fractions", whole(1, 100)),
        dose_per_fraction_gy=table.take("dose_per_fraction_gy", number("Gy", 0, 30, low_open=True)),
    )


def _sequence(table: Table) -> SequencePattern:
    pattern = table.take("pattern", choice(Pattern))
    return SequencePattern(
        pattern=pattern,
        positions=table.take("positions", several(letters(8), at_least=1)),
        block_fractions=_block_fractions(table, pattern),
        start_date=table.take("start_date", day()),
        weekdays=table.take_or("weekdays", several(choice(Weekday), at_least=1), _WORKING_WEEK),
        closed_dates=table.take_or("closed_dates", several(day()), ()),
    )


def _block_fractions(table: Table, pattern: Pattern) -> int | None:
    if pattern is Pattern.BLOCKS:
        return table.take("block_fractions", whole(1, 100))
    if table.has("block_fractions"):
        table.fault("block_fractions", 'is given, but is allowed only with the pattern "blocks"')
    return None
