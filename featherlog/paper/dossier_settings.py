"""What is set at one position: as set, with the exact value before rounding beneath it."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from reportlab.platypus import KeepTogether

from featherlog.junction.phrases import angles_beside_set
from featherlog.paper import style
from featherlog.paper.dossier_junctions import junction_setting
from featherlog.paper.fonts import join, safe, strong
from featherlog.paper.layout import section, space
from featherlog.paper.style import grouped, para
from featherlog.words import figure, meterset, table_move

if TYPE_CHECKING:
    from collections.abc import Iterator

    from reportlab.platypus import Flowable, Table

    from featherlog.junction.design import Course
    from featherlog.junction.machine import Jaw
    from featherlog.junction.plan import (
        BeamSetting,
        BorderSetting,
        FieldSetting,
        PositionSettings,
    )

_HEADS = ("Beam", "Gantry°", "Coll.°", "Couch°", "SSD cm", "MU", "X1 cm", "X2 cm", "Y1 cm", "Y2 cm")
_PARTS = (92, 42, 52, 52, 40, 38, 58, 58, 58, 58)
_EXACT_DECIMALS = 4
_LEAVES = "leaf edges belong to the plan: not set by hand"


def position_block(course: Course, position: PositionSettings, width: float) -> list[Flowable]:
    """Return the settings of one position, its borders and what is left at each junction."""
    key = (
        "Bold: as set. Below: exact, before rounding. IEC 61217. Mismatch: of the worst pair of "
        "beams, then the worst of the other sign."
    )
    body = [
        *section(f"POSITION {position.label}"),
        para(safe(key), style.SMALL),
        _settings(position, width),
        space(3),
        *(para(safe(line)) for line in _beside_set(position)),
        *(para(safe(_border(border))) for border in position.borders),
    ]
    for junction in course.junctions:
        setting = position.junction(junction.name)
        body += [space(4), junction_setting(setting, junction.gap_tolerance_cm, width)]
    return [KeepTogether(body)]


def _settings(position: PositionSettings, width: float) -> Table:
    groups = [
        (_field_lines(field), [] if field.earlier_course else [_beam(b) for b in field.beams])
        for field in position.fields
    ]
    return grouped(_HEADS, groups, width, _PARTS, numbers=range(1, len(_HEADS)))


def _field_lines(field: FieldSetting) -> list[Flowable]:
    if field.earlier_course:
        dose = figure(field.earlier_dose_gy)
        words = f"of the earlier course {field.earlier_course}, {dose} Gy: never set"
        return [para(join("  ·  ", [strong(field.field), safe(words)]))]
    facts = [strong(field.field), safe(f"moved by {field.moved_by}")]
    if field.dose_per_fraction_gy is not None:
        facts.append(safe(f"{figure(field.dose_per_fraction_gy, most=3)} Gy a fraction"))
    moves = table_move(field.table_from_a_cm)
    if not moves:
        facts.append(safe("TABLE as at position A"))
    lines = [para(join("  ·  ", facts))]
    return [*lines, *(para(safe(f"from position A: {move}")) for move in moves)]


def _beam(beam: BeamSetting) -> list[Any]:
    name = [para(strong(beam.beam)), para(safe(beam.energy), style.SMALL)]
    if _by_leaves(beam):
        name.append(para(safe(_LEAVES), style.SMALL))
    return [
        name,
        para(safe(figure(beam.gantry_deg)), style.VALUE),
        _pair(beam.collimator_deg, beam.exact_collimator_deg),
        _pair(beam.couch_deg, beam.exact_couch_deg),
        para(safe(figure(beam.ssd_cm)), style.VALUE),
        para(strong(meterset(beam.meterset_mu)), style.VALUE),
        *(_jaw(beam, jaw) for jaw in beam.jaw_cm),
    ]


def _jaw(beam: BeamSetting, jaw: Jaw) -> list[Flowable]:
    lines = _pair(beam.jaw_cm[jaw], beam.exact_jaw_cm[jaw])
    end = {beam.superior_jaw: "superior", beam.inferior_jaw: "inferior"}.get(jaw)
    if end is None:
        return lines
    by = ", leaves" if _by_leaves(beam) else ""
    return [*lines, para(safe(f"{end}{by}"), style.SMALL_RIGHT)]


def _by_leaves(beam: BeamSetting) -> bool:
    return beam.edges_by == "leaves"


def _pair(as_set: float, exact: float) -> list[Flowable]:
    return [
        para(strong(figure(as_set)), style.VALUE),
        para(safe(figure(exact, _EXACT_DECIMALS, _EXACT_DECIMALS)), style.SMALL_RIGHT),
    ]


def _beside_set(position: PositionSettings) -> Iterator[str]:
    for beam in (beam for field in position.treated for beam in field.beams):
        if beside := angles_beside_set(beam):
            yield f"{beam.beam}, {beside}."


def _border(border: BorderSetting) -> str:
    places = ", ".join(
        f"z {figure(z)} cm at x {figure(x)} cm"
        for x, z in zip(border.x_cm, border.z_cm, strict=True)
    )
    left = f"; {figure(border.short_cm)} cm stay uncovered" if border.short_cm > 0 else ""
    return f"{border.end.capitalize()} border: {places}{left}."
