"""The therapist's commands, in the order of a day: today, sheet, confirm, record."""

from __future__ import annotations

from pathlib import Path
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
    Output,
    PaperSize,
    Second,
    SecondFile,
    VerifiedBy,
    named_numbers,
)
from featherlog.cli.output import remark, show, show_json, wrapped

if TYPE_CHECKING:
    from featherlog.actions.record import Recorded


def today(
    course: Annotated[
        str | None, typer.Argument(metavar="[COURSE]", help="One course; without it, the list.")
    ] = None,
    machine: Annotated[
        str | None, typer.Option("--machine", metavar="NAME", help="Only this machine's courses.")
    ] = None,
    date: Annotated[
        str | None, typer.Option("--date", metavar="DATE", help="List this day (2026-03-02).")
    ] = None,
    json: Json = False,
    database: Database = None,
) -> None:
    """Show the courses due, or what to set for one course's next fraction.

    \b
    Example: featherlog today FH-2041
    """
    from featherlog.actions import today as action
    from featherlog.cli.show_day import day_text, due_text
    from featherlog.errors import InputError

    if course is None:
        due = action.due_list(database, day=date, machine=machine)
        show_json(due) if json else show(due_text(due))
        return
    if date is not None or machine is not None:
        raise InputError("--date and --machine belong to the list; leave them out with a COURSE")
    view = action.today(database, course)
    show_json(view) if json else show(day_text(view))


def sheet(
    course: CourseKey,
    output: Output = None,
    page_size: PaperSize = "A4",
    database: Database = None,
) -> None:
    """Write the shift sheet of the next fraction as PDF.

    \b
    Example: featherlog sheet FH-2041 --output sheet.pdf
    """
    from featherlog.actions.files import write_private
    from featherlog.actions.papers import sheet as action
    from featherlog.cli.show_day import sheet_words

    view, pdf = action(database, course, page_size=page_size)
    file = output or Path(f"{course}-fraction-{view.fraction}.pdf")
    write_private(file, pdf)
    show(f"{file}: {sheet_words(view)}")


def confirm(
    course: CourseKey,
    by: By,
    verified_by: VerifiedBy,
    passphrase_file: ByFile = None,
    second_file: SecondFile = None,
    position: Annotated[
        str | None,
        typer.Option(
            "--position",
            metavar="LABEL",
            help="The position read back from the console; needed on a shift day.",
        ),
    ] = None,
    page: Annotated[
        str | None, typer.Option("--sheet", metavar="CODE", help="The code on the sheet in hand.")
    ] = None,
    reading: Annotated[
        list[str] | None,
        typer.Option(
            "--reading",
            metavar="NAME=CM",
            help="A value read back, IEC 61217: BEAM:JAW, such as 'AP upper:Y1=-14', or "
            "FIELD:longitudinal.",
        ),
    ] = None,
    gap: Gaps = None,
    json: Json = False,
    database: Database = None,
) -> None:
    """Confirm the next fraction before the beam; stops with a reason where it must.

    \b
    Example: featherlog confirm FH-2041 --by "Ash Plover" --with "Maple Teal" --position B
    """
    from featherlog.actions.confirm import ReadBack
    from featherlog.actions.confirm import confirm as action
    from featherlog.cli.passphrases import second, signer
    from featherlog.cli.show_day import confirmed_text

    read_back = ReadBack(
        position=position,
        page=page,
        gaps_cm=named_numbers(gap, "--gap", "cm"),
        readings_cm=named_numbers(reading, "--reading", "cm"),
    )
    performer, verifier = signer(by, passphrase_file), second(verified_by, second_file)
    view = action(database, course, by=performer, verified_by=verifier, read_back=read_back)
    show_json(view) if json else show(confirmed_text(view))


def record(
    course: CourseKey,
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
    reason: Annotated[
        str | None,
        typer.Option("--reason", metavar="TEXT", help="Why it differs, where it does."),
    ] = None,
    json: Json = False,
    database: Database = None,
) -> None:
    """Record a fraction after the beam, as confirmed unless said otherwise.

    What differs from the plan is recorded all the same and becomes a departure.

    \b
    Example: featherlog record FH-2041 --by "Ash Plover" --with "Maple Teal"
    """
    from featherlog.actions.record import record as action
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
    result = action(database, course, by=performer, verified_by=verifier, delivery=told)
    show_json(result) if json else show(recorded_text(result))
    if told.reason and not result.departures:
        remark("Nothing differs from the plan, so the reason was not kept.")
    remark_unexplained(course, result)


def remark_unexplained(course: str, result: Recorded) -> None:
    """Say how to give the reason for what differs, where it is not given yet."""
    if result.departures and not result.explained:
        remark(
            wrapped(
                "No reason was given for what differs; add it with `featherlog explain "
                f"{course} NUMBER --reason ... --by ...` (numbers: `featherlog departures "
                f"{course}`)."
            )
        )


def recorded_text(result: Recorded) -> str:
    """Return what a record or a correction came to."""
    where = ", ".join(f"{field} at {place}" for field, place in result.positions)
    state = _state(result)
    lines = [
        wrapped(f"Recorded fraction {result.fraction} ({where}), {state}. Entry {result.entry}.")
    ]
    lines += [
        wrapped(f"DEPARTURE ({line.kind}, {line.grade}): {line.detail}")
        for line in result.departures
    ]
    lines.append(
        "No further fraction is due."
        if result.next_fraction is None
        else f"Next: fraction {result.next_fraction} at position {result.next_position}, "
        f"projected {result.next_date}."
    )
    return "\n".join(lines)


def _state(result: Recorded) -> str:
    if result.complete:
        return "complete"
    if result.step_complete:
        return f"step {result.step} of {result.steps} complete, the next step is still to be given"
    return "NOT COMPLETE: the remainder is still to be given"


def departures(course: CourseKey, json: Json = False, database: Database = None) -> None:
    """List what was delivered differently, with the reasons given.

    \b
    Example: featherlog departures FH-2042
    """
    from featherlog.actions.departures import list_departures
    from featherlog.cli.show_review import departures_text

    lines = list_departures(database, course)
    show_json(lines) if json else show(departures_text(lines))


def explain(
    course: CourseKey,
    number: Annotated[int, typer.Argument(metavar="NUMBER", help="The departure's number.")],
    reason: Annotated[str, typer.Option("--reason", metavar="TEXT", help="Why it happened.")],
    by: By,
    passphrase_file: ByFile = None,
    second: Second = None,
    second_file: SecondFile = None,
    database: Database = None,
) -> None:
    """Give the reason for an open departure.

    \b
    Example: featherlog explain FH-2042 1 --reason "sheet misread" --by "Rowan Finch"
    """
    from featherlog.actions.departures import explain as action
    from featherlog.cli.passphrases import signers

    people = signers(by, passphrase_file, second, second_file)
    action(database, course, number, reason=reason, **people)
    show(f"Departure {number} of {course} now has its reason.")


def register(app: typer.Typer) -> None:
    """Put these commands on the program."""
    for command in (today, sheet, confirm, record, departures, explain):
        app.command()(command)
