from __future__ import annotations

from typing import TYPE_CHECKING

import pytest
from spine_course import machine, sequence, spine

from featherlog.sequence.planning import plan_course

if TYPE_CHECKING:
    from featherlog.junction.plan import Plan


@pytest.fixture(scope="session")
def plan() -> Plan:
    """Give six fractions at three positions 1 cm apart, two at each."""
    order = sequence(positions="ABC", block_fractions=2)
    return plan_course(spine(fractions=6, order=order), machine())
