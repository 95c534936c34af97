"""What to set for one fraction, drawn from an approved plan without solving anything again."""

from __future__ import annotations

import base64
import hashlib
from dataclasses import dataclass
from itertools import pairwise
from typing import TYPE_CHECKING

from featherlog import words
from featherlog.actions.table_reference import place_cm
from featherlog.junction.display import shown_angle, shown_jaw
from featherlog.junction.edges import edge_move_cm
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
    TableTargetView,
)

if TYPE_CHECKING:
    from collections.abc import Iterable, Mapping

    from featherlog.geometry.planes import EdgePlane
    from featherlog.junction.design import Course, Junction
    from featherlog.junction.machine import DisplayScale, Jaw
    from featherlog.junction.plan import (
        BeamSetting,
        FieldSetting,
        JunctionSetting,
        Plan,
        PositionSettings,
        Triple,
    )
    from featherlog.sequence.progress import Progress


def page_code(revision_code: str, fraction: int | None, state_hash: str) -> str:
    """Return the code printed on a page: it changes with revision, fraction and course state."""
    text = f"{revision_code}|{fraction}|{state_hash}"
    code = base64.b32encode(hashlib.sha256(text.encode()).digest()).decode()
    return f"{code[:4]}-{code[4:8]}"


@dataclass(frozen=True, slots=True)
class Standing:
    """Where each field stands before a step: the position at which it was treated last.

    ``positions`` is empty at the first fraction; ``begun`` are the fields already treated in this
    step, which stand at it.
    """

    positions: Mapping[str, PositionSettings]
    begun: frozenset[str]

    def of(self, field: str) -> FieldSetting | None:
        """Return a field's settings where it stands; None at the first fraction."""
        position = self.positions.get(field)
        return next((f for f in position.fields if f.field == field), None) if position else None


def standing(plan: Plan, labels: Mapping[str, str], begun: Iterable[str]) -> Standing:
    """Return where the fields stand, given each one's last position by its label."""
    positions = {field: plan.position(label) for field, label in labels.items()}
    return Standing(positions, frozenset(begun))


NOWHERE = Standing({}, frozenset())
"""Before the first fraction."""


def field_views(
    now: PositionSettings,
    before: Standing,
    due: Progress,
    parts: Mapping[str, float],
    display: DisplayScale | None,
    *,
    targets_cm: Mapping[str, Triple],
) -> tuple[FieldView, ...]:
    """Return every field's settings, with what changed since each field was treated last.

    ``parts`` is the part of each beam's meterset already given in this fraction. ``display`` is the
    console's own scale, if it has one. ``targets_cm`` is where the table must stand for each field,
    empty while that is not known.
    """
    return tuple(
        _field_view(now, index, before, _Given(due, parts, display, targets_cm))
        for index in range(len(now.treated))
    )


@dataclass(frozen=True, slots=True)
class _Given:
    """What the beams of a step have had and are due, and what their console and table show."""

    due: Progress
    parts: Mapping[str, float]
    display: DisplayScale | None
    targets_cm: Mapping[str, Triple]


def _field_view(now: PositionSettings, index: int, before: Standing, given: _Given) -> FieldView:
    field = now.treated[index]
    since = _table_move(_since(now, field, before), field)
    between, earlier = _between(now, index), _between_before(now, index, before)
    # One that went on elsewhere has to come back to where the fraction began.
    begun = field.field in before.begun and _label(before, field.field) == now.label
    last = "the last fraction" if given.due.step == 1 else "the last step"
    if between is None:
        orders = tuple(f"{move} since {last}" for move in since.words)
        still = bool(before.positions) and not orders
        notes: tuple[str, ...] = (f"TABLE: no move since {last}",) if still else ()
    else:
        orders = tuple(
            f"{move} from {now.treated[index - 1].field}"
            for move in _orders(between, earlier, field)
        )
        notes = tuple(f"part of that, since {last}: {move}" for move in since.words)
        if not orders:
            notes = (f"TABLE: stays as for {now.treated[index - 1].field}",)
    if begun:
        notes = ("treated already in this fraction: nothing of it moves",)
    return FieldView(
        field=field.field,
        moved_by=field.moved_by,
        previous_position=_label(before, field.field),
        begun=begun,
        since_last=since,
        from_field_before=between,
        before_from_field_before=earlier,
        orders=orders,
        notes=notes,
        beams=tuple(_beam_view(beam, before.of(field.field), given) for beam in field.beams),
        target=_target(given.targets_cm.get(field.field)),
    )


def _target(target_cm: Triple | None) -> TableTargetView | None:
    return TableTargetView(*target_cm, words.table_target(target_cm)) if target_cm else None


def _orders(
    between: TableMoveView, earlier: TableMoveView | None, field: FieldSetting
) -> tuple[str, ...]:
    return words.table_move(
        _vector(between),
        couch_turned=_turned(field),
        was_cm=_vector(earlier) if earlier else None,
    )


