"""The junctions and positions of a design file."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

from featherlog.exchange.kinds import choice, interval, letters, number, point, several, text
from featherlog.exchange.quantities import COORDINATE_CM, COURSE_DOSE_GY, DEPTH_CM
from featherlog.junction.design import (
    Angles,
    CriticalStructure,
    Junction,
    Position,
    Side,
    Technique,
)

if TYPE_CHECKING:
    from featherlog.exchange.toml_fields import Table
    from featherlog.junction.design import Field

_MATCH_DEPTH_CM = replace(DEPTH_CM, allowed=f"{DEPTH_CM.allowed} (or skin_gap_cm in its place)")
_OFFSET_CM = number("cm", -20, 20)
_ONE_OFFSET_CM = replace(_OFFSET_CM, allowed=f"{_OFFSET_CM.allowed} (or a table by junction name)")
_TURNED_FIELD = replace(text(), allowed="the name of one of the junction's two fields, in quotes")
_SEPARATION_CM = number("cm", -5, 5)
_METERSET_MU = number("MU", 0, 10_000, low_open=True)


def read_junction(table: Table, course_dose_gy: float) -> Junction:
    """Read one ``[[junction]]``; its reference dose is the course's where none is given."""
    technique = table.take("technique", choice(Technique))
    match_depth_cm, skin_gap_cm = _depth_or_gap(table, technique)
    separated = table.has("separation_cm")
    bears = table.allows("borne_by", when=separated, only_with="a separation_cm")
    turned_field, matched_beam, angles = _turn(table, technique)
    return Junction(
        name=table.take("name", text()),
        technique=technique,
        entrance=table.take("entrance", choice(Side)),
        skin_point_cm=table.take("skin_point_cm", point(COORDINATE_CM)),
        match_depth_cm=match_depth_cm,
        skin_gap_cm=skin_gap_cm,
        thickness_cm=table.take_or("thickness_cm", number("cm", 0, 60, low_open=True), None),
        lateral_limits_cm=table.take("lateral_limits_cm", interval(COORDINATE_CM)),
        critical=_critical(table),
        report_depths_cm=table.take_or("report_depths_cm", several(DEPTH_CM), ()),
        reference_dose_gy=table.take_or("reference_dose_gy", COURSE_DOSE_GY, course_dose_gy),
        gap_tolerance_cm=table.take("gap_tolerance_cm", number("cm", 0, 2, low_open=True)),
        skin_slope_deg=table.take_or("skin_slope_deg", number("degrees", -60, 60), None),
        separation_cm=table.take_or("separation_cm", _SEPARATION_CM, 0.0),
        borne_by=table.take_or("borne_by", text(), None) if bears else None,
        turned_field=turned_field,
        matched_beam=matched_beam,
        angles=angles,
    )


def bear_separations(
    junctions: tuple[Junction, ...], fields: tuple[Field, ...]
) -> tuple[Junction, ...]:
    """Let the new field bear a separation beside an earlier course where no field is named."""
    return tuple(
        junction
        if junction.borne_by or not junction.separation_cm
        else replace(junction, borne_by=_new_beside_earlier(fields[place : place + 2]))
        for place, junction in enumerate(junctions)
    )


def _new_beside_earlier(fields: tuple[Field, ...]) -> str | None:
    new = [field.name for field in fields if field.earlier is None]
    return new[0] if len(new) < len(fields) and new else None


def _turn(table: Table, technique: Technique) -> tuple[str | None, str | None, Angles]:
    """Read the field that is turned, the neighbour's beam that it is turned onto, and how."""
    rotated = technique is Technique.ROTATED
    for key in ("turned_field", "matched_beam", "angles"):
        table.allows(key, when=rotated, only_with=f'the technique "{Technique.ROTATED}"')
    if not rotated:
        return None, None, Angles.RECOMPUTED
    return (
        table.take("turned_field", _TURNED_FIELD),
        table.take_or("matched_beam", text(), None),
        table.take_or("angles", choice(Angles), Angles.RECOMPUTED),
    )


def read_position(table: Table, junctions: tuple[str, ...]) -> Position:
    """Read one ``[[position]]``; a plain number is the offset of every junction."""
    if table.holds_table("offset_cm"):
        offset_cm = table.named("offset_cm", _OFFSET_CM)
    else:
        offset_cm = dict.fromkeys(junctions, table.take("offset_cm", _ONE_OFFSET_CM))
    return Position(
        label=table.take("label", letters(8)),
        offset_cm=offset_cm,
        meterset_mu=table.named("meterset_mu", _METERSET_MU),
    )


def _depth_or_gap(table: Table, technique: Technique) -> tuple[float | None, float | None]:
    """Read the one of match depth and skin gap that specifies the match."""
    depth, gap = table.has("match_depth_cm"), table.has("skin_gap_cm")
    if gap and technique is not Technique.SKIN_GAP:
        sentence = f"is given, but a {technique} junction is set by match_depth_cm"
        table.fault("skin_gap_cm", sentence)
    elif gap and depth:
        table.fault("skin_gap_cm", "is given beside match_depth_cm, but only one of them may be")
    elif gap:
        return None, table.take("skin_gap_cm", number("cm", 0, 10))
    kind = _MATCH_DEPTH_CM if technique is Technique.SKIN_GAP else DEPTH_CM
    return table.take("match_depth_cm", kind), None


def _critical(table: Table) -> CriticalStructure | None:
    critical = table.table_or_none("critical")
    if critical is None:
        return None
    return CriticalStructure(
        name=critical.take("name", text()), depth_cm=critical.take("depth_cm", DEPTH_CM)
    )
