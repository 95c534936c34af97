"""What two field edges leave between them: skin gaps, mismatch, overlap of more than two beams.

Lengths in cm along the junction axis, + gap and - overlap.
"""

from __future__ import annotations

import math
from itertools import pairwise, product
from typing import TYPE_CHECKING

import numpy as np

from featherlog.junction.pairs import pair_mismatches, worst
from featherlog.junction.placing import stated_points
from featherlog.junction.plan import JunctionSetting, Mismatch, SkinGap
from featherlog.junction.play import play_if_off
from featherlog.junction.points import OPPOSITE, OUTWARD, point_at_depth

if TYPE_CHECKING:
    from featherlog.geometry.patient import PatientPosition, Point
    from featherlog.geometry.planes import EdgePlane
    from featherlog.junction.design import Junction, Side
    from featherlog.junction.machine import Tolerances
    from featherlog.junction.placing import PlacedBeam, PlacedField

Pair = tuple["PlacedField", "PlacedField"]

# A beam lights a skin side when it meets it at more than about six degrees.
_LEAST_LIGHT = 0.1


def junction_setting(
    junction: Junction,
    *,
    offset_cm: float,
    match_point_cm: Point,
    match_depth_cm: float,
    exact: Pair,
    rounded: Pair,
    patient: PatientPosition,
    tolerances: Tolerances,
) -> JunctionSetting:
    """Return everything to be said of one junction at one position.

    ``exact`` and ``rounded`` are the superior and inferior field before and after rounding.
    """
    overlap = three_field_overlap(junction, match_point_cm[2], rounded)
    gaps = skin_gaps(junction, match_point_cm[2], exact, rounded)
    entrance = next((gap.expected_cm for gap in gaps if gap.side == junction.entrance.value), None)
    removed = None if overlap is None or entrance is None else entrance + overlap
    points = stated_points(junction, match_depth_cm, offset_cm)
    return JunctionSetting(
        junction=junction.name,
        offset_cm=offset_cm,
        match_point_cm=match_point_cm,
        match_depth_cm=match_depth_cm,
        skin_gaps=gaps,
        mismatches=tuple(
            _mismatch(name, point, exact, rounded)
            for name, across in points.items()
            for point in across
        ),
        rounding_cm=_rounding(points, exact, rounded),
        depth_below_skin_cm=match_depth_cm
        + skin_rise(junction, match_point_cm[2] - junction.skin_point_cm[2]),
        separation_cm=junction.separation_cm,
        three_field_overlap_cm=overlap,
        gap_without_overlap_cm=removed,
        if_jaws_off=play_if_off(points, rounded, patient, tolerances, everything=False),
        if_all_off=play_if_off(points, rounded, patient, tolerances, everything=True),
    )


def _mismatch(place: str, point: Point, exact: Pair, rounded: Pair) -> Mismatch:
    as_set = pair_mismatches(*rounded, point)
    return Mismatch(
        place=place,
        x_cm=point[0],
        y_cm=point[1],
        exact_cm=worst(pair_mismatches(*exact, point)),
        rounded_cm=worst(as_set),
        least_cm=min(as_set),
        most_cm=max(as_set),
    )


def entrance_gap(junction: Junction, upper: PlacedField, lower: PlacedField) -> float:
    """Return the gap (cm) on the entrance skin between the beams that light it.

    For beams on one side at depth d it is d·(j1/SAD1 + j2/SAD2), the textbook gap; here it comes
    from the edge planes. Zero where no pair of beams lights that skin.
    """
    z = junction.skin_point_cm[2]
    gap = _gap(junction, junction.entrance, z, (upper, lower))
    return 0.0 if gap is None else gap[0] + gap[1]


def skin_rise(junction: Junction, along_cm: float) -> float:
    """Return how far (cm) the entrance skin lies outward of its point, a distance along the axis.

    Positive slopes rise outward toward the head; an unknown slope counts as flat.
    """
    return math.tan(math.radians(junction.skin_slope_deg or 0.0)) * along_cm


