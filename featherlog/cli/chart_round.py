"""The chart round's commands: what was delivered, what it adds up to, and what people decide."""

from __future__ import annotations

from pathlib import Path
from typing import Annotated

import typer

from featherlog.cli.options import (
    By,
    ByFile,
    CourseKey,
    Database,
    Depths,
    Json,
    Output,
    PaperSize,
    Second,
    SecondFile,
)
from featherlog.cli.output import remark, show, show_json, wrapped
from featherlog.cli.physicist import course_app


def dose(
    course: CourseKey,
    depth: Depths = None,
    picture: Annotated[
        Path | None,
        typer.Option("--picture", metavar="FILE", help="Write a .pdf or .svg of the profiles."),
    ] = None,
    csv: Annotated[
        Path | None, typer.Option("--csv", metavar="FILE", help="Write every profile as CSV.")
    ] = None,
    json: Json = False,
    database: Database = None,
) -> None:
    """Show the summed junction dose: planned, delivered, predicted, unfeathered.

    An SVG holds the profile at the match depth; a PDF has a page for each junction.

    \b
    Example: featherlog dose FH-2042 --picture dose.pdf
    """
    from featherlog.actions import dose as action
    from featherlog.cli.show_dose import dose_text

    view = action.dose(database, course, depths_cm=tuple(depth or ()))
    if picture is not None:
        for file in action.write_pictures(view, picture):
            remark(f"wrote {file}")
    if csv is not None:
        action.write_csv(view, csv)
        remark(f"wrote {csv}")
    show_json(view) if json else show(dose_text(view))


def review(
    course: CourseKey,
    output: Output = None,
    page_size: PaperSize = "A4",
    sign: Annotated[
        bool, typer.Option("--sign", help="Sign the review that is shown, by --by.")
    ] = False,
    by: Annotated[
        str | None, typer.Option("--by", metavar="NAME", help="Who signs, with --sign.")
    ] = None,
    passphrase_file: ByFile = None,
    second: Second = None,
    second_file: SecondFile = None,
    json: Json = False,
    database: Database = None,
) -> None:
    """Show a course's review; with --output, write its page as PDF; with --sign, sign it.

    \b
    Example: featherlog review FH-2042 --sign --by "Rowan Finch"
    """
    from featherlog.cli.show_review import review_text
    from featherlog.errors import InputError

    if sign != (by is not None):
        raise InputError("--sign and --by belong together: who signs the review")
    if output is not None:
        from featherlog.actions.files import write_private
        from featherlog.actions.papers import review_page

        view, pdf = review_page(database, course, page_size=page_size)
        write_private(output, pdf)
        remark(f"wrote {output}")
    else:
        from featherlog.actions.review import review as action

        view = action(database, course)
    show_json(view) if json else show(review_text(view))
    if by is not None:
        from featherlog.actions.decisions import sign_review
        from featherlog.cli.passphrases import signers

        people = signers(by, passphrase_file, second, second_file)
        sign_review(database, course, view.week, **people)
        remark(f"{by} has signed this review, up to ledger entry {view.week.reviewed_to}.")


def decide(
    course: CourseKey,
    number: Annotated[int, typer.Argument(metavar="NUMBER", help="The departure's number.")],
    decision: Annotated[
        str, typer.Option("--decision", metavar="TEXT", help="What was decided, and why.")
    ],
    by: By,
    passphrase_file: ByFile = None,
    second: Second = None,
    second_file: SecondFile = None,
    database: Database = None,
) -> None:
    """Decide on a departure whose reason is known; it is open until then.

    \b
    Example: featherlog decide FH-2042 1 --decision "shares stay as they are" --by "Rowan Finch"
    """
    from featherlog.actions.decisions import decide as action
    from featherlog.cli.passphrases import signers

    people = signers(by, passphrase_file, second, second_file)
    action(database, course, number, decision=decision, **people)
    show(f"Departure {number} of {course} is decided.")


def position_checked(
    course: CourseKey,
    position: Annotated[str, typer.Argument(metavar="POSITION", help="The position's label.")],
    by: By,
    passphrase_file: ByFile = None,
    second: Second = None,
    second_file: SecondFile = None,
    database: Database = None,
) -> None:
    """Sign the physics check of a position to which the course is shifted.

    \b
    Example: featherlog course position-checked FH-2041 B --by "Rowan Finch"
    """
    from featherlog.actions.decisions import check_position as action
    from featherlog.cli.passphrases import signers

    people = signers(by, passphrase_file, second, second_file)
    action(database, course, position, **people)
    show(f"Position {position} of {course} is checked.")


def sheet_check(
    code: Annotated[str, typer.Argument(metavar="CODE", help="The code printed on the page.")],
    course: Annotated[
        str | None,
        typer.Option("--course", metavar="COURSE", help="Look at this course alone: quicker."),
    ] = None,
    json: Json = False,
    database: Database = None,
) -> None:
    """Say whether a printed shift sheet is valid now, superseded (by what) or unknown.

    \b
    Example: featherlog sheet-check K7Q2-M3ZD --course FH-2041
    """
    from featherlog.actions.paper_codes import SUPERSEDED, VALID, check_page
    from featherlog.errors import NotFoundError, RefusedError

    found = check_page(database, code, course)
    if json:
        show_json(found)
    elif found.status == VALID:
        show(wrapped(found.words))
    if found.status != VALID:
        raise (RefusedError if found.status == SUPERSEDED else NotFoundError)(found.words)


def register(app: typer.Typer) -> None:
    """Put these commands on the program."""
    for command in (dose, review, decide):
        app.command()(command)
    app.command("sheet-check")(sheet_check)
    course_app.command("position-checked")(position_checked)
