"""Keeping the database safe: backup, restore, health, what roles may do."""

from __future__ import annotations

from pathlib import Path
from typing import Annotated

import typer

from featherlog.cli.options import Database, Json, Output
from featherlog.cli.output import WIDTH, remark, show, show_json


def backup(output: Output = None, database: Database = None) -> None:
    """Copy the database while others may be using it, and verify the copy.

    \b
    Example: featherlog database backup --output monday.backup
    """
    from featherlog.actions.operations import back_up as action

    show(f"The verified backup is {action(database, output)}")


def restore(
    backup: Annotated[Path, typer.Argument(metavar="FILE", help="A backup.")],
    drop_entries: Annotated[
        int,
        typer.Option(
            "--drop-entries",
            metavar="COUNT",
            help="How many ledger entries newer than the backup may go; they are listed first.",
        ),
    ] = 0,
    drop_unreadable: Annotated[
        bool,
        typer.Option(
            "--drop-unreadable",
            help="The present database is too damaged to say what it holds; replace it all the "
            "same.",
        ),
    ] = False,
    database: Database = None,
) -> None:
    """Put a verified backup in the database's place; the replaced file is kept beside it.

    \b
    Example: featherlog database restore monday.backup --drop-entries 2
    """
    from featherlog.actions.operations import restore as action

    done = action(database, backup, acknowledged=drop_entries, unreadable=drop_unreadable)
    show(f"Restored {backup}; {len(done.dropped)} newer entries are no longer in the database.")
    if done.kept is not None:
        show(f"The replaced file is {done.kept}")
    remark("Compare the ledger head with the last printed page: featherlog database health")


def health(json: Json = False, database: Database = None) -> None:
    """Look at settings, ledger, projections, disk and file, and say what to do.

    \b
    Example: featherlog database health
    """
    from featherlog.actions.operations import health as action
    from featherlog.errors import IntegrityError

    found = action(database)
    if json:
        show_json(found)
    else:
        show(f"database {found.database}")
        for line in found.lines:
            show(_line(line.grade, line.name, line.found))
            if line.todo:
                show(_line("", "", f"-> {line.todo}"))
    if found.grade == "FAIL":
        failed = ", ".join(line.name for line in found.lines if line.grade == "FAIL")
        raise IntegrityError(f"the database is not sound: {failed}")


def grants(
    recording: Annotated[
        str, typer.Option("--recording", metavar="ROLE", help="Who records; reads as well.")
    ],
    reading: Annotated[
        str | None,
        typer.Option("--reading", metavar="ROLE", help="Who only reads.", show_default=False),
    ] = None,
    database: Database = None,
) -> None:
    """Print the SQL that lets roles of PostgreSQL work without owning the tables.

    \b
    Example: featherlog database grants --recording featherlog > grants.sql
    """
    from featherlog.actions.grants import grants as action

    show(action(database, recording=recording, reading_role=reading))


def _line(grade: str, name: str, text: str) -> str:
    import textwrap

    head = f"{grade:4}  {name:11}  "
    return textwrap.fill(text, WIDTH, initial_indent=head, subsequent_indent=" " * len(head))


def register(group: typer.Typer) -> None:
    """Put these commands into the group of database commands."""
    for command in (backup, restore, health, grants):
        group.command()(command)
