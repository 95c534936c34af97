"""Design files: one course's matched fields as a physicist types them, ``featherlog design 1``.

A file is read in two passes. The first finds every key that is missing, unknown or not allowed by
itself; only when there is none are the rules that span keys looked at.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

from featherlog.exchange.design_fields import read_borders, read_fields
from featherlog.exchange.design_junctions import bear_separations, read_junction, read_position
from featherlog.exchange.design_rules import broken_rules
from featherlog.exchange.design_sequence import read_sequence
from featherlog.exchange.kinds import choice, letters, text, whole
from featherlog.exchange.quantities import FRACTION_DOSE_GY
from featherlog.exchange.toml_fields import Reading, Table
from featherlog.exchange.toml_text import read_text
from featherlog.geometry.patient import PatientPosition
from featherlog.junction.design import Course, Phase

if TYPE_CHECKING:
    from pathlib import Path

    from featherlog.junction.machine import Machine

FORMAT = "featherlog design 1"


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
    course = _course(reading.root, machine)
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


def _course(root: Table, machine: Machine) -> Course:
    about = root.table("course")
    phases = tuple(_phase(table) for table in root.tables("phase"))
    dose_gy = sum(phase.fractions * phase.dose_per_fraction_gy for phase in phases)
    junctions = tuple(read_junction(table, dose_gy) for table in root.tables("junction"))
    names = tuple(junction.name for junction in junctions)
    position = about.take("patient_position", choice(PatientPosition))
    field_tables = root.tables("field", at_least=2)
    superior_border, inferior_border = read_borders(field_tables)
    fields = read_fields(field_tables, names, position, machine.sad_cm)
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
        fields=fields,
        superior_border=superior_border,
        inferior_border=inferior_border,
        junctions=bear_separations(junctions, fields),
        positions=tuple(read_position(table, names) for table in root.tables("position")),
        sequence=read_sequence(root.table("sequence"), machine.closed_dates),
    )


def _phase(table: Table) -> Phase:
    return Phase(
        name=table.take("name", text()),
        fractions=table.take("fractions", whole(1, 100)),
        dose_per_fraction_gy=table.take("dose_per_fraction_gy", FRACTION_DOSE_GY),
    )
