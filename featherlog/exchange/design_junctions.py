"""The junctions and positions of a design file."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

from featherlog.exchange.kinds import choice, interval, letters, number, point, several, text
from featherlog.junction.design import CriticalStructure, Junction, Position, Side, Technique

if TYPE_CHECKING:
    from featherlog.exchange.toml_fields import Table

_DEPTH_CM = number("cm", 0, 60)
_MATCH_DEPTH_CM = replace(_DEPTH_CM, allowed=f"{_DEPTH_CM.allowed} (or skin_gap_cm in its place)")
_OFFSET_CM = number("cm", -20, 20)
_ONE_OFFSET_CM = replace(_OFFSET_CM, allowed=f"{_OFFSET_CM.allowed} (or a table by junction name)")
_COORDINATE_CM = number("cm", -200, 200)
_METERSET_MU = number("MU", 0, 10_000, low_open=True)


def read_junction(table: Table, course_dose_gy: float) -> Junction:
    """Read one ``[[junction]]``; its reference dose is the course's where none is given."""
    technique = table.take("technique", choice(Technique))
    match_depth_cm, skin_gap_cm = _depth_or_gap(table, technique)
    return Junction(
        name=table.take("name", text()),
        technique=technique,
        entrance=table.take("entrance", choice(Side)),
        skin_point_cm=table.take("skin_point_cm", point(_COORDINATE_CM)),
        match_depth_cm=match_depth_cm,
        skin_gap_cm=skin_gap_cm,
        thickness_cm=table.take_or("thickness_cm", number("cm", 0, 60, low_open=True), None),
        lateral_limits_cm=table.take("lateral_limits_cm", interval(_COORDINATE_CM)),
        critical=_critical(table),
        report_depths_cm=table.take_or("report_depths_cm", several(_DEPTH_CM), ()),
        reference_dose_gy=table.take_or(
            "reference_dose_gy", number("Gy", 0, 200, low_open=True), course_dose_gy
        ),
        gap_tolerance_cm=table.take("gap_tolerance_cm", number("cm", 0, 2, low_open=True)),
        skin_slope_deg=table.take_or("skin_slope_deg", number("degrees", -60, 60), None),
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
    if gap and technique is Technique.HALF_BEAM:
        table.fault("skin_gap_cm", "is given, but a half-beam junction is set by match_depth_cm")
    elif gap and depth:
        table.fault("skin_gap_cm", "is given beside match_depth_cm, but only one of them may be")
    elif gap:
        return None, table.take("skin_gap_cm", number("cm", 0, 10))
    return table.take("match_depth_cm", _MATCH_DEPTH_CM), None


def _critical(table: Table) -> CriticalStructure | None:
    critical = table.table_or_none("critical")
    if critical is None:
        return None
    return CriticalStructure(
        name=critical.take("name", text()), depth_cm=critical.take("depth_cm", _DEPTH_CM)
    )
