from __future__ import annotations

import dataclasses
import math

import pytest
from small_plans import beam, quality

from featherlog.dose.penumbra import depth_in_beam, sigma_at
from featherlog.geometry.patient import PatientPosition

POSTERIOR = beam("POST", inferior_jaw_cm=0.0, superior_jaw_cm=15.0)


@pytest.mark.parametrize(
    ("depth_cm", "width_cm"), [(0.0, 0.3), (1.5, 0.3), (5.75, 0.45), (10.0, 0.6), (30.0, 0.6)]
)
def test_the_width_is_interpolated_and_held_beyond_the_table(
    depth_cm: float, width_cm: float
) -> None:
    six = quality((0.3, 0.6), depth_cm=(1.5, 10.0))
    assert sigma_at(six, depth_cm) == pytest.approx(width_cm / 1.68324, rel=1e-5)


def test_depth_runs_from_the_beams_own_entrance_surface() -> None:
    anterior = dataclasses.replace(POSTERIOR, gantry_deg=0.0, ssd_cm=88.0)
    point_cm = (1.0, -7.0, 3.0)
    assert depth_in_beam(point_cm, POSTERIOR, PatientPosition.HFS) == pytest.approx(7.0)
    assert depth_in_beam(point_cm, anterior, PatientPosition.HFS) == pytest.approx(10.0)


def test_the_same_beam_enters_the_other_side_of_a_prone_patient() -> None:
    over_the_back = dataclasses.replace(POSTERIOR, gantry_deg=0.0)
    point_cm = (1.0, -7.0, 3.0)
    assert depth_in_beam(point_cm, over_the_back, PatientPosition.HFP) == pytest.approx(7.0)


def test_no_depth_lies_above_the_entrance_surface() -> None:
    assert depth_in_beam((0.0, 2.0, 0.0), POSTERIOR, PatientPosition.HFS) == 0.0


def test_with_the_table_turned_depth_changes_along_the_axis() -> None:
    turned = dataclasses.replace(POSTERIOR, gantry_deg=90.0, couch_deg=30.0)
    # Counter-clockwise from above, the feet of a supine patient swing to the left lateral source.
    per_cm = math.sin(math.radians(30.0))
    here, there = (
        depth_in_beam((0.0, -5.0, z_cm), turned, PatientPosition.HFS) for z_cm in (0.0, 2.0)
    )
    assert (here, there - here) == pytest.approx((5.0, 2.0 * per_cm))
