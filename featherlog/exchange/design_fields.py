"""The fields of a design file, from superior to inferior, with their beams and outer borders."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

from featherlog.exchange.kinds import choice, flag, interval, number, point, text
from featherlog.geometry.frames import patient_from_beam
from featherlog.junction.design import Beam, Border, End, Field, MovedBy

if TYPE_CHECKING:
    from featherlog.exchange.toml_fields import Table
    from featherlog.geometry.frames import PatientPosition, Point

_COORDINATE_CM = number("cm", -200, 200)
_GANTRY_DEG = number("degrees", 0, 360, high_open=True)
_SIGNED_DEG = number("degrees", -180, 360, high_open=True)
_SSD_CM = number("cm", 50, 300)
_JAW_CM = number("cm", -30, 30)
_WEIGHT = number("", 0, 1, low_open=True)
_ENTRY_CM = replace(
    point(_COORDINATE_CM),
    allowed=f"{point(_COORDINATE_CM).allowed} (or isocentre_cm given for the whole field)",
)
_BORDER = "{ reach_cm = … } or { point_cm = [x, y, z], held = true or false }"
_HALF_TURN_DEG = 180.0
_DIGITS = 9  # of a computed isocentre: far below any distance that can be set
_NO_BORDER = Border(reach_cm=0.0)


def read_fields(
    tables: tuple[Table, ...], junctions: tuple[str, ...], position: PatientPosition, sad_cm: float
) -> tuple[Field, ...]:
    """Read every ``[[field]]``; field k touches junctions k - 1 and k of those named."""
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
        return Border(reach_cm=border.take("reach_cm", _JAW_CM))
    return Border(border.take("point_cm", point(_COORDINATE_CM)), border.take("held", flag()))


def _field(
    table: Table, touched: tuple[str, ...], position: PatientPosition, sad_cm: float
) -> Field:
    moved_by = table.take("moved_by", choice(MovedBy))
    follows = table.take_or("follows", text(), None)
    if follows is None and moved_by is MovedBy.COUCH and len(touched) == 1:
        follows = touched[0]
    isocentre_cm = table.take_or("isocentre_cm", point(_COORDINATE_CM), None)
    beams = table.tables("beam")
    return Field(
        name=table.take("name", text()),
        beams=tuple(
            _beam(beam, weight, isocentre_cm, position, sad_cm)
            for beam, weight in zip(beams, _weights(beams), strict=True)
        ),
        moved_by=moved_by,
        follows=follows,
    )


def _weights(beams: tuple[Table, ...]) -> tuple[float, ...]:
    """Read the weights of a field's beams: given for all of them, or equal when for none."""
    if any(beam.has("weight") for beam in beams):
        return tuple(beam.take("weight", _WEIGHT) for beam in beams)
    for beam in beams:
        beam.take_or("weight", _WEIGHT, None)
    return (1 / len(beams),) * len(beams) if beams else ()


def _beam(
    table: Table, weight: float, shared_cm: Point | None, position: PatientPosition, sad_cm: float
) -> Beam:
    gantry_deg = table.take("gantry_deg", _GANTRY_DEG)
    collimator_deg = _signed(table.take("collimator_deg", _SIGNED_DEG))
    couch_deg = _signed(table.take("couch_deg", _SIGNED_DEG))
    ssd_cm = table.take("ssd_cm", _SSD_CM)
    if shared_cm is None:
        toward_source = patient_from_beam(position, gantry_deg, collimator_deg, couch_deg)[:, 2]
        entry_cm = table.take("entry_cm", _ENTRY_CM)
        isocentre_cm = _along(entry_cm, toward_source.tolist(), ssd_cm - sad_cm)
    else:
        _refuse_entry(table)
        isocentre_cm = shared_cm
    return Beam(
        name=table.take("name", text()),
        energy=table.take("energy", text(20)),
        gantry_deg=gantry_deg,
        collimator_deg=collimator_deg,
        couch_deg=couch_deg,
        isocentre_cm=isocentre_cm,
        ssd_cm=ssd_cm,
        side_jaws_cm=table.take("side_jaws_cm", interval(_JAW_CM)),
        weight=weight,
    )


def _refuse_entry(table: Table) -> None:
    if table.has("entry_cm"):
        table.fault("entry_cm", "is given, but the field has an isocentre_cm that fixes the beam")
    else:
        table.take_or("entry_cm", _ENTRY_CM, None)


def _along(start_cm: Point, direction: list[float], distance_cm: float) -> Point:
    """Return the point a distance from another in a direction, without noise or minus zero."""
    x, y, z = (
        round(start + distance_cm * part, _DIGITS) + 0.0
        for start, part in zip(start_cm, direction, strict=True)
    )
    return x, y, z


def _signed(angle_deg: float) -> float:
    """Return the same angle in (-180, 180]."""
    if angle_deg > _HALF_TURN_DEG:
        return angle_deg - 2 * _HALF_TURN_DEG
    return angle_deg if angle_deg > -_HALF_TURN_DEG else _HALF_TURN_DEG
