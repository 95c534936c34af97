"""Nieder et al., Int J Radiat Oncol Biol Phys 2006;66:1446: BED of re-irradiated spinal cord.

Cord doses are stated there with α/β of 2 Gy (cervical and thoracic) and 4 Gy (lumbar).
"""

from __future__ import annotations

import pytest

from featherlog.dose.biology import bed


@pytest.mark.parametrize(("alpha_beta_gy", "expected_gy"), [(2.0, 100.0), (4.0, 75.0)])
def test_25_fractions_of_2_gy(alpha_beta_gy: float, expected_gy: float) -> None:
    assert bed([2.0] * 25, alpha_beta_gy) == pytest.approx(expected_gy)
