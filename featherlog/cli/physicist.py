"""The physicist's commands: template, solve, and a course's way to approval."""

from __future__ import annotations

from enum import StrEnum
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
from featherlog.cli.output import show, show_json, table, wrapped

DesignFile = Annotated[Path, typer.Argument(metavar="DESIGN", help="A design file (TOML).")]


class TemplateKind(StrEnum):
    """The three kinds of file."""

    DESIGN = "design"
    MACHINE = "machine"
    POLICY = "policy"


course_app = typer.Typer(
    help="Prepare, check, approve and look at courses.",
    no_args_is_help=True,
    rich_markup_mode=None,
    epilog="Example: featherlog course list",
)


def template(
    kind: Annotated[TemplateKind, typer.Argument(help="Which file to write.")],
) -> None:
    """Print a commented design, machine or policy file to fill in.

    \b
    Example: featherlog template design > thigh.toml
    """
    from featherlog.actions.documents import TEMPLATES

    show(TEMPLATES[kind])


def solve(
    design: DesignFile,
    machine: Annotated[
        Path, typer.Option("--machine", metavar="FILE", help="The machine's file (TOML).")
    ],
    depth: Depths = None,
    json: Json = False,
) -> None:
    """Solve a design file without a database: settings, shares, warnings, dose.

    \b
    Example: featherlog solve thigh.toml --machine alder.toml
    """
    from featherlog.actions.solution import solve_files
    from featherlog.cli.show_design import solution_text

    view = solve_files(design, machine, depths_cm=tuple(depth or ()))
    show_json(view) if json else show(solution_text(view))


@course_app.command()
def prepare(
    design: DesignFile,
    by: By,
    passphrase_file: ByFile = None,
    second: Second = None,
    second_file: SecondFile = None,
    database: Database = None,
) -> None:
    """Solve a design file and store it as the course's next revision.

    \b
    Example: featherlog course prepare thigh.toml --by "Rowan Finch"
    """
    from featherlog.actions.designs import prepare as action
    from featherlog.cli.passphrases import signers

    people = signers(by, passphrase_file, second, second_file)
    key, number, plan = action(database, design, **people)
    show(f"Prepared revision {number} of course {key}. Next: someone else checks it with")
    show(f"  featherlog course check {key} --by NAME")
    for warning in plan.warnings:
        show(wrapped(f"WARNING {warning}."))


@course_app.command()
def check(
    course: CourseKey,
    by: By,
    passphrase_file: ByFile = None,
    second: Second = None,
    second_file: SecondFile = None,
    database: Database = None,
) -> None:
    """Sign the independent check; the author may not.

    \b
    Example: featherlog course check FH-2041 --by "Linden Wren"
    """
    from featherlog.actions.designs import check as action
    from featherlog.cli.passphrases import signers

    people = signers(by, passphrase_file, second, second_file)
    revision = action(database, course, **people)
    show(f"Checked revision {revision.number} of course {course}. Next: approve or return it.")


@course_app.command()
def approve(
    course: CourseKey,
    by: By,
    passphrase_file: ByFile = None,
    second: Second = None,
    second_file: SecondFile = None,
    database: Database = None,
) -> None:
    """Approve a checked design for treatment; its content is then fixed.

    \b
    Example: featherlog course approve FH-2041 --by "Aspen Crane" --with "Linden Wren"
    """
    from featherlog.actions.designs import approve as action
    from featherlog.cli.passphrases import signers

    people = signers(by, passphrase_file, second, second_file)
    show(f"Approved course {course}, revision {action(database, course, **people)}.")


@course_app.command("return")
def send_back(
    course: CourseKey,
    reason: Annotated[str, typer.Option("--reason", metavar="TEXT", help="Why it goes back.")],
    by: By,
    passphrase_file: ByFile = None,
    second: Second = None,
    second_file: SecondFile = None,
    database: Database = None,
) -> None:
    """Return a design to its author with a reason.

    \b
    Example: featherlog course return FH-2041 --reason "gap too wide" --by "Linden Wren"
    """
    from featherlog.actions.designs import send_back as action
    from featherlog.cli.passphrases import signers

    people = signers(by, passphrase_file, second, second_file)
    revision = action(database, course, reason=reason, **people)
    show(f"Returned revision {revision.number} of course {course} to {revision.prepared_by}.")


@course_app.command("show")
def show_course(
    course: CourseKey, depth: Depths = None, json: Json = False, database: Database = None
) -> None:
    """Show the latest revision: settings, shares, warnings, dose.

    \b
    Example: featherlog course show FH-2041
    """
    from featherlog.actions.solution import stored_solution
    from featherlog.cli.show_design import solution_text

    view = stored_solution(database, course, depths_cm=tuple(depth or ()))
    show_json(view) if json else show(solution_text(view))


@course_app.command()
def dossier(
    course: CourseKey,
    output: Output = None,
    page_size: PaperSize = "A4",
    database: Database = None,
) -> None:
    """Write the approval dossier of the latest revision as PDF.

    \b
    Example: featherlog course dossier FH-2043 --output dossier.pdf
    """
    from featherlog.actions.files import write_private
    from featherlog.actions.papers import dossier_pages

    view, pdf = dossier_pages(database, course, page_size=page_size)
    file = output or Path(f"{course}-dossier.pdf")
    write_private(file, pdf)
    show(f"{file}: content {view.content_hash[:16]}")


@course_app.command("list")
def list_courses(json: Json = False, database: Database = None) -> None:
    """List every course with its state.

    \b
    Example: featherlog course list
    """
    from featherlog.actions.courses import list_courses as action

    rows = action(database)
    if json:
        show_json(rows)
        return
    show(
        table(
            ("course", "patient", "machine", "state", "fractions", "open departures"),
            [
                (
                    row.course,
                    row.patient_name,
                    row.machine,
                    row.state,
                    f"{row.fractions_complete} of {row.fractions}",
                    str(row.open_departures),
                )
                for row in rows
            ],
        )
        if rows
        else "No courses yet."
    )


def register(app: typer.Typer) -> None:
    """Put these commands on the program."""
    app.command()(solve)
    app.command()(template)
    app.add_typer(course_app, name="course")
