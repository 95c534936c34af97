"""Setting the program up: database, machines, and the demo."""

from __future__ import annotations

from pathlib import Path
from typing import Annotated

import typer

from featherlog.cli import operations
from featherlog.cli.options import By, ByFile, Database, Json, Second, SecondFile
from featherlog.cli.output import show, show_json, table

database_app = typer.Typer(
    help="Create, upgrade and look at the database.",
    no_args_is_help=True,
    rich_markup_mode=None,
    epilog="Example: featherlog database status",
)
machine_app = typer.Typer(
    help="Keep the machines.",
    no_args_is_help=True,
    rich_markup_mode=None,
    epilog="Example: featherlog machine list",
)


def demo(
    folder: Annotated[
        Path, typer.Option("--folder", metavar="FOLDER", help="Where to build it.")
    ] = Path("featherlog-demo"),
    prone: Annotated[
        bool, typer.Option("--prone", help="Lay the craniospinal patient prone, not supine.")
    ] = False,
) -> None:
    """Build a fictional department in a folder of its own and look around it.

    \b
    Example: featherlog demo
    """
    from featherlog.actions.demo import build_demo
    from featherlog.cli.show_demo import demo_text

    show(demo_text(build_demo(folder, prone=prone)))


@database_app.command()
def create(
    practice: Annotated[
        bool, typer.Option("--practice", help="For practice only; every page will say so.")
    ] = False,
    database: Database = None,
) -> None:
    """Create an empty database.

    \b
    Example: featherlog database create
    """
    from featherlog.actions.database import create as action

    show(f"Created {action(database, demo=practice)}")


@database_app.command()
def upgrade(database: Database = None) -> None:
    """Bring the database to this program's schema, after a backup.

    \b
    Example: featherlog database upgrade
    """
    from featherlog.actions.database import upgrade as action

    backup = action(database)
    show(f"Upgraded; the backup is {backup}" if backup else "The database is up to date.")


@database_app.command()
def status(json: Json = False, database: Database = None) -> None:
    """Show what the database holds and whether its ledger fits together.

    \b
    Example: featherlog database status
    """
    from featherlog.actions.database import status as action
    from featherlog.errors import IntegrityError

    found = action(database)
    if json:
        show_json(found)
    else:
        kind = "practice database" if found.demo else "database"
        show(f"{kind} {found.database}")
        show(f"{found.courses} course(s), {found.ledger_entries} ledger entries")
        show(f"ledger head {found.ledger_head or 'none'}")
    if found.first_fault:
        raise IntegrityError(found.first_fault)


@machine_app.command("add")
def add_machine(
    file: Annotated[Path, typer.Argument(metavar="FILE", help="A machine file (TOML).")],
    by: By,
    passphrase_file: ByFile = None,
    second: Second = None,
    second_file: SecondFile = None,
    database: Database = None,
) -> None:
    """Add a machine from its file, or replace its description for later designs.

    \b
    Example: featherlog machine add alder.toml --by "Rowan Finch"
    """
    from featherlog.actions.machines import add_machine as action
    from featherlog.cli.passphrases import signers

    people = signers(by, passphrase_file, second, second_file)
    show(f"Machine {action(database, file, **people).name} is known.")


@machine_app.command("list")
def list_machines(json: Json = False, database: Database = None) -> None:
    """List the machines.

    \b
    Example: featherlog machine list
    """
    from featherlog.actions.machines import list_machines as action

    machines = action(database)
    if json:
        show_json(machines)
        return
    rows = [
        (m.name, f"{m.sad_cm:.1f}", ", ".join(quality.name for quality in m.qualities))
        for m in machines
    ]
    show(table(("machine", "SAD cm", "energies"), rows) if rows else "No machines yet.")


def register(app: typer.Typer) -> None:
    """Put these commands on the program."""
    app.command()(demo)
    operations.register(database_app)
    app.add_typer(database_app, name="database")
    app.add_typer(machine_app, name="machine")
