"""What people observe around the treatment: table read-outs, notes, and the list of all events."""

from __future__ import annotations

from typing import TYPE_CHECKING, Annotated

import typer

from featherlog.cli.options import (
    By,
    ByFile,
    CourseKey,
    Database,
    Json,
    Reason,
    Second,
    SecondFile,
    VerifiedBy,
)
from featherlog.cli.output import remark, show, show_json, wrapped

if TYPE_CHECKING:
    from featherlog.actions.events import EventLine

table_app = typer.Typer(
    help="Read the table's figures, from which all its targets follow.",
    no_args_is_help=True,
    rich_markup_mode=None,
    # The mark keeps the example on one line, to be copied.
    epilog='\b\nExample: featherlog table read FH-2041 "upper thigh" --lateral 0.3 '
    '--longitudinal 101.2 --vertical -12 --by "Ash Plover" --with "Maple Teal"',
)
note_app = typer.Typer(
    help="Note what happens around the treatment and is no departure.",
    no_args_is_help=True,
    rich_markup_mode=None,
    epilog='\b\nExample: featherlog note imager-out FH-2041 --reason "tube fault" '
    '--by "Ash Plover"',
)

Field = Annotated[str, typer.Option("--field", metavar="NAME", help="The field.")]
Fraction = Annotated[int, typer.Option("--fraction", metavar="N", help="The fraction.")]
Lateral = Annotated[
    float, typer.Option("--lateral", metavar="CM", help="IEC 61217: + to the right, facing it.")
]
Longitudinal = Annotated[
    float, typer.Option("--longitudinal", metavar="CM", help="IEC 61217: + toward the gantry.")
]
Vertical = Annotated[float, typer.Option("--vertical", metavar="CM", help="IEC 61217: + up.")]


@table_app.command("read")
def table_read(
    course: CourseKey,
    field: Annotated[str, typer.Argument(metavar="FIELD", help="The field that is set up.")],
    lateral: Lateral,
    longitudinal: Longitudinal,
    vertical: Vertical,
    by: By,
    verified_by: VerifiedBy,
    fraction: Annotated[
        int | None,
        typer.Option(
            "--fraction",
            metavar="N",
            help="The fraction it was read in, when not the one just confirmed.",
        ),
    ] = None,
    passphrase_file: ByFile = None,
    second_file: SecondFile = None,
    json: Json = False,
    database: Database = None,
) -> None:
    """Keep the table's read-out with a field set up; targets of all fields follow from it.

    \b
    Example: featherlog table read FH-2041 "upper thigh" --lateral 0.3 --longitudinal 101.2 --vertical -12 --by "Ash Plover" --with "Maple Teal"
    """  # noqa: E501 - an example is one line, to be copied
    from featherlog.actions.observations import read_table
    from featherlog.cli.passphrases import second, signer

    reading = read_table(
        database,
        course,
        field,
        table_cm=(lateral, longitudinal, vertical),
        fraction=fraction,
        by=signer(by, passphrase_file),
        verified_by=second(verified_by, second_file),
    )
    if json:
        show_json(reading)
        return
    show(
        f"Table read for {field} at {reading.position} in fraction {reading.fraction}; "
        f"`featherlog today {course}` shows the targets."
    )


@note_app.command("image-shift")
def image_shift(
    course: CourseKey,
    fraction: Fraction,
    field: Field,
    lateral: Lateral,
    longitudinal: Longitudinal,
    vertical: Vertical,
    by: By,
    passphrase_file: ByFile = None,
    second: Second = None,
    second_file: SecondFile = None,
    database: Database = None,
) -> None:
    """Note the shift that imaging asked for before a field; it makes no departure.

    \b
    Example: featherlog note image-shift FH-2041 --fraction 6 --field "upper thigh" --lateral 0.2 --longitudinal -0.1 --vertical 0 --by "Ash Plover"
    """  # noqa: E501 - an example is one line, to be copied
    from featherlog.actions.observations import note_image_shift
    from featherlog.cli.passphrases import signers

    apart = note_image_shift(
        database,
        course,
        fraction=fraction,
        field=field,
        shift_cm=(lateral, longitudinal, vertical),
        **signers(by, passphrase_file, second, second_file),
    )
    show(f"Image shift of {field} in fraction {fraction} noted.")
    for sentence in apart:
        remark(wrapped(f"LOOK: {sentence}."))


