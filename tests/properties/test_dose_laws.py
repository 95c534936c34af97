"""Laws of matched Gaussian edges, for equal penumbras without leakage unless said."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.integrate import trapezoid
from scipy.stats import norm

from featherlog.dose.edges import edge_rise, open_profile, ramp_rise, sigma_from_80_20

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Profile = NDArray[np.float64]

FAR_CM = 60.0
WIDTHS_CM = st.floats(0.17, 1.5)
SIGMAS_CM = st.floats(0.1, 0.9)
Z_CM = np.arange(-2000, 2001) / 100


def matched(
    z_cm: Profile,
    gap_cm: float,
    *,
    superior_sigma_cm: float,
    inferior_sigma_cm: float | None = None,
    transmission: float = 0.0,
    at_cm: float = 0.0,
) -> Profile:
    """Two long fields whose facing edges are ``gap_cm`` apart about ``at_cm``."""
    inferior_sigma_cm = inferior_sigma_cm or superior_sigma_cm
    superior = open_profile(
        z_cm,
        inferior_edge_cm=at_cm + gap_cm / 2,
        superior_edge_cm=FAR_CM,
        inferior_sigma_cm=superior_sigma_cm,
        superior_sigma_cm=superior_sigma_cm,
        transmission=transmission,
    )
    inferior = open_profile(
        z_cm,
        inferior_edge_cm=-FAR_CM,
        superior_edge_cm=at_cm - gap_cm / 2,
        inferior_sigma_cm=inferior_sigma_cm,
        superior_sigma_cm=inferior_sigma_cm,
        transmission=transmission,
    )
    return superior + inferior


def overlap_peak(overlap_cm: float, width_cm: float) -> float:
    return matched(np.zeros(1), -overlap_cm, superior_sigma_cm=sigma_from_80_20(width_cm))[0]


def missing_cm(profile: Profile, plateau: float = 1.0) -> float:
    return trapezoid(plateau - profile, Z_CM)


@given(WIDTHS_CM)
def test_an_edge_rises_from_20_to_80_percent_over_its_stated_width(width_cm: float) -> None:
    ends = edge_rise(np.array([-width_cm / 2, width_cm / 2]), 0.0, sigma_from_80_20(width_cm))
    assert ends == pytest.approx([0.2, 0.8], abs=1e-12)


@given(st.floats(0.01, 2.0), SIGMAS_CM)
def test_overlapping_edges_peak_midway_at_twice_the_normal_distribution(
    overlap_cm: float, sigma_cm: float
) -> None:
    profile = matched(Z_CM, -overlap_cm, superior_sigma_cm=sigma_cm)
    assert profile.max() == pytest.approx(2 * norm.cdf(overlap_cm / (2 * sigma_cm)), abs=1e-9)
    assert abs(Z_CM[profile.argmax()]) < max(0.01, overlap_cm)


@given(st.floats(0.01, 2.0), SIGMAS_CM)
def test_a_gap_is_as_cold_as_the_same_overlap_is_hot(gap_cm: float, sigma_cm: float) -> None:
    cold = matched(Z_CM, gap_cm, superior_sigma_cm=sigma_cm)
    hot = matched(Z_CM, -gap_cm, superior_sigma_cm=sigma_cm)
    assert cold - 1 == pytest.approx(1 - hot, abs=1e-12)


@given(WIDTHS_CM)
def test_an_overlap_of_one_penumbra_width_adds_60_percent(width_cm: float) -> None:
    assert overlap_peak(width_cm, width_cm) == pytest.approx(1.6, abs=1e-12)


@given(WIDTHS_CM)
def test_small_overlaps_add_67_percent_per_mm_over_the_width_in_mm(width_cm: float) -> None:
    overlap_mm = 1e-3
    percent_per_mm = 100 * (overlap_peak(overlap_mm / 10, width_cm) - 1) / overlap_mm
    assert percent_per_mm == pytest.approx(67.15 / (10 * width_cm), rel=1e-4)


@pytest.mark.parametrize(
    ("overlap_cm", "width_cm", "percent"),
    [(0.1, 0.6, 11.2), (0.3, 0.6, 32.6), (0.2, 0.5, 26.4), (0.2, 0.3, 42.5)],
)
def test_overlap_peaks_in_numbers(overlap_cm: float, width_cm: float, percent: float) -> None:
    assert 100 * (overlap_peak(overlap_cm, width_cm) - 1) == pytest.approx(percent, abs=0.05)


@given(st.floats(-2.0, 2.0), SIGMAS_CM, SIGMAS_CM, st.floats(0.0, 0.05))
def test_area_law_the_missing_area_is_the_gap_for_any_penumbra_and_leakage(
    gap_cm: float, superior_sigma_cm: float, inferior_sigma_cm: float, transmission: float
) -> None:
    profile = matched(
        Z_CM,
        gap_cm,
        superior_sigma_cm=superior_sigma_cm,
        inferior_sigma_cm=inferior_sigma_cm,
        transmission=transmission,
    )
    expected_cm = (1 - transmission) * gap_cm
    assert missing_cm(profile, 1 + transmission) == pytest.approx(expected_cm, abs=1e-9)


@given(st.floats(-1.0, 1.0), SIGMAS_CM, st.integers(1, 5), st.floats(0.5, 2.0))
def test_area_law_feathering_spreads_the_gap_and_removes_none_of_it(
    gap_cm: float, sigma_cm: float, positions: int, step_cm: float
) -> None:
    profiles = [
        matched(Z_CM, gap_cm, superior_sigma_cm=sigma_cm, at_cm=-step_cm * index)
        for index in range(positions)
    ]
    assert missing_cm(np.mean(profiles, axis=0)) == pytest.approx(gap_cm, abs=1e-9)


def test_a_gap_of_one_step_spread_over_many_positions_is_a_trough_of_gap_over_length() -> None:
    positions, step_cm, gap_cm = 9, 1.0, 0.4
    profiles = [
        matched(Z_CM, gap_cm, superior_sigma_cm=0.3, at_cm=step_cm * (index - positions // 2))
        for index in range(positions)
    ]
    one_step = np.abs(Z_CM) <= step_cm / 2
    trough = trapezoid(1 - np.mean(profiles, axis=0)[one_step], Z_CM[one_step]) / step_cm
    assert trough == pytest.approx(gap_cm / (positions * step_cm), rel=1e-6)


@given(st.floats(0.3, 4.0), SIGMAS_CM)
def test_a_blurred_ramp_is_the_mean_of_the_edges_spread_over_it(
    length_cm: float, sigma_cm: float
) -> None:
    z_cm = np.linspace(-4.0, 8.0, 25)
    middles_cm = (np.arange(4000) + 0.5) * length_cm / 4000
    mean_edge = norm.cdf((z_cm[:, None] - middles_cm) / sigma_cm).mean(axis=1)
    assert ramp_rise(z_cm, 0.0, length_cm, sigma_cm) == pytest.approx(mean_edge, abs=1e-5)


def displaced_ramps(displacement_cm: float, length_cm: float, sigma_cm: float) -> Profile:
    """Two ramps that face each other, moved into each other by the displacement."""
    rising = ramp_rise(Z_CM, -(length_cm + displacement_cm) / 2, length_cm, sigma_cm)
    falling = 1 - ramp_rise(Z_CM, -(length_cm - displacement_cm) / 2, length_cm, sigma_cm)
    return rising + falling


@given(st.floats(0.01, 1.0), SIGMAS_CM, st.floats(4.0, 8.0))
def test_ramp_law_a_displacement_adds_its_part_of_the_ramp(
    displacement_cm: float, sigma_cm: float, room: float
) -> None:
    length_cm = displacement_cm + room * sigma_cm
    excess = displaced_ramps(displacement_cm, length_cm, sigma_cm).max() - 1
    assert excess == pytest.approx(displacement_cm / length_cm, rel=0.05)


def test_a_ramp_of_1_cm_is_too_short_for_its_law() -> None:
    peak = displaced_ramps(0.1, 1.0, sigma_from_80_20(0.6)).max()
    assert 100 * (peak - 1) == pytest.approx(8.4, abs=0.05)


@pytest.mark.parametrize(("ratio", "percent"), [(1.2, 4.4), (1.5, 9.7)])
def test_a_perfect_match_of_unequal_penumbras_still_deviates(ratio: float, percent: float) -> None:
    profile = matched(Z_CM, 0.0, superior_sigma_cm=0.5 * ratio, inferior_sigma_cm=0.5)
    assert 100 * (profile.max() - 1) == pytest.approx(percent, abs=0.05)
    assert 100 * (1 - profile.min()) == pytest.approx(percent, abs=0.05)
