"""Points that a junction names in the patient: on the skin, at depth, at the lateral limits.

Points are in patient axes (cm); depths run from the entrance skin into the patient.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

from featherlog.junction.design import Junction, Side

if TYPE_CHECKING:
    from featherlog.geometry.patient import Point

OUTWARD: dict[Side, tuple[int, int]] = {
    Side.ANTERIOR: (1, -1),
    Side.POSTERIOR: (1, 1),
    Side.LEFT: (0, 1),
    Side.RIGHT: (0, -1),
}
"""For each side of the patient, the patient axis that leaves it (0 x, 1 y) and its sign."""

OPPOSITE = {
    Side.ANTERIOR: Side.POSTERIOR,
    Side.POSTERIOR: Side.ANTERIOR,
    Side.LEFT: Side.RIGHT,
    Side.RIGHT: Side.LEFT,
}


def point_at_depth(junction: Junction, depth_cm: float, z_cm: float) -> Point:
    """Return the point at a depth below the junction's entrance skin, at axis coordinate z."""
    axis, sign = OUTWARD[junction.entrance]
    x, y = junction.skin_point_cm[:2]
    return (x - sign * depth_cm, y, z_cm) if axis == 0 else (x, y - sign * depth_cm, z_cm)


def depth_of(junction: Junction, point_cm: Point) -> float:
    """Return a point's depth (cm) below the junction's entrance skin."""
    axis, sign = OUTWARD[junction.entrance]
    return sign * (junction.skin_point_cm[axis] - point_cm[axis])


def across(junction: Junction, point_cm: Point) -> tuple[Point, ...]:
    """Return the point itself and its two neighbours at the lateral limits."""
    axis, _ = OUTWARD[junction.entrance]
    low, high = junction.lateral_limits_cm
    x, y, z = point_cm
    moved = [(x, at, z) if axis == 0 else (at, y, z) for at in (low, high)]
    return (point_cm, *moved)


def places(junction: Junction, match_depth_cm: float) -> dict[str, float]:
    """Return the depths (cm) at which a junction's mismatch is stated, by name."""
    named = {"entrance skin": 0.0, "match depth": match_depth_cm}
    if junction.critical is not None:
        named[junction.critical.name] = junction.critical.depth_cm
    if junction.thickness_cm is not None:
        named["opposite skin"] = junction.thickness_cm
    return named
