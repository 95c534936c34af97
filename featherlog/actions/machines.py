"""The machines of the department."""

from __future__ import annotations

from typing import TYPE_CHECKING

import msgspec

from featherlog.actions.desk import Desk, Signer, at_desk
from featherlog.actions.signing import signing_desk
from featherlog.actions.typed import printable_everywhere
from featherlog.errors import NotFoundError
from featherlog.exchange.machine_file import read_machine
from featherlog.junction.machine import Machine
from featherlog.policy import Act
from featherlog.store import queries
from featherlog.store.entry import Kind

if TYPE_CHECKING:
    from pathlib import Path


def add_machine(
    database: str | None, file: Path, *, by: Signer, verified_by: Signer | None = None
) -> Machine:
    """Add a machine, or replace its description for designs prepared from now on.

    Raises InputError for a faulty file and RefusedError unless a physicist does it.
    """
    machine = read_machine(file)
    content = msgspec.to_builtins(machine)
    printable_everywhere(content)
    with signing_desk(database, Act.ADD_MACHINE, by, verified_by) as desk:
        desk.append(
            Kind.MACHINE_ADDED,
            {"machine": content},
            meaning=f"I describe machine {machine.name} for the designs that follow",
        )
    return machine


def list_machines(database: str | None) -> tuple[Machine, ...]:
    """Return every machine, by name."""
    with at_desk(database) as desk:
        rows = queries.machines(desk.connection)
    return tuple(msgspec.json.decode(row.content, type=Machine) for row in rows)


def machine_named(desk: Desk, name: str) -> Machine:
    """Return the machine of that name; NotFoundError where there is none."""
    content = queries.machine_content(desk.connection, name)
    if content is None:
        raise NotFoundError(
            f"there is no machine {name!r}; add it with `featherlog machine add FILE`"
        )
    return msgspec.json.decode(content, type=Machine)
