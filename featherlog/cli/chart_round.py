"""The chart round's commands: what was delivered and what it adds up to."""

from __future__ import annotations

from pathlib import Path
from typing import Annotated

import typer

from featherlog.cli.options import CourseKey, Database, Depths, Json, Output, PaperSize
from featherlog.cli.output import remark, show, show_json


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
    json: Json = False,
    database: Database = None,
) -> None:
    """Show a course's review; with --output, write its page as PDF.

    \b
    Example: featherlog review FH-2042 --output review.pdf
    """
    from featherlog.cli.show_review import review_text

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


def register(app: typer.Typer) -> None:
    """Put these commands on the program."""
    app.command()(dose)
    app.command()(review)
