from __future__ import annotations

from itertools import pairwise

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from featherlog.dose.figures import dose_figures, length_above


@given(st.floats(-1.9, 1.9), st.floats(0.1, 5.0))
def test_extremes_between_grid_points_are_found_from_a_parabola(top_cm: float, bend: float) -> None:
    z_cm = np.linspace(-3.0, 3.0, 41)
    figures = dose_figures(z_cm, 24.0 - bend * (z_cm - top_cm) ** 2, 20.0)
    assert figures.maximum_gy == pytest.approx(24.0)
    assert figures.maximum_percent == pytest.approx(120.0)
    assert figures.maximum_z_cm == pytest.approx(top_cm, abs=1e-6)


def test_the_minimum_is_named_with_its_place() -> None:
    z_cm = np.linspace(-3.0, 3.0, 41)
    figures = dose_figures(z_cm, 15.0 + (z_cm - 0.42) ** 2, 20.0)
    assert (figures.minimum_gy, figures.minimum_percent) == pytest.approx((15.0, 75.0))
    assert figures.minimum_z_cm == pytest.approx(0.42)


def test_an_extreme_at_the_end_of_the_line_stays_there() -> None:
    z_cm = np.linspace(0.0, 2.0, 5)
    figures = dose_figures(z_cm, 10.0 + z_cm, 10.0)
    assert (figures.minimum_z_cm, figures.maximum_z_cm) == (0.0, 2.0)


def test_noise_on_a_plateau_is_not_a_maximum() -> None:
    dose_gy = np.full(9, 20.0)
    dose_gy[5] += 1e-13
    assert dose_figures(np.arange(9) / 4, dose_gy, 20.0).maximum_z_cm == 0.0


def test_a_plateau_reached_gently_is_not_extrapolated() -> None:
    rise = np.array([-9.0, -7.9, -4.0, -0.2, 0.0, 0.0]) * 1e-10
    figures = dose_figures(np.arange(6) / 4, 20.0 + rise, 20.0)
    assert (figures.maximum_z_cm, figures.maximum_gy) == pytest.approx((0.5, 20.0))


def test_hot_and_cold_lengths_end_where_the_profile_crosses_the_levels() -> None:
    z_cm = np.array([0.0, 1.0, 2.0, 3.0])
    dose_gy = np.array([100.0, 121.0, 100.0, 90.0])
    figures = dose_figures(z_cm, dose_gy, 100.0)
    assert figures.over_107_cm == pytest.approx(2 * 14 / 21)
    assert figures.under_95_cm == pytest.approx(0.5)


@given(st.lists(st.floats(0.0, 2.0), min_size=2, max_size=9), st.floats(0.0, 2.0))
def test_lengths_above_and_below_a_level_make_the_whole_line(
    values: list[float], level: float
) -> None:
    z_cm, profile = np.arange(len(values), dtype=float), np.array(values)
    on_level = sum(a == b == level for a, b in pairwise(values))
    both = length_above(z_cm, profile, level) + length_above(z_cm, -profile, -level)
    assert both + on_level == pytest.approx(z_cm[-1])
