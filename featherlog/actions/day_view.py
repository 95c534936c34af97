"""What to set for one fraction, drawn from an approved plan without solving anything again."""

from __future__ import annotations

import base64
import hashlib
from itertools import pairwise
from typing import TYPE_CHECKING

from featherlog import words
from featherlog.junction.display import shown_angle, shown_jaw
from featherlog.junction.points import point_at_depth
from featherlog.views.day import (
    BeamView,
    EdgeView,
    FieldView,
    GapView,
    JawView,
    JunctionView,
    SideView,
    TableMoveView,
)

if TYPE_CHECKING:
    from collections.abc import Mapping

    from featherlog.geometry.planes import EdgePlane
    from featherlog.junction.design import Course, Junction
    from featherlog.junction.machine import DisplayScale, Jaw
    from featherlog.junction.plan import (
        BeamSetting,
        FieldSetting,
        JunctionSetting,
        PositionSettings,
        Triple,
    )


def page_code(revision_code: str, fraction: int | None, state_hash: str) -> str:
    """Return the code printed on a page: it changes with revision, fraction and course state."""
    text = f"{revision_code}|{fraction}|{state_hash}"
    code = base64.b32encode(hashlib.sha256(text.encode()).digest()).decode()
    return f"{code[:4]}-{code[4:8]}"


def field_views(
    now: PositionSettings,
    before: PositionSettings | None,
    delivered: Mapping[str, float],
    due: Mapping[str, float],
    display: DisplayScale | None,
) -> tuple[FieldView, ...]:
    """Return every field's settings, with what changed since the position before.

    ``delivered`` is the part of each beam's meterset already given in this fraction, ``due`` the
    part still to be given now. ``display`` is the console's own scale, if it has one.
    """
    views = []
    for index, field in enumerate(now.treated):
        last = before.treated[index] if before else None
        views.append(
            FieldView(
                field=field.field,
                moved_by=field.moved_by,
                since_last=_table_move(_since(field, last), field),
                from_field_before=None
                if index == 0
                else _table_move(
                    _difference(
                        field.table_from_first_field_cm,
                        now.treated[index - 1].table_from_first_field_cm,
                    ),
                    field,
                ),
                beams=tuple(
                    _beam_view(
                        beam,
                        last.beams[number] if last else None,
                        (delivered.get(beam.beam, 0.0), due.get(beam.beam, 0.0)),
                        display,
                    )
                    for number, beam in enumerate(field.beams)
                ),
            )
        )
    return tuple(views)


def junction_views(
    course: Course, now: PositionSettings, before: PositionSettings | None
) -> tuple[JunctionView, ...]:
    """Return every junction: where it is, how it moved in words, the gaps to expect, its edges."""
    views = []
    for index, (junction, (upper, lower)) in enumerate(
        zip(course.junctions, pairwise(now.fields), strict=True)
    ):
        setting = now.junction(junction.name)
        earlier = before.junction(junction.name).offset_cm if before else setting.offset_cm
        moves = setting.offset_cm - earlier
        previous = before.fields[index : index + 2] if before and abs(moves) > 0 else ()
        views.append(
            JunctionView(
                junction=junction.name,
                technique=junction.technique.value,
                superior_field=upper.field,
                inferior_field=lower.field,
                offset_cm=setting.offset_cm,
                moves_cm=moves,
                words=words.junction_move(junction.name, moves),
                gaps=tuple(
                    GapView(gap.side, gap.expected_cm, junction.gap_tolerance_cm)
                    for gap in setting.skin_gaps
                ),
                side_view=_side_view(junction, setting, (upper, lower), previous),
            )
        )
    return tuple(views)


def _since(field: FieldSetting, last: FieldSetting | None) -> Triple:
    return _difference(field.table_from_a_cm, last.table_from_a_cm) if last else (0.0, 0.0, 0.0)


def _difference(one: Triple, other: Triple) -> Triple:
    x, y, z = (round(a - b, 9) + 0.0 for a, b in zip(one, other, strict=True))
    return (x, y, z)


