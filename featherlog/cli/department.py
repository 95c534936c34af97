"""Keeping the department: its people with their keys, and its policy."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Annotated

import typer

from featherlog.cli.options import (
    By,
    ByFile,
    Database,
    Json,
    NewFile,
    Reason,
    Second,
    SecondFile,
    VerifiedBy,
)
from featherlog.cli.output import show, show_json, table, wrapped

if TYPE_CHECKING:
    from collections.abc import Iterator

    from featherlog.actions.policy import PolicyView
    from featherlog.actions.staff import StaffLine

staff_app = typer.Typer(
    help="Keep the staff list and its keys.",
    no_args_is_help=True,
    rich_markup_mode=None,
    epilog="Example: featherlog staff list",
)
policy_app = typer.Typer(
    help="Set and show the department's policy.",
    no_args_is_help=True,
    rich_markup_mode=None,
    epilog="Example: featherlog policy show",
)
Name = Annotated[str, typer.Argument(metavar="NAME", help="The person's name.")]


@staff_app.command("add")
def add_staff(
    name: Name,
    role: Annotated[
        str,
        typer.Option(
            "--role", metavar="ROLE", help="physicist, therapist, physician or administrator."
        ),
    ],
    by: By,
    passphrase_file: ByFile = None,
    new_file: NewFile = None,
    database: Database = None,
) -> None:
    """Put a person on the staff list; the first is an administrator who adds themselves.

    \b
    Example: featherlog staff add "Ash Plover" --role therapist --by "Hazel Heron"
    """
    from featherlog.actions.staff import add_staff as action
    from featherlog.cli.passphrases import new_owner, signer

    newcomer = new_owner(name, new_file)
    action(database, newcomer=newcomer, role=role, by=signer(by, passphrase_file))
    show(f"{name} is on the staff list as {role}.")


@staff_app.command("replace-key")
def replace_key(
    name: Name,
    reason: Reason,
    by: By,
    passphrase_file: ByFile = None,
    new_file: NewFile = None,
    database: Database = None,
) -> None:
    """Give a person a new key and passphrase: an administrator, or they themselves.

    \b
    Example: featherlog staff replace-key "Ash Plover" --reason "forgotten" --by "Hazel Heron"
    """
    from featherlog.actions.staff import replace_key as action
    from featherlog.cli.passphrases import new_owner, signer

    owner = new_owner(name, new_file)
    action(database, owner=owner, reason=reason, by=signer(by, passphrase_file))
    show(f"{name} has a new key; what the old one signed stays valid.")


@staff_app.command("leave")
def leave(
    name: Name,
    reason: Reason,
    by: By,
    passphrase_file: ByFile = None,
    database: Database = None,
) -> None:
    """Say that a person has left: they can no longer sign.

    \b
    Example: featherlog staff leave "Ash Plover" --reason "moved away" --by "Hazel Heron"
    """
    from featherlog.actions.staff import remove_staff as action
    from featherlog.cli.passphrases import signer

    action(database, name=name, reason=reason, by=signer(by, passphrase_file))
    show(f"{name} can no longer sign; what they signed stays valid.")


@staff_app.command("restore-administrator")
def restore_administrator(
    name: Name,
    reason: Reason,
    by: By,
    verified_by: VerifiedBy,
    passphrase_file: ByFile = None,
    second_file: SecondFile = None,
    new_file: NewFile = None,
    database: Database = None,
) -> None:
    """Make a person administrator where none can sign: two others of different roles sign.

    \b
    Example: featherlog staff restore-administrator "Hazel Heron" --reason "passphrase lost" --by "Rowan Finch" --with "Aspen Crane"
    """  # noqa: E501 - an example is one line, to be copied
    from featherlog.actions.staff import restore_administrator as action
    from featherlog.cli.passphrases import new_owner, second, signer

    action(
        database,
        owner=new_owner(name, new_file),
        reason=reason,
        by=signer(by, passphrase_file),
        verified_by=second(verified_by, second_file),
    )
    show(f"{name} is administrator.")


@staff_app.command("list")
def list_staff(json: Json = False, database: Database = None) -> None:
    """List everyone, their role, and since which ledger entry they have their key.

    \b
    Example: featherlog staff list
    """
    from featherlog.actions.staff import list_staff as action

    people = action(database)
    if json:
        show_json(people)
    else:
        rows = [(person.name, person.role, _key(person)) for person in people]
        show(table(("name", "role", "key"), rows) if rows else "Nobody yet.")


def _key(person: StaffLine) -> str:
    if person.left_entry is not None:
        return f"left (entry {person.left_entry})"
    return f"since entry {person.key_entry}" if person.key else "none yet"


@policy_app.command("set")
def set_policy(
    file: Annotated[Path, typer.Argument(metavar="FILE", help="A policy file (TOML).")],
    by: By,
    passphrase_file: ByFile = None,
    second: Second = None,
    second_file: SecondFile = None,
    database: Database = None,
) -> None:
    """Put a policy file in force, as the next version.

    \b
    Example: featherlog policy set policy.toml --by "Rowan Finch"
    """
    from featherlog.actions.policy import set_policy as action
    from featherlog.cli.passphrases import signers

    people = signers(by, passphrase_file, second, second_file)
    show(f"Policy version {action(database, file, **people)} is in force.")


@policy_app.command("show")
def show_policy(json: Json = False, database: Database = None) -> None:
    """Show the policy in force.

    \b
    Example: featherlog policy show
    """
    from featherlog.actions.policy import show_policy as action

    view = action(database)
    show_json(view) if json else show("\n".join(map(wrapped, _policy(view))))


def _policy(view: PolicyView) -> Iterator[str]:
    from featherlog.policy import ALWAYS_TWO

    policy, thresholds = view.policy, view.policy.reporting_thresholds
    if view.version:
        yield f"Policy version {view.version} of {policy.department}, ledger entry {view.entry}"
    else:
        yield "Built-in policy, in force until the department sets its own with `policy set`"
    yield f"time zone: {policy.time_zone or 'the one of this computer'}"
    yield f"call the physicist: {policy.contacts.physicist or 'nobody named yet'}"
    yield f"call the physician: {policy.contacts.physician or 'nobody named yet'}"
    yield f"two people: {', '.join(dict.fromkeys((*ALWAYS_TWO, *policy.two_people)))}"
    yield f"between two fractions on one day: {policy.minimum_interval_hours:g} h"
    yield f"read back on shift days: {', '.join(policy.read_back_on_shift_days)}"
    yield f"physicist present at shifts: {'yes' if policy.physics_presence_at_shifts else 'no'}"
    for what, percent in (
        ("the total", thresholds.total_percent),
        ("one fraction", thresholds.fraction_percent),
        ("one week", thresholds.weekly_percent),
    ):
        yield f"flag for {what}: {'none' if percent is None else f'from {percent:g} %'}"


def register(app: typer.Typer) -> None:
    """Put these commands on the program."""
    app.add_typer(staff_app, name="staff")
    app.add_typer(policy_app, name="policy")
