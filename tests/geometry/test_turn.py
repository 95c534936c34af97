"""A beam turned onto a plane: which angles, which root, and when there is none."""

from __future__ import annotations

from math import atan, cos, degrees, radians, tan

import numpy as np
import pytest

from featherlog.geometry.beams import GeometryError, beam_frame
from featherlog.geometry.frames import PatientPosition
from featherlog.geometry.matching import Turn, signed_angle, turn_onto
from featherlog.geometry.planes import EdgePlane

SAD = 100.0
WITHIN = 1e-9
ANY_COUCH = (-180.0, 180.0)
HFS = PatientPosition.HFS


def sagittal(jaw_cm: float, z_cm: float = 0.0) -> EdgePlane:
    """Give the edge plane of a posterior beam (gantry 180) above or below which fields lie."""
    return EdgePlane((0.0, jaw_cm / SAD, 1.0), z_cm)


def turned(
    plane: EdgePlane,
    gantry_deg: float,
    isocentre_cm: tuple[float, float, float],
    *,
    nominal_deg: float = 0.0,
    axis: int = 1,
    position: PatientPosition = HFS,
    couch_range_deg: tuple[float, float] = ANY_COUCH,
) -> Turn:
    return turn_onto(
        plane,
        position,
        gantry_deg=gantry_deg,
        isocentre_cm=isocentre_cm,
        sad_cm=SAD,
        axis=axis,
        nominal_collimator_deg=nominal_deg,
        couch_range_deg=couch_range_deg,
    )


def residual_cm(
    turn: Turn,
    plane: EdgePlane,
    gantry_deg: float,
    isocentre_cm: tuple[float, float, float],
    *,
    axis: int = 1,
    position: PatientPosition = HFS,
) -> float:
    """Return the worst distance along the axis of the turned edge from the plane, within 15 cm."""
    edge = beam_frame(
        position,
        gantry_deg=gantry_deg,
        collimator_deg=turn.collimator_deg,
        couch_deg=turn.couch_deg,
        isocentre_cm=isocentre_cm,
        sad_cm=SAD,
    ).edge(turn.jaw_cm, axis)
    corners = [(x, y) for x in (-15.0, 15.0) for y in (-15.0, 15.0)]
    return max(abs(edge.z_at(*corner) - plane.z_at(*corner)) for corner in corners)


@pytest.mark.parametrize("gantry", [90.0, 270.0])
@pytest.mark.parametrize("jaw", [2.0, 13.3333, 20.0])
@pytest.mark.parametrize("above", [4.0, 9.0, 18.0])
def test_a_lateral_on_a_sagittal_neighbour_keeps_both_tangent_formulas(
    gantry: float, jaw: float, above: float
) -> None:
    turn = turned(sagittal(jaw), gantry, (0.0, -8.0, above))
    alpha, beta = atan(jaw / SAD), atan(abs(turn.jaw_cm) / SAD)
    collimator, couch = radians(abs(turn.collimator_deg)), radians(abs(turn.couch_deg))
    assert tan(collimator) == pytest.approx(tan(alpha) / cos(couch), abs=1e-12)
    assert tan(couch) == pytest.approx(tan(beta) / cos(collimator), abs=1e-12)


@pytest.mark.parametrize("jaw", [4.0, 13.3333])
@pytest.mark.parametrize("gantry", [90.0, 270.0])
def test_the_textbook_angles_are_near_for_laterals(gantry: float, jaw: float) -> None:
    turn = turned(sagittal(jaw), gantry, (0.0, -8.0, 9.0))
    assert abs(turn.collimator_deg) == pytest.approx(degrees(atan(jaw / SAD)), abs=0.25)
    assert abs(turn.couch_deg) == pytest.approx(degrees(atan(abs(turn.jaw_cm) / SAD)), abs=0.25)


@pytest.mark.parametrize("gantry", [120.0, 130.0, 300.0, 310.0])
def test_the_textbook_angles_are_degrees_off_for_oblique_beams(gantry: float) -> None:
    jaw = 13.3333
    turn = turned(sagittal(jaw), gantry, (0.0, -8.0, 9.0))
    assert residual_cm(turn, sagittal(jaw), gantry, (0.0, -8.0, 9.0)) < WITHIN
    assert abs(abs(turn.couch_deg) - degrees(atan(abs(turn.jaw_cm) / SAD))) > 2.0