def _table_move(move_cm: Triple, field: FieldSetting) -> TableMoveView:
    turned = any(beam.couch_deg for beam in field.beams)
    return TableMoveView(*move_cm, words.table_move(move_cm, couch_turned=turned))


def _beam_view(
    beam: BeamSetting,
    last: BeamSetting | None,
    parts: tuple[float, float],
    display: DisplayScale | None,
) -> BeamView:
    delivered, due = parts
    return BeamView(
        beam=beam.beam,
        energy=beam.energy,
        gantry_deg=beam.gantry_deg,
        collimator_deg=beam.collimator_deg,
        couch_deg=beam.couch_deg,
        previous_collimator_deg=last.collimator_deg if last else None,
        previous_couch_deg=last.couch_deg if last else None,
        ssd_cm=beam.ssd_cm,
        planned_mu=beam.meterset_mu,
        delivered_mu=delivered * beam.meterset_mu,
        to_deliver_mu=due * beam.meterset_mu,
        jaws=tuple(_jaw_view(beam, jaw, last) for jaw in beam.jaw_cm),
        console=_console(beam, display) if display else (),
    )


def _console(beam: BeamSetting, display: DisplayScale) -> tuple[tuple[str, float], ...]:
    angles = (
        ("gantry_deg", shown_angle(display.gantry, beam.gantry_deg)),
        ("collimator_deg", shown_angle(display.collimator, beam.collimator_deg)),
        ("couch_deg", shown_angle(display.couch, beam.couch_deg)),
    )
    if not display.jaws_outward:
        return angles
    return (
        *angles,
        *((f"{jaw.value}_cm", shown_jaw(jaw, value)) for jaw, value in beam.jaw_cm.items()),
    )


def _jaw_view(beam: BeamSetting, jaw: Jaw, last: BeamSetting | None) -> JawView:
    ends = {beam.superior_jaw: "superior", beam.inferior_jaw: "inferior"}
    value = beam.jaw_cm[jaw]
    previous = last.jaw_cm[jaw] if last else None
    move = "" if previous is None else words.jaw_move(jaw, value - previous, ends.get(jaw))
    by = beam.edges_by if jaw in ends else "jaws"
    return JawView(jaw.value, ends.get(jaw, "side"), by, value, previous, move)


def _side_view(
    junction: Junction,
    setting: JunctionSetting,
    now: tuple[FieldSetting, FieldSetting],
    previous: tuple[FieldSetting, ...],
) -> SideView:
    critical = junction.critical
    deepest = max(setting.match_depth_cm, critical.depth_cm if critical else 0.0)
    depth = junction.thickness_cm or deepest + 2.0
    upper, lower = (_edges(junction, field, depth) for field in now)
    return SideView(
        entrance=junction.entrance.value,
        depth_cm=depth,
        match_depth_cm=setting.match_depth_cm,
        match_z_cm=setting.match_point_cm[2],
        critical_name=critical.name if critical else "",
        critical_depth_cm=critical.depth_cm if critical else None,
        superior_edges=upper[1],
        inferior_edges=lower[0],
        previous_edges=(
            *(_edges(junction, previous[0], depth)[1] if previous else ()),
            *(_edges(junction, previous[1], depth)[0] if previous else ()),
        ),
    )


def _edges(
    junction: Junction, field: FieldSetting, depth_cm: float
) -> tuple[tuple[EdgeView, ...], tuple[EdgeView, ...]]:
    def view(beam: BeamSetting, plane: EdgePlane) -> EdgeView:
        skin, deep = (point_at_depth(junction, depth, 0.0) for depth in (0.0, depth_cm))
        return EdgeView(field.field, beam.beam, plane.z_at(*skin[:2]), plane.z_at(*deep[:2]))

    return (
        tuple(view(beam, beam.superior_edge) for beam in field.beams),
        tuple(view(beam, beam.inferior_edge) for beam in field.beams),
    )
