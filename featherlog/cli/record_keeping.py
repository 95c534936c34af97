"""The ledger's commands: list it, note its head, verify all of it."""

from __future__ import annotations

from typing import TYPE_CHECKING, Annotated

import typer

from featherlog.cli.options import Database, Json
from featherlog.cli.output import remark, show, show_json, wrapped

if TYPE_CHECKING:
    from featherlog.actions.ledger import EntryLine

ledger_app = typer.Typer(
    help="List and verify the ledger.",
    no_args_is_help=True,
    rich_markup_mode=None,
    epilog="Example: featherlog ledger verify",
)
# Shorter ledgers are done before anybody wonders.
_LONG = 10_000


@ledger_app.command()
def verify(
    head: Annotated[
        str | None,
        typer.Option(
            "--head",
            metavar="NUMBER:HASH",
            help="A head noted earlier, as on a page; finds a tail that was cut off.",
        ),
    ] = None,
    json: Json = False,
    database: Database = None,
) -> None:
    """Look at every entry, signature and table; name the first that does not fit.

    \b
    Example: featherlog ledger verify --head 31:0123456789ab
    """
    from featherlog.actions.ledger import verify_ledger
    from featherlog.errors import IntegrityError

    found = verify_ledger(database, head, _progress)
    if json:
        show_json(found)
    elif not found.fault:
        show(f"The ledger fits together: {found.entries} entries, {found.signatures} signatures.")
        if found.unsigned:
            show(
                wrapped(
                    f"Entries without a signature: {found.unsigned} (wrong passphrases, and all "
                    "from before the first key)."
                )
            )
        show(f"ledger head {found.head or 'none'}")
        if head is None:
            show("Its end was not compared with an earlier head (--head).")
    if found.fault:
        raise IntegrityError(found.fault)


def _progress(done: int, total: int) -> None:
    if total >= _LONG and done % _LONG == 0:
        remark(f"{done} of {total} entries")


@ledger_app.command("list")
def list_entries(
    course: Annotated[
        str | None, typer.Argument(metavar="[COURSE]", help="Only this course's entries.")
    ] = None,
    json: Json = False,
    database: Database = None,
) -> None:
    """List the entries: when, what, who signed.

    \b
    Example: featherlog ledger list FH-2041
    """
    from featherlog.actions.ledger import list_entries as action

    lines = action(database, course)
    show_json(lines) if json else show("\n".join(map(_line, lines)) or "No entries yet.")


def _line(line: EntryLine) -> str:
    of_course = f"{line.course}: " if line.course else ""
    signed = f"signed by {', '.join(line.signed_by)}" if line.signed_by else "not signed"
    return wrapped(
        f"{line.entry}. {line.at} {of_course}{line.kind}, {line.who} ({line.role}): "
        f"{line.meaning}; {signed}; {line.hash[:12]}"
    )


@ledger_app.command()
def head(json: Json = False, database: Database = None) -> None:
    """Print the number and hash of the last entry, to be kept outside the database.

    \b
    Example: featherlog ledger head
    """
    from featherlog.actions.ledger import ledger_head

    found = ledger_head(database)
    show_json({"head": found}) if json else show(found or "No entries yet.")


def register(app: typer.Typer) -> None:
    """Put these commands on the program."""
    app.add_typer(ledger_app, name="ledger")
