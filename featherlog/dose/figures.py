"""Figures of merit of one dose profile.

Extremes are refined by the parabola through the grid point and its two neighbours; lengths end
where the straight line between grid points crosses the level. With a grid finer than a fifth of
the penumbra's sigma an extreme is right within 0.01 % of the dose.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from featherlog.dose.result import DoseFigures

if TYPE_CHECKING:
    from numpy.typing import NDArray

HOT = 1.07
COLD = 0.95
"""Parts of the reference dose between which a target should lie (ICRU Reports 50 and 62)."""

# Differences below this come from floating point, not from the profile.
_NOISE_GY = 1e-9


def dose_figures(
    z_cm: NDArray[np.float64],
    dose_gy: NDArray[np.float64],
    reference_gy: float,
    cold_reference_gy: float | None = None,
) -> DoseFigures:
    """Return the extremes and the hot and cold lengths of a profile on an even, rising grid.

    On a plateau the extreme's coordinate is the plateau's first grid point. Cold is judged against
    ``cold_reference_gy`` where it is given.
    """
    cold_gy = reference_gy if cold_reference_gy is None else cold_reference_gy
    maximum_z_cm, maximum_gy = _peak(z_cm, dose_gy)
    minimum_z_cm, negative_minimum_gy = _peak(z_cm, -dose_gy)
    return DoseFigures(
        reference_gy=reference_gy,
        cold_reference_gy=cold_gy,
        maximum_gy=maximum_gy,
        maximum_percent=100.0 * maximum_gy / reference_gy,
        maximum_z_cm=maximum_z_cm,
        minimum_gy=-negative_minimum_gy,
        minimum_percent=-100.0 * negative_minimum_gy / cold_gy,
        minimum_z_cm=minimum_z_cm,
        over_107_cm=length_above(z_cm, dose_gy, HOT * reference_gy),
        under_95_cm=length_above(z_cm, -dose_gy, -COLD * cold_gy),
    )


def length_above(z_cm: NDArray[np.float64], values: NDArray[np.float64], level: float) -> float:
    """Return the total length (cm) over which a piecewise straight profile lies above a level."""
    excess = values - level
    higher = np.maximum(excess[1:], excess[:-1])
    lower = np.minimum(excess[1:], excess[:-1])
    part = (higher > 0).astype(np.float64)
    crossed = (higher > 0) & (lower < 0)
    part[crossed] = higher[crossed] / (higher - lower)[crossed]
    return float(np.sum(part * np.diff(z_cm)))


def _peak(z_cm: NDArray[np.float64], values: NDArray[np.float64]) -> tuple[float, float]:
    top = int(np.argmax(np.round(values / _NOISE_GY)))
    at_end = top in (0, len(values) - 1)
    if at_end:
        return float(z_cm[top]), float(values[top])
    before, at, after = values[top - 1 : top + 2].tolist()
    bend = before - 2.0 * at + after
    if bend > -_NOISE_GY:
        return float(z_cm[top]), at
    shift = 0.5 * (before - after) / bend
    step_cm = float(z_cm[top + 1] - z_cm[top])
    return float(z_cm[top]) + shift * step_cm, at - 0.25 * (before - after) * shift
