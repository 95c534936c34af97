"""Field edges blurred by a Gaussian penumbra, along a line parallel to the junction axis.

Positions and widths in cm, profiles relative to the open field. Every ``sigma`` is positive.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from scipy.special import ndtr, ndtri

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Profile = NDArray[np.float64]

SIGMAS_IN_80_20 = 2.0 * float(ndtri(0.8))
"""The 80-20 % width of a normal distribution function in units of its sigma (1.6832)."""


def sigma_from_80_20(width_cm: float) -> float:
    """Return the sigma (cm) of a Gaussian edge whose dose falls from 80 to 20 % over the width."""
    return width_cm / SIGMAS_IN_80_20


def edge_rise(z_cm: Profile, edge_cm: float, sigma_cm: float) -> Profile:
    """Return the rise from 0 to 1 across an edge: Φ((z - edge)/σ), 0.5 at the edge."""
    rise: Profile = ndtr((z_cm - edge_cm) / sigma_cm)
    return rise


def ramp_rise(z_cm: Profile, start_cm: float, length_cm: float, sigma_cm: float) -> Profile:
    """Return a linear rise from 0 at ``start_cm`` to 1 over ``length_cm``, blurred by σ.

    A ramp is the mean of edges spread evenly over its length, so the blurred ramp is the mean of
    Φ: [G(z - start) - G(z - start - length)]/length with G(u) = u·Φ(u/σ) + σ·φ(u/σ).
    """
    from_start = _integrated_rise(z_cm - start_cm, sigma_cm)
    from_end = _integrated_rise(z_cm - start_cm - length_cm, sigma_cm)
    return (from_start - from_end) / length_cm


def _integrated_rise(u_cm: Profile, sigma_cm: float) -> Profile:
    v = u_cm / sigma_cm
    density = np.exp(-0.5 * v**2) / np.sqrt(2.0 * np.pi)
    integral: Profile = u_cm * ndtr(v) + sigma_cm * density
    return integral


def open_profile(
    z_cm: Profile,
    *,
    inferior_edge_cm: float,
    superior_edge_cm: float,
    inferior_sigma_cm: float,
    superior_sigma_cm: float,
    transmission: float,
) -> Profile:
    """Return one beam's profile: 1 inside its edges, ``transmission`` far outside.

    It is t + (1 - t)·[Φ((z - inferior)/σ) - Φ((z - superior)/σ)].
    """
    inside = edge_rise(z_cm, inferior_edge_cm, inferior_sigma_cm) - edge_rise(
        z_cm, superior_edge_cm, superior_sigma_cm
    )
    return transmission + (1.0 - transmission) * inside
