"""Which jaw forms an end of a field, and when none does."""

import pytest

from featherlog.geometry.beams import BeamFrame, GeometryError, beam_frame
from featherlog.geometry.frames import PatientPosition

X, Y = 0, 1
HFS = PatientPosition.HFS


def frame(
    position: PatientPosition, gantry_deg: float, collimator_deg: float, couch_deg: float = 0.0
) -> BeamFrame:
    return beam_frame(
        position,
        gantry_deg=gantry_deg,
        collimator_deg=collimator_deg,
        couch_deg=couch_deg,
        isocentre_cm=(0, 0, 0),
        sad_cm=100,
    )


@pytest.mark.parametrize(
    ("position", "collimator", "superior"),
    [
        ("HFS", 0, (Y, 1)),
        ("HFP", 0, (Y, 1)),
        ("FFS", 0, (Y, -1)),
        ("FFP", 0, (Y, -1)),
        ("HFS", 90, (X, 1)),
        ("HFS", -90, (X, -1)),
        ("FFS", 90, (X, -1)),
        ("HFS", 180, (Y, -1)),
        ("HFS", 29, (Y, 1)),
        ("HFS", 61, (X, 1)),
    ],
)
@pytest.mark.parametrize("gantry", [0, 90, 180, 270])
def test_the_jaw_that_faces_an_end(
    position: str, collimator: float, superior: tuple[int, int], gantry: float
) -> None:
    placed = frame(PatientPosition(position), gantry, collimator)
    assert placed.end_axis(1) == superior
    assert placed.end_axis(-1) == (superior[0], -superior[1])


@pytest.mark.parametrize("collimator", [31, 45, -59])
def test_a_jaw_turned_beyond_30_degrees_is_refused(collimator: float) -> None:
    with pytest.raises(GeometryError, match=r"within 30 degrees: the nearest is turned \d\d\.\d"):
        frame(HFS, 180, collimator).end_axis(1)


def test_couch_and_collimator_turn_alike_under_a_vertical_beam() -> None:
    # From above, the couch takes back what the collimator turned.
    assert frame(HFS, 0, 40, 40).end_axis(1) == (Y, 1)
    with pytest.raises(GeometryError, match=r"turned 40\.0 degrees"):
        frame(HFS, 0, 20, -20).end_axis(1)


def test_an_edge_along_the_axis_has_no_place_on_it() -> None:
    with pytest.raises(GeometryError, match="lies along the junction axis"):
        frame(HFS, 0, 0).edge(0.0, X)


def test_a_point_level_with_the_source_has_no_jaw() -> None:
    with pytest.raises(GeometryError, match=r"\(0\.00, -100\.00, 3\.00\) lies level"):
        frame(HFS, 0, 0).jaw_through((0, -100, 3), Y)