def test_the_foot_end_swings_to_the_source_for_laterals_above_the_junction() -> None:
    # Counter-clockwise from above takes the feet of a supine patient to the left.
    assert turned(sagittal(10.0), 90.0, (0.0, -8.0, 9.0)).couch_deg > 0
    assert turned(sagittal(10.0), 270.0, (0.0, -8.0, 9.0)).couch_deg < 0


@pytest.mark.parametrize("axis", [0, 1])
@pytest.mark.parametrize("nominal", [-180.0, -90.0, 0.0, 75.0, 90.0, 180.0])
def test_the_collimator_stays_within_a_quarter_turn_of_the_nominal_angle(
    axis: int, nominal: float
) -> None:
    plane, isocentre = sagittal(10.0), (0.0, -8.0, 9.0)
    turn = turned(plane, 90.0, isocentre, nominal_deg=nominal, axis=axis)
    assert abs(signed_angle(turn.collimator_deg - nominal)) <= 90.0
    assert residual_cm(turn, plane, 90.0, isocentre, axis=axis) < WITHIN


def test_the_root_is_the_smallest_couch_angle() -> None:
    plane, isocentre = sagittal(10.0), (0.0, -8.0, 9.0)
    first = turned(plane, 90.0, isocentre)
    other = turned(plane, 90.0, isocentre, couch_range_deg=(90.0, 180.0))
    assert abs(first.couch_deg) < 10.0 < abs(other.couch_deg)
    assert residual_cm(other, plane, 90.0, isocentre) < WITHIN


@pytest.mark.parametrize("gantry", [0.0, 180.0, 2.0, 178.0])
def test_near_gantry_0_and_180_no_couch_angle_brings_the_source_into_the_plane(
    gantry: float,
) -> None:
    with pytest.raises(GeometryError, match="no couch angle puts its source in the neighbour's"):
        turned(sagittal(13.3), gantry, (0.0, -8.0, 9.0))


def test_a_couch_angle_beyond_the_machine_is_refused_by_its_value() -> None:
    # sin(couch) = (9 - 0.1 × 8) / 100, from the height of the isocentre over the plane.
    message = r"turn to \+4\.7 or \+175\.3 degrees, outside -3\.0 to \+3\.0"
    with pytest.raises(GeometryError, match=message):
        turned(sagittal(10.0), 90.0, (0.0, -8.0, 9.0), couch_range_deg=(-3.0, 3.0))


def test_a_plane_that_faces_the_source_cannot_be_formed_by_a_jaw() -> None:
    across = EdgePlane((1.0, 0.0, 0.0), 100.0)
    with pytest.raises(GeometryError, match="faces the source"):
        turned(across, 90.0, (0.0, 0.0, 0.0))


@pytest.mark.parametrize(
    ("angle", "signed"), [(0, 0), (180, 180), (-180, 180), (181, -179), (540, 180), (-350, 10)]
)
def test_signed_angles_lie_within_half_a_turn(angle: float, signed: float) -> None:
    assert signed_angle(angle) == signed


def test_ten_thousand_turned_edges_are_their_neighbours_planes() -> None:
    """Random lateral, tangent and oblique beams in all four positions, before rounding."""
    random = np.random.default_rng(20310303)
    positions = list(PatientPosition)
    worst, found = 0.0, 0
    for case in range(10_000):
        position = positions[case % 4]
        plane = _random_plane(random, position)
        gantry = _random_gantry(random, case // 4 % 3)
        isocentre = tuple(random.uniform((-10, -12, 4), (10, 2, 20)))
        how = {"axis": case % 2, "position": position}
        try:
            turn = turned(plane, gantry, isocentre, couch_range_deg=(-90.0, 90.0), **how)
        except GeometryError:
            continue
        found += 1
        worst = max(worst, residual_cm(turn, plane, gantry, isocentre, **how))
    assert found > 9500
    assert worst < WITHIN


def _random_plane(random: np.random.Generator, position: PatientPosition) -> EdgePlane:
    """Give the edge of a neighbour at any gantry, its angles near square."""
    return beam_frame(
        position,
        gantry_deg=random.uniform(0, 360),
        collimator_deg=random.uniform(-10, 10),
        couch_deg=random.uniform(-10, 10),
        isocentre_cm=tuple(random.uniform((-5, -12, -20), (5, 2, -10))),
        sad_cm=random.uniform(80, 120),
    ).edge(float(random.uniform(-20, 20)), 1)


def _random_gantry(random: np.random.Generator, kind: int) -> float:
    """Give a lateral, a tangent or an oblique beam's gantry angle."""
    side = random.choice((0.0, 180.0))
    return float((90.0, random.uniform(35, 65), random.uniform(20, 160))[kind] + side)