def _vector(move: TableMoveView) -> Triple:
    return (move.lateral_cm, move.longitudinal_cm, move.vertical_cm)


def junction_views(
    course: Course, now: PositionSettings, before: Standing
) -> tuple[JunctionView, ...]:
    """Return every junction: where it is, how it moved in words, the gaps to expect, its edges."""
    views = []
    for junction, (upper, lower) in zip(course.junctions, pairwise(now.fields), strict=True):
        setting = now.junction(junction.name)
        moves = [_edge_move(now, field, before, junction.name) for field in (upper, lower)]
        # A field of an earlier course never moves: its neighbour says what the junction does.
        known = [move for move in moves if move is not None] or [0.0]
        previous = tuple(before.of(field.field) or field for field in (upper, lower))
        views.append(
            JunctionView(
                junction=junction.name,
                technique=junction.technique.value,
                superior_field=upper.field,
                inferior_field=lower.field,
                offset_cm=setting.offset_cm,
                moves_cm=known[0],
                words=words.junction_move(junction.name, known[0])
                if max(known) - min(known) < words.STILL_CM
                else words.fields_apart(junction.name, upper.field, lower.field, known),
                gaps=tuple(
                    GapView(gap.side, gap.expected_cm, junction.gap_tolerance_cm)
                    for gap in setting.skin_gaps
                ),
                side_view=_side_view(
                    junction,
                    setting,
                    (upper, lower),
                    previous if any(abs(move) > words.STILL_CM for move in known) else (),
                ),
            )
        )
    return tuple(views)


def _edge_move(
    now: PositionSettings, field: FieldSetting, before: Standing, junction: str
) -> float | None:
    """Return how far (cm, + superior) a field's edge at a junction moves; None if it never does."""
    if field.earlier_course:
        return None
    position = before.positions.get(field.field)
    if position is None:
        return 0.0
    return now.junction(junction).offset_cm - position.junction(junction).offset_cm


def _label(before: Standing, field: str) -> str:
    position = before.positions.get(field)
    return position.label if position else ""


def _since(now: PositionSettings, field: FieldSetting, before: Standing) -> Triple:
    position = before.positions.get(field.field)
    if position is None:
        return (0.0, 0.0, 0.0)
    return _difference(place_cm(now, field.field), place_cm(position, field.field))


def _between(now: PositionSettings, index: int) -> TableMoveView | None:
    """Return the table move from the field treated before; None for the first."""
    if index == 0:
        return None
    field, other = now.treated[index], now.treated[index - 1]
    return _table_move(_difference(place_cm(now, field.field), place_cm(now, other.field)), field)


def _between_before(now: PositionSettings, index: int, before: Standing) -> TableMoveView | None:
    """Return what the same move was when both fields were treated last."""
    field, other = (now.treated[place].field for place in (index, index - 1))
    if index == 0 or not {field, other} <= set(before.positions):
        return None
    move = _difference(
        place_cm(before.positions[field], field), place_cm(before.positions[other], other)
    )
    return TableMoveView(*move, ())


def _difference(one: Triple, other: Triple) -> Triple:
    x, y, z = (round(a - b, 9) + 0.0 for a, b in zip(one, other, strict=True))
    return (x, y, z)


def _table_move(move_cm: Triple, field: FieldSetting) -> TableMoveView:
    return TableMoveView(*move_cm, words.table_move(move_cm, couch_turned=_turned(field)))


def _turned(field: FieldSetting) -> bool:
    return any(beam.couch_deg for beam in field.beams)


def _beam_view(
    beam: BeamSetting,
    last_field: FieldSetting | None,
    given: _Given,
) -> BeamView:
    last = (
        next((one for one in last_field.beams if one.beam == beam.beam), None)
        if last_field
        else None
    )
    due = given.due
    had = max(0.0, given.parts.get(beam.beam, 0.0) - due.started)
    return BeamView(
        beam=beam.beam,
        energy=beam.energy,
        gantry_deg=beam.gantry_deg,
        collimator_deg=beam.collimator_deg,
        couch_deg=beam.couch_deg,
        previous_collimator_deg=last.collimator_deg if last else None,
        previous_couch_deg=last.couch_deg if last else None,
        ssd_cm=beam.ssd_cm,
        planned_mu=(due.expected - due.started) * beam.meterset_mu,
        delivered_mu=had * beam.meterset_mu,
        to_deliver_mu=due.due.get(beam.beam, 0.0) * beam.meterset_mu,
        jaws=tuple(_jaw_view(beam, jaw, last) for jaw in beam.jaw_cm),
        console=_console(beam, given.display) if given.display else (),
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
    edge = edge_move_cm(beam, last, ends[jaw]) if last and jaw in ends else None
    move = "" if previous is None else words.jaw_move(jaw, value - previous, edge)
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
