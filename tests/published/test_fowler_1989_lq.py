"""Fowler, Br J Radiol 1989;62:679: the linear-quadratic formula's standard schedule.

Values from memory of the paper.
"""

from __future__ import annotations

import pytest

from featherlog.dose.biology import bed


@pytest.mark.parametrize(("alpha_beta_gy", "expected_gy"), [(10.0, 72.0), (3.0, 100.0)])
def test_30_fractions_of_2_gy(alpha_beta_gy: float, expected_gy: float) -> None:
    assert bed([2.0] * 30, alpha_beta_gy) == pytest.approx(expected_gy)
