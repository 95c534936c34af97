"""The fields of a design file, from superior to inferior, with their outer borders."""

from __future__ import annotations

from typing import TYPE_CHECKING

from featherlog.exchange.design_beams import read_beams
from featherlog.exchange.kinds import choice, flag, interval, point, text, whole
from featherlog.exchange.quantities import (
    COORDINATE_CM,
    COURSE_DOSE_GY,
    FRACTION_DOSE_GY,
    JAW_CM,
)
from featherlog.junction.design import Border, EarlierCourse, End, Field, MovedBy

if TYPE_CHECKING:
    from featherlog.exchange.toml_fields import Table
    from featherlog.geometry.patient import PatientPosition

_BORDER = "{ reach_cm = … } or { point_cm = [x, y, z], held = true or false }"
_NO_BORDER = Border(reach_cm=0.0)


def read_fields(
    tables: tuple[Table, ...], junctions: tuple[str, ...], position: PatientPosition, sad_cm: float
) -> tuple[Field, ...]:
    """Read every ``[[field]]``; field k touches junctions k - 1 and k of those named.

    ``sad_cm`` is that of beams which give none.
    """
    return tuple(
        _field(table, junctions[max(0, place - 1) : place + 1], position, sad_cm)
        for place, table in enumerate(tables)
    )


def read_borders(tables: tuple[Table, ...]) -> tuple[Border, Border]:
    """Read the superior border of the first field and the inferior border of the last."""
    for end, fields in ((End.SUPERIOR, tables[1:]), (End.INFERIOR, tables[:-1])):
        for table in fields:
            _refuse_border(table, end)
    if not tables:
        return _NO_BORDER, _NO_BORDER
    return _border(tables[0], End.SUPERIOR), _border(tables[-1], End.INFERIOR)


def _refuse_border(table: Table, end: End) -> None:
    key = f"{end}_border"
    if table.has(key):
        place = "first" if end is End.SUPERIOR else "last"
        table.fault(key, f"is given, but only the {place} field has one, as a junction ends this")


def _border(table: Table, end: End) -> Border:
    border = table.table(f"{end}_border", _BORDER)
    if border.has("reach_cm"):
        return Border(reach_cm=border.take("reach_cm", JAW_CM))
    return Border(
        point_cm=border.take("point_cm", point(COORDINATE_CM)),
        held=border.take("held", flag()),
        cover_x_cm=border.take_or("cover_x_cm", interval(COORDINATE_CM), None),
    )


def _field(
    table: Table, touched: tuple[str, ...], position: PatientPosition, sad_cm: float
) -> Field:
    moved_by = table.take("moved_by", choice(MovedBy))
    follows = table.take_or("follows", text(), None)
    if follows is None and moved_by is MovedBy.COUCH and len(touched) == 1:
        follows = touched[0]
    isocentre_cm = table.take_or("isocentre_cm", point(COORDINATE_CM), None)
    return Field(
        name=table.take("name", text()),
        beams=read_beams(table.tables("beam"), isocentre_cm, position, sad_cm),
        moved_by=moved_by,
        follows=follows,
        dose_per_fraction_gy=table.take_or("dose_per_fraction_gy", FRACTION_DOSE_GY, None),
        earlier=_earlier(table.table_or_none("earlier_course")),
    )


def _earlier(table: Table | None) -> EarlierCourse | None:
    if table is None:
        return None
    return EarlierCourse(
        label=table.take("label", text()),
        dose_gy=table.take("dose_gy", COURSE_DOSE_GY),
        fractions=table.take("fractions", whole(1, 100)),
        junction_reach_cm=table.take("junction_reach_cm", JAW_CM),
    )