def skin_gaps(
    junction: Junction, match_z_cm: float, exact: Pair, rounded: Pair
) -> tuple[SkinGap, ...]:
    """Return the gap on the entrance skin and, where it is known, on the opposite skin.

    On a sloping entrance skin each edge is followed to where it meets that skin.
    """
    gaps = []
    for side in (junction.entrance, OPPOSITE[junction.entrance]):
        before = _gap(junction, side, match_z_cm, exact)
        after = _gap(junction, side, match_z_cm, rounded)
        if before is not None and after is not None:
            slope = junction.skin_slope_deg or 0.0 if side is junction.entrance else 0.0
            along = sum(after) / math.cos(math.radians(slope))
            gaps.append(SkinGap(side.value, sum(before), sum(after), *after, along))
    return tuple(gaps)


def three_field_overlap(junction: Junction, match_z_cm: float, pair: Pair) -> float | None:
    """Return the length (cm) at the critical depth that more beams cover than either field has.

    For opposed pairs of lengths L1 and L2 whose edges all meet at depth d it is, at depth z,
    (L1 - L2)(z - d)/(2·SSD) (Khan, The Physics of Radiation Therapy, adjacent fields; from memory).
    None without a critical structure, or when a field has a single beam.
    """
    upper, lower = pair
    if junction.critical is None or min(len(upper.beams), len(lower.beams)) < 2:  # noqa: PLR2004 - a pair of beams
        return None
    x, y, _ = point_at_depth(junction, junction.critical.depth_cm, match_z_cm)
    ends = sorted(beam.inferior_edge.z_at(x, y) for beam in upper.beams)
    starts = sorted(beam.superior_edge.z_at(x, y) for beam in lower.beams)
    cuts = sorted({*ends, *starts})
    normal = max(len(ends), len(starts))
    return sum(
        high - low
        for low, high in pairwise(cuts)
        if sum(end < high for end in ends) + sum(start > low for start in starts) > normal
    )


def _gap(
    junction: Junction, side: Side, match_z_cm: float, pair: Pair
) -> tuple[float, float] | None:
    depth = 0.0 if side is junction.entrance else junction.thickness_cm
    if depth is None:
        return None
    slope = math.tan(math.radians(junction.skin_slope_deg or 0.0)) if depth == 0 else 0.0
    upper, lower = ([beam for beam in field.beams if lights(beam, side)] for field in pair)
    parts = [
        (
            _on_skin(junction, depth, slope, above.inferior_edge) - match_z_cm,
            match_z_cm - _on_skin(junction, depth, slope, below.superior_edge),
        )
        for above, below in product(upper, lower)
    ]
    return max(parts, key=lambda part: (round(abs(sum(part)), 9), sum(part)), default=None)


def _on_skin(junction: Junction, depth_cm: float, slope: float, edge: EdgePlane) -> float:
    """Return the axis coordinate (cm) at which an edge meets a skin of that slope (rise per cm)."""
    axis, sign = OUTWARD[junction.entrance]
    start = junction.skin_point_cm[2]
    x, y, _ = point_at_depth(junction, depth_cm, start)
    flat = edge.z_at(x, y)
    # The skin moves outward by slope·(z - start), and the edge with it by its own tilt.
    tilt = -edge.normal[axis] / edge.normal[2] * sign * slope
    return start + (flat - start) / (1 - tilt)


def lights(beam: PlacedBeam, side: Side) -> bool:
    """Tell whether a beam meets the skin of a side steeply enough to mark its edges there."""
    axis, sign = OUTWARD[side]
    return bool(sign * beam.frame.toward_source[axis] > _LEAST_LIGHT)


def _rounding(points: dict[str, tuple[Point, ...]], exact: Pair, rounded: Pair) -> float:
    changes = [
        np.subtract(pair_mismatches(*rounded, point), pair_mismatches(*exact, point))
        for across in points.values()
        for point in across
    ]
    return float(worst(np.concatenate(changes)))
