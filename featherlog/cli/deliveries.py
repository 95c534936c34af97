"""Options that say what was delivered, for a record and for its correction."""

from __future__ import annotations

from typing import TYPE_CHECKING, Annotated

import typer

from featherlog.cli.options import named_numbers, named_texts

if TYPE_CHECKING:
    from featherlog.actions.delivered import Delivery

Fraction = Annotated[
    int | None, typer.Option("--fraction", metavar="N", help="The fraction, when not the one due.")
]
Position = Annotated[
    str | None,
    typer.Option("--position", metavar="LABEL", help="Where, when not as confirmed."),
]
FieldPosition = Annotated[
    list[str] | None,
    typer.Option("--field-position", metavar="FIELD=LABEL", help="One field's own position."),
]
Meterset = Annotated[
    list[str] | None,
    typer.Option("--meterset", metavar="BEAM=MU", help="MU delivered, when not all of it."),
]
Again = Annotated[
    bool, typer.Option("--again", help="The fraction was complete and was delivered once more.")
]
TreatedAt = Annotated[
    str | None,
    typer.Option(
        "--treated-at",
        metavar="TIME",
        help="When it was treated (2026-03-05T09:10), for a record made later.",
    ),
]
Table = Annotated[
    list[str] | None,
    typer.Option("--table", metavar="FIELD=CM", help="A field's longitudinal table reading in cm."),
]


def delivery(
    *,
    fraction: int | None,
    position: str | None,
    field_position: list[str] | None,
    meterset: list[str] | None,
    gap: list[str] | None,
    table: list[str] | None,
    treated_at: str | None,
    again: bool,
    reason: str | None,
) -> Delivery:
    """Return what was typed as one delivery; InputError names an option that cannot be read."""
    from featherlog.actions.delivered import Delivery

    return Delivery(
        fraction=fraction,
        position=position,
        field_positions=named_texts(field_position, "--field-position"),
        metersets_mu=named_numbers(meterset, "--meterset", "MU"),
        gaps_cm=named_numbers(gap, "--gap", "cm"),
        reason=reason or "",
        again=again,
        treated_at=treated_at,
        table_cm=named_numbers(table, "--table", "cm"),
    )
