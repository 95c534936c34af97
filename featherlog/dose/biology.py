"""Linear-quadratic isoeffect doses, summed fraction by fraction.

There is no repopulation and no incomplete-repair term (Fowler, BJR 1989;62:679).
"""

from __future__ import annotations

from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Iterable


def bed(doses_per_fraction_gy: Iterable[float], alpha_beta_gy: float) -> float:
    """Return the biologically effective dose (Gy): Σ d·(1 + d/(α/β)).

    The sum runs over the true dose of each fraction: the mean dose would give too little.
    """
    return sum(dose * (1.0 + dose / alpha_beta_gy) for dose in doses_per_fraction_gy)


def eqd2(doses_per_fraction_gy: Iterable[float], alpha_beta_gy: float) -> float:
    """Return the dose (Gy) in 2 Gy fractions with the same effect: BED/(1 + 2/(α/β))."""
    return bed(doses_per_fraction_gy, alpha_beta_gy) / (1.0 + 2.0 / alpha_beta_gy)
