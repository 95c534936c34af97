from __future__ import annotations

import pytest

from featherlog.dose.biology import bed, eqd2


def test_unequal_fractions_are_summed_one_by_one_not_by_their_mean() -> None:
    assert bed([1.8] * 15 + [2.34] * 5, 2.0) == pytest.approx(76.689, abs=5e-4)
    assert bed([38.7 / 20] * 20, 2.0) == pytest.approx(76.142, abs=5e-4)


def test_dose_in_2_gy_fractions_is_its_own_equivalent() -> None:
    assert eqd2([2.0] * 25, 3.0) == pytest.approx(50.0)


def test_larger_fractions_count_for_more() -> None:
    assert eqd2([3.0] * 10, 2.0) == pytest.approx(37.5)
