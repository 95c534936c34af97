import numpy as np
import pytest

from featherlog.geometry.frames import (
    PatientPosition,
    patient_from_beam,
    patient_from_table,
    table_move,
)

UP, RIGHT, TO_GANTRY = (0, 0, 1), (1, 0, 0), (0, 1, 0)
LEFT_SIDE, POSTERIOR, SUPERIOR = np.eye(3)


@pytest.mark.parametrize(
    ("position", "up", "right", "to_gantry"),
    [
        ("HFS", -POSTERIOR, LEFT_SIDE, SUPERIOR),
        ("HFP", POSTERIOR, -LEFT_SIDE, SUPERIOR),
        ("FFS", -POSTERIOR, -LEFT_SIDE, -SUPERIOR),
        ("FFP", POSTERIOR, LEFT_SIDE, -SUPERIOR),
    ],
)
def test_table_axes_in_the_patient(
    position: str, up: np.ndarray, right: np.ndarray, to_gantry: np.ndarray
) -> None:
    carry = patient_from_table(PatientPosition(position))
    assert np.array_equal(carry @ UP, up)
    assert np.array_equal(carry @ RIGHT, right)
    assert np.array_equal(carry @ TO_GANTRY, to_gantry)


@pytest.mark.parametrize(("position", "side"), [("HFS", 1), ("HFP", -1), ("FFS", -1), ("FFP", 1)])
def test_gantry_90_puts_the_source_at_the_left_of_a_head_first_supine_patient(
    position: str, side: int
) -> None:
    toward_source = patient_from_beam(PatientPosition(position), 90, 0, 0)[:, 2]
    assert tuple(toward_source) == (side, 0, 0)


@pytest.mark.parametrize(
    ("position", "gantry"), [("HFS", 180), ("HFP", 0), ("FFS", 180), ("FFP", 0)]
)
def test_a_posterior_beam_enters_through_the_back(position: str, gantry: float) -> None:
    toward_source = patient_from_beam(PatientPosition(position), gantry, 0, 0)[:, 2]
    assert tuple(toward_source) == (0, 1, 0)


def test_the_couch_turns_counter_clockwise_seen_from_above() -> None:
    # With the couch at 90 the head of a head-first patient points to the viewer's left, so what
    # points to the gantry points to the patient's left.
    axes = patient_from_beam(PatientPosition.HFS, 0, 0, 90)
    assert tuple(axes[:, 1]) == (1, 0, 0)


def test_the_collimator_turns_counter_clockwise_seen_from_the_source() -> None:
    # Seen from above with the gantry at 0, X2 goes from the right to the gantry side.
    assert tuple(patient_from_beam(PatientPosition.HFS, 0, 90, 0)[:, 0]) == (0, 0, 1)


@pytest.mark.parametrize("position", PatientPosition)
def test_every_frame_is_a_right_handed_rotation(position: PatientPosition) -> None:
    axes = patient_from_beam(position, 37, 21, -14)
    assert np.allclose(axes.T @ axes, np.eye(3), atol=1e-14)
    assert np.linalg.det(axes) == pytest.approx(1)


@pytest.mark.parametrize(
    ("position", "longitudinal"), [("HFS", -1), ("HFP", -1), ("FFS", 1), ("FFP", 1)]
)
def test_a_superior_isocentre_move_takes_the_table_the_other_way(
    position: str, longitudinal: float
) -> None:
    assert table_move(PatientPosition(position), (0, 0, 1)) == (0, longitudinal, 0)


@pytest.mark.parametrize(
    ("position", "lateral", "vertical"),
    [("HFS", -2, 3), ("HFP", 2, -3), ("FFS", 2, 3), ("FFP", -2, -3)],
)
def test_table_moves_to_the_side_and_in_height(
    position: str, lateral: float, vertical: float
) -> None:
    # The isocentre goes 2 cm to the patient's left and 3 cm to posterior.
    assert table_move(PatientPosition(position), (2, 3, 0)) == (lateral, 0, vertical)
