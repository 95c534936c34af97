"""How a console shows angles and jaws: the ``[display]`` of a machine file."""

from __future__ import annotations

from enum import StrEnum
from typing import TYPE_CHECKING

from featherlog.exchange.kinds import choice, flag, number
from featherlog.junction.machine import AngleForm, AngleScale, DisplayScale

if TYPE_CHECKING:
    from featherlog.exchange.toml_fields import Table

_ZERO_DEG = number("degrees", -180, 360, high_open=True)
_SCALE = '{ zero_deg = …, sense = "same" or "opposite", form = "0 to 360" or "-180 to 180" }'


class _Sense(StrEnum):
    """The way a shown angle rises, beside that of IEC 61217."""

    SAME = "same"
    OPPOSITE = "opposite"


def read_display(table: Table | None) -> DisplayScale | None:
    """Read a console's own scale; None where it shows IEC 61217."""
    if table is None:
        return None
    return DisplayScale(
        gantry=_scale(table.table("gantry", _SCALE)),
        collimator=_scale(table.table("collimator", _SCALE)),
        couch=_scale(table.table("couch", _SCALE)),
        jaws_outward=table.take("jaws_outward", flag()),
    )


def _scale(table: Table) -> AngleScale:
    return AngleScale(
        zero_deg=table.take("zero_deg", _ZERO_DEG),
        sense=1 if table.take("sense", choice(_Sense)) is _Sense.SAME else -1,
        form=table.take("form", choice(AngleForm)),
    )
