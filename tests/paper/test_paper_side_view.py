from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

import pytest
from reportlab.graphics.shapes import Drawing, Line, String

from featherlog.paper.side_view import side_drawing

if TYPE_CHECKING:
    from featherlog.views.day import DayView, JunctionView

WIDTH, HEIGHT = 300.0, 160.0


@pytest.fixture
def junction(shift_day: DayView) -> JunctionView:
    return shift_day.junctions[0]


def drawn(junction: JunctionView, position: str = "HFS") -> Drawing:
    return side_drawing(junction, position, width=WIDTH, height=HEIGHT)


def lines(drawing: Drawing) -> list[Line]:
    return [item for item in drawing.contents if isinstance(item, Line)]


def labels(drawing: Drawing) -> dict[str, String]:
    return {item.text: item for item in drawing.contents if isinstance(item, String)}


def slanted(drawing: Drawing, *, dashed: bool) -> list[Line]:
    return [
        line
        for line in lines(drawing)
        if abs(line.x1 - line.x2) > 1
        and abs(line.y1 - line.y2) > 20
        and bool(line.strokeDashArray) is dashed
    ]


def test_edges_of_today_are_solid_and_those_of_yesterday_dashed(junction: JunctionView) -> None:
    assert len(slanted(drawn(junction), dashed=False)) == 2
    assert len(slanted(drawn(junction), dashed=True)) == 2


def test_the_scale_is_the_same_along_and_across(junction: JunctionView) -> None:
    edge = junction.side_view.superior_edges[0]
    line = slanted(drawn(junction), dashed=False)[0]
    along = (line.x2 - line.x1) / (edge.z_at_skin_cm - edge.z_at_depth_cm)
    down = (line.y1 - line.y2) / junction.side_view.depth_cm
    assert along == pytest.approx(down)


def test_edges_meet_where_the_match_point_is_marked(junction: JunctionView) -> None:
    drawing = drawn(junction)
    centres = [((e.x1 + e.x2) / 2, (e.y1 + e.y2) / 2) for e in slanted(drawing, dashed=False)]
    assert centres[0] == pytest.approx(centres[1])
    cross = [line for line in lines(drawing) if line.y1 == line.y2 and line.x2 - line.x1 == 8]
    assert [((c.x1 + c.x2) / 2, c.y1) for c in cross] == [pytest.approx(centres[0])]


@pytest.mark.parametrize(
    ("position", "head", "feet"),
    [
        ("HFS", "HEAD (gantry end)", "FEET"),
        ("FFS", "HEAD", "FEET (gantry end)"),
        ("HFDR", "HEAD", "FEET"),
    ],
)
def test_the_head_is_left_and_the_gantry_end_named(
    junction: JunctionView, position: str, head: str, feet: str
) -> None:
    found = labels(drawn(junction, position))
    assert found[head].x < found[feet].x


def test_the_superior_field_stands_at_the_head(junction: JunctionView) -> None:
    found = labels(drawn(junction))
    assert found[junction.superior_field].x < found[junction.inferior_field].x


def test_gap_match_depth_and_critical_structure_are_named(junction: JunctionView) -> None:
    assert {"gap 1.7 cm", "match 5.0 cm", "spinal cord 4.5 cm", "posterior skin"} <= set(
        labels(drawn(junction))
    )


def test_depth_labels_close_together_keep_apart(junction: JunctionView) -> None:
    close = replace(junction, side_view=replace(junction.side_view, critical_depth_cm=5.0))
    found = labels(drawn(close))
    assert abs(found["match 5.0 cm"].y - found["spinal cord 5.0 cm"].y) >= 9


def test_an_abutment_has_no_gap_to_draw(junction: JunctionView) -> None:
    edges = [
        tuple(replace(edge, z_at_skin_cm=-1.0, z_at_depth_cm=-1.0) for edge in group)
        for group in (junction.side_view.superior_edges, junction.side_view.inferior_edges)
    ]
    side = replace(junction.side_view, superior_edges=edges[0], inferior_edges=edges[1])
    assert not any("gap" in text for text in labels(drawn(replace(junction, side_view=side))))


def test_a_far_edge_shrinks_the_scale_and_stays_inside(junction: JunctionView) -> None:
    far = replace(junction.side_view.superior_edges[0], z_at_depth_cm=-40.0)
    side = replace(junction.side_view, superior_edges=(far,))
    drawing = drawn(replace(junction, side_view=side))
    assert max(max(line.x1, line.x2) for line in lines(drawing)) <= WIDTH
    assert min(min(line.x1, line.x2) for line in lines(drawing)) >= 0
