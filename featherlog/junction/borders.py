"""Where the outer borders lie, and what a tilted or travelling one leaves uncovered."""

from __future__ import annotations

from typing import TYPE_CHECKING

from featherlog.junction.design import End
from featherlog.junction.plan import BorderSetting

if TYPE_CHECKING:
    from featherlog.junction.design import Border, Course
    from featherlog.junction.placing import Chain, PlacedField


def border_settings(course: Course, chain: Chain) -> tuple[BorderSetting, ...]:
    """Return both outer borders that are given by a point; one given by its reach has none.

    Coverage is asked for only between lateral limits: there the border's point, held in the
    patient, must lie inside the edge of every beam.
    """
    found = (
        _border(course.superior_border, chain[0], End.SUPERIOR),
        _border(course.inferior_border, chain[-1], End.INFERIOR),
    )
    return tuple(border for border in found if border is not None)


def _border(border: Border, field: PlacedField, end: End) -> BorderSetting | None:
    if border.point_cm is None:
        return None
    x, y, z = border.point_cm
    across = (x, *(border.cover_x_cm or ()))
    outward = 1 if end is End.SUPERIOR else -1
    edges = tuple(
        outward * min(outward * beam.edge(end).z_at(at, y) for beam in field.beams) for at in across
    )
    short = max(outward * (z - edge) for edge in edges) if border.cover_x_cm else 0.0
    return BorderSetting(end.value, across, edges, max(0.0, short))