@note_app.command("marks-redrawn")
def marks_redrawn(
    course: CourseKey,
    position: Annotated[
        str, typer.Option("--position", metavar="LABEL", help="Whose line was redrawn.")
    ],
    reason: Reason,
    by: By,
    passphrase_file: ByFile = None,
    second: Second = None,
    second_file: SecondFile = None,
    database: Database = None,
) -> None:
    """Note that skin or mask lines were redrawn; the table is then to be read again.

    \b
    Example: featherlog note marks-redrawn FH-2041 --position B --reason "washed off" --by "Ash Plover"
    """  # noqa: E501 - an example is one line, to be copied
    from featherlog.actions.observations import note_marks_redrawn
    from featherlog.cli.passphrases import signers

    people = signers(by, passphrase_file, second, second_file)
    note_marks_redrawn(database, course, position=position, reason=reason, **people)
    show(f"Marks of position {position} noted as redrawn. Read the table again.")


@note_app.command("imager-out")
def imager_out(
    course: CourseKey,
    reason: Reason,
    by: By,
    passphrase_file: ByFile = None,
    second: Second = None,
    second_file: SecondFile = None,
    database: Database = None,
) -> None:
    """Note that this course goes without its imager; until it is back the risk is raised.

    \b
    Example: featherlog note imager-out FH-2041 --reason "tube fault" --by "Ash Plover"
    """
    from featherlog.actions.observations import note_imager
    from featherlog.cli.passphrases import signers

    people = signers(by, passphrase_file, second, second_file)
    note_imager(database, course, works=False, reason=reason, **people)
    show(f"{course}: imager out; the day's page shows raised risk.")


@note_app.command("imager-back")
def imager_back(
    course: CourseKey,
    reason: Reason,
    by: By,
    passphrase_file: ByFile = None,
    second: Second = None,
    second_file: SecondFile = None,
    database: Database = None,
) -> None:
    """Note that the imager works again.

    \b
    Example: featherlog note imager-back FH-2041 --reason "repaired, tested" --by "Ash Plover"
    """
    from featherlog.actions.observations import note_imager
    from featherlog.cli.passphrases import signers

    people = signers(by, passphrase_file, second, second_file)
    note_imager(database, course, works=True, reason=reason, **people)
    show(f"{course}: imager back.")


@note_app.command("physics-present")
def physics_present(
    course: CourseKey,
    fraction: Fraction,
    by: By,
    passphrase_file: ByFile = None,
    database: Database = None,
) -> None:
    """Attest, as a physicist, to be present for a fraction today.

    \b
    Example: featherlog note physics-present FH-2041 --fraction 6 --by "Rowan Finch"
    """
    from featherlog.actions.observations import attest_presence
    from featherlog.cli.passphrases import signer

    attest_presence(database, course, fraction=fraction, by=signer(by, passphrase_file))
    show(f"{course}: physics presence for fraction {fraction} noted for today.")


def events(course: CourseKey, json: Json = False, database: Database = None) -> None:
    """List what else happened in a course, apart from confirming and recording.

    \b
    Example: featherlog events FH-2041
    """
    from featherlog.actions.events import list_events

    lines = list_events(database, course)
    show_json(lines) if json else show("\n".join(map(_event, lines)) or "No events.")


def _event(line: EventLine) -> str:
    signed = f"signed by {' and '.join(line.signed_by)}"
    return wrapped(f"{line.entry}. {line.at} {line.kind}: {line.words}; {signed}")


def register(app: typer.Typer) -> None:
    """Put these commands on the program."""
    app.add_typer(table_app, name="table")
    app.add_typer(note_app, name="note")
    app.command()(events)
