"""The edges that meet at a junction, drawn to scale from the side with the head at the left."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from featherlog.paper import ink
from featherlog.paper.style import HAIR_PT, RULE_PT
from featherlog.words import figure, head_first

if TYPE_CHECKING:
    from collections.abc import Sequence

    from reportlab.graphics.shapes import Drawing

    from featherlog.paper.ink import Point
    from featherlog.views.day import EdgeView, JunctionView, SideView

_TOP_PT, _BOTTOM_PT = 33.0, 14.0
_LINE_PT = 10.0
_EDGE_PT = 1.5
_YESTERDAY = (4.0, 2.5)
_MATCH, _CRITICAL = (1.0, 2.0), (7.0, 2.0, 1.5, 2.0)
# A gap narrower than this would be drawn as two arrow heads on top of each other.
_SHOWN_GAP_CM = 0.05


@dataclass(frozen=True, slots=True)
class _Scale:
    """Maps axis coordinate (cm, + superior) and depth (cm) to points; one scale for both."""

    left: float
    right: float
    skin: float
    per_cm: float
    centre_z_cm: float

    def at(self, z_cm: float, depth_cm: float) -> Point:
        middle = (self.left + self.right) / 2
        across = middle - (z_cm - self.centre_z_cm) * self.per_cm
        return across, self.skin - depth_cm * self.per_cm


def side_drawing(
    junction: JunctionView, patient_position: str, *, width: float, height: float
) -> Drawing:
    """Return the side view of one junction as a vector drawing of the given size in points.

    The entrance skin is at the top, whichever way the patient lies; edges of today are solid,
    those of the position before dashed, and the fields lightly tinted.

    Raises:
        InputError: A name holds a character that the font cannot print.
    """
    side = junction.side_view
    names = _depth_labels(side)
    gutter = max(ink.label_width(text) for text, _ in names) + 8
    scale = _fit(side, width - gutter, height - _TOP_PT)
    drawing = ink.blank(width, height)
    _add_fields(drawing, scale, side)
    _add_depths(drawing, scale, side, names)
    _add_edges(drawing, scale, side)
    _add_gap(drawing, scale, junction)
    _add_ends(drawing, scale, junction, patient_position)
    _add_foot(drawing, scale, side)
    return drawing


def _fit(side: SideView, width: float, skin: float) -> _Scale:
    """Return the largest scale at which the whole depth and every edge are inside."""
    edges = (*side.superior_edges, *side.inferior_edges, *side.previous_edges)
    reach_cm = max(
        abs(z - side.match_z_cm) for e in edges for z in (e.z_at_skin_cm, e.z_at_depth_cm)
    )
    by_height = (skin - _BOTTOM_PT) / side.depth_cm
    per_cm = min(by_height, width / 2 / max(reach_cm, 1.0))
    return _Scale(0.0, width, skin, per_cm, side.match_z_cm)


def _depth_labels(side: SideView) -> list[tuple[str, float]]:
    names = [
        (f"{side.entrance} skin", 0.0),
        (f"match {figure(side.match_depth_cm)} cm", side.match_depth_cm),
    ]
    if side.critical_depth_cm is not None:
        name = f"{side.critical_name} {figure(side.critical_depth_cm)} cm"
        names.append((name, side.critical_depth_cm))
    return names


def _add_fields(drawing: Drawing, scale: _Scale, side: SideView) -> None:
    for edges, bound in ((side.superior_edges, scale.left), (side.inferior_edges, scale.right)):
        for edge in edges:
            top, bottom = _ends(scale, edge, side.depth_cm)
            drawing.add(ink.region([(bound, top[1]), top, bottom, (bound, bottom[1])]))


def _ends(scale: _Scale, edge: EdgeView, depth_cm: float) -> tuple[Point, Point]:
    return scale.at(edge.z_at_skin_cm, 0.0), scale.at(edge.z_at_depth_cm, depth_cm)


def _add_edges(drawing: Drawing, scale: _Scale, side: SideView) -> None:
    for edge in side.previous_edges:
        drawing.add(ink.line(*_ends(scale, edge, side.depth_cm), dash=_YESTERDAY))
    for edge in (*side.superior_edges, *side.inferior_edges):
        drawing.add(ink.line(*_ends(scale, edge, side.depth_cm), width=_EDGE_PT))


def _add_depths(
    drawing: Drawing, scale: _Scale, side: SideView, names: Sequence[tuple[str, float]]
) -> None:
    heights = [scale.skin - depth * scale.per_cm - 3 for _, depth in names]
    placed = ink.apart(heights, _LINE_PT, 2.0, scale.skin)
    dashes = (ink.SOLID, _MATCH, _CRITICAL)
    for (text, depth), y, dash in zip(names, placed, dashes, strict=False):
        level = scale.skin - depth * scale.per_cm
        thick = RULE_PT if depth == 0 else HAIR_PT * 2
        drawing.add(ink.line((scale.left, level), (scale.right, level), width=thick, dash=dash))
        drawing.add(ink.line((scale.right, level), (scale.right + 6, y + 3), width=HAIR_PT))
        drawing.add(ink.label((scale.right + 8, y), text))
    match = scale.at(side.match_z_cm, side.match_depth_cm)
    drawing.add(ink.line((match[0] - 4, match[1]), (match[0] + 4, match[1]), width=RULE_PT))
    drawing.add(ink.line((match[0], match[1] - 4), (match[0], match[1] + 4), width=RULE_PT))


def _add_gap(drawing: Drawing, scale: _Scale, junction: JunctionView) -> None:
    side = junction.side_view
    # The light-field gap lies between the beams that enter here, the farthest apart at this skin.
    superior = max(edge.z_at_skin_cm for edge in side.superior_edges)
    inferior = min(edge.z_at_skin_cm for edge in side.inferior_edges)
    expected = next((g.expected_cm for g in junction.gaps if g.side == side.entrance), None)
    if expected is None or superior - inferior < _SHOWN_GAP_CM:
        return
    level = scale.skin + 5
    left, right = scale.at(superior, 0)[0], scale.at(inferior, 0)[0]
    drawing.add(ink.line((left, level), (right, level)))
    for x in (left, right):
        drawing.add(ink.line((x, scale.skin), (x, level + 3)))
    text = ink.label(
        ((left + right) / 2, level + 5), f"gap {figure(expected)} cm", anchor="middle", bold=True
    )
    ink.knockout(drawing, text)


def _add_ends(
    drawing: Drawing, scale: _Scale, junction: JunctionView, patient_position: str
) -> None:
    head_in = head_first(patient_position)
    level = scale.skin + _TOP_PT - 9
    head = "HEAD (gantry end)" if head_in else "HEAD"
    feet = "FEET (gantry end)" if head_in is False else "FEET"
    drawing.add(ink.label((scale.left, level), head, bold=True, size=9))
    drawing.add(ink.label((scale.right, level), feet, bold=True, size=9, anchor="end"))
    inner = 4.0
    foot = scale.skin - junction.side_view.depth_cm * scale.per_cm + inner
    ink.knockout(drawing, ink.label((scale.left + inner, foot), junction.superior_field))
    ink.knockout(
        drawing, ink.label((scale.right - inner, foot), junction.inferior_field, anchor="end")
    )


def _add_foot(drawing: Drawing, scale: _Scale, side: SideView) -> None:
    bar = 5 * scale.per_cm
    drawing.add(ink.line((scale.left, 3), (scale.left + bar, 3), width=RULE_PT))
    for x in (scale.left, scale.left + bar):
        drawing.add(ink.line((x, 0.5), (x, 5.5), width=RULE_PT))
    key = "5 cm"
    if side.previous_edges:
        key += "   solid: today, dashed: position before"
    drawing.add(ink.label((scale.left + bar + 4, 1), key))
