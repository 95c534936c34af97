"""What else happens in a course: correcting a record, missed days, a pause, an end, a machine."""

from __future__ import annotations

from typing import TYPE_CHECKING, Annotated

import typer

from featherlog.cli.deliveries import (
    Again,
    FieldPosition,
    Fraction,
    Meterset,
    Position,
    Table,
    TreatedAt,
    delivery,
)
from featherlog.cli.options import (
    By,
    ByFile,
    CourseKey,
    Database,
    Gaps,
    Json,
    Reason,
    Second,
    SecondFile,
    VerifiedBy,
)
from featherlog.cli.output import show, show_json, wrapped
from featherlog.cli.physicist import course_app

if TYPE_CHECKING:
    from featherlog.actions.corrections import CorrectionLine


def correct(
    course: CourseKey,
    entry: Annotated[
        int, typer.Argument(metavar="ENTRY", help="The ledger entry of the record that is wrong.")
    ],
    reason: Reason,
    by: By,
    verified_by: VerifiedBy,
    passphrase_file: ByFile = None,
    second_file: SecondFile = None,
    fraction: Fraction = None,
    position: Position = None,
    field_position: FieldPosition = None,
    meterset: Meterset = None,
    gap: Gaps = None,
    table: Table = None,
    treated_at: TreatedAt = None,
    again: Again = False,
    void: Annotated[
        bool, typer.Option("--void", help="Nothing of it was delivered to this patient.")
    ] = False,
    json: Json = False,
    database: Database = None,
) -> None:
    """Correct the record of a fraction: say what was wrong; the rest stays as recorded.

    Both versions stay in the ledger.

    \b
    Example: featherlog correct FH-2041 9 --void --reason slip --by "Ash Plover" --with "Maple Teal"
    """
    from featherlog.actions.corrections import correct as action
    from featherlog.cli.console import recorded_text, remark_unexplained
    from featherlog.cli.passphrases import second, signer

    told = delivery(
        fraction=fraction,
        position=position,
        field_position=field_position,
        meterset=meterset,
        gap=gap,
        table=table,
        treated_at=treated_at,
        again=again,
        reason=reason,
    )
    performer, verifier = signer(by, passphrase_file), second(verified_by, second_file)
    result = action(
        database, course, entry, by=performer, verified_by=verifier, delivery=told, void=void
    )
    if json:
        show_json(result)
        return
    show(f"Entry {result.entry} stands in place of entry {entry}.")
    show(f"Fraction {result.fraction} was not delivered." if void else recorded_text(result))
    remark_unexplained(course, result)


def corrections(course: CourseKey, json: Json = False, database: Database = None) -> None:
    """List the corrected records of a course, both versions of each.

    \b
    Example: featherlog corrections FH-2041
    """
    from featherlog.actions.corrections import list_corrections

    lines = list_corrections(database, course)
    show_json(lines) if json else show("\n".join(map(_correction, lines)) or "No corrections.")


def _correction(line: CorrectionLine) -> str:
    what = f"Entry {line.entry} corrects entry {line.corrects}: {line.reason}. {line.at}"
    said = (f"{what}, {' and '.join(line.who)}.", f"Was: {line.was}.", f"Is: {line.became}.")
    return "\n".join(wrapped(text) for text in said)


@course_app.command()
def missed(
    course: CourseKey,
    reason: Reason,
    by: By,
    passphrase_file: ByFile = None,
    second: Second = None,
    second_file: SecondFile = None,
    date: Annotated[
        str | None,
        typer.Option("--date", metavar="DATE", help="The day (2026-03-02); without it, today."),
    ] = None,
    database: Database = None,
) -> None:
    """Note a treatment day without treatment; fractions keep their numbers and positions.

    \b
    Example: featherlog course missed FH-2041 --reason "machine service" --by "Ash Plover"
    """
    from featherlog.actions.course_life import miss
    from featherlog.cli.passphrases import signers

    people = signers(by, passphrase_file, second, second_file)
    following = miss(database, course, day=date, reason=reason, **people)
    show(f"Noted. The next fraction of {course} is projected for {following}.")


@course_app.command()
def pause(
    course: CourseKey,
    reason: Reason,
    by: By,
    passphrase_file: ByFile = None,
    second: Second = None,
    second_file: SecondFile = None,
    database: Database = None,
) -> None:
    """Stop a course until it is released.

    \b
    Example: featherlog course pause FH-2041 --reason "skin reaction" --by "Ash Plover"
    """
    from featherlog.actions.course_life import pause as action
    from featherlog.cli.passphrases import signers

    action(database, course, reason=reason, **signers(by, passphrase_file, second, second_file))
    show(f"Course {course} is paused: no fraction is confirmed until it is released.")


@course_app.command()
def release(
    course: CourseKey,
    reason: Reason,
    by: By,
    passphrase_file: ByFile = None,
    second: Second = None,
    second_file: SecondFile = None,
    database: Database = None,
) -> None:
    """Let a paused course go on.

    \b
    Example: featherlog course release FH-2041 --reason "skin healed" --by "Aspen Crane"
    """
    from featherlog.actions.course_life import release as action
    from featherlog.cli.passphrases import signers

    people = signers(by, passphrase_file, second, second_file)
    following = action(database, course, reason=reason, **people)
    show(f"Course {course} goes on; the next fraction is projected for {following}.")


@course_app.command()
def end(
    course: CourseKey,
    reason: Reason,
    by: By,
    passphrase_file: ByFile = None,
    second: Second = None,
    second_file: SecondFile = None,
    database: Database = None,
) -> None:
    """End a course before all prescribed fractions are complete.

    \b
    Example: featherlog course end FH-2041 --reason "patient's wish" --by "Aspen Crane"
    """
    from featherlog.actions.course_life import end as action
    from featherlog.cli.passphrases import signers

    people = signers(by, passphrase_file, second, second_file)
    complete = action(database, course, reason=reason, **people)
    show(f"Course {course} ended after {complete} complete fractions.")


@course_app.command()
def machine(
    course: CourseKey,
    name: Annotated[str, typer.Argument(metavar="NAME", help="The other machine's name.")],
    reason: Reason,
    by: By,
    passphrase_file: ByFile = None,
    second: Second = None,
    second_file: SecondFile = None,
    database: Database = None,
) -> None:
    """Move a course to a machine that is like its own in all but the name.

    \b
    Example: featherlog course machine FH-2041 Birch --reason "Alder is down" --by "Rowan Finch"
    """
    from featherlog.actions.course_life import change_machine
    from featherlog.cli.passphrases import signers

    people = signers(by, passphrase_file, second, second_file)
    change_machine(database, course, name, reason=reason, **people)
    show(f"Course {course} goes on at {name}.")


def register(app: typer.Typer) -> None:
    """Put these commands on the program."""
    app.command()(correct)
    app.command()(corrections)
