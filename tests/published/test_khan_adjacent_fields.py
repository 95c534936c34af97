"""Adjacent fields of Khan, The Physics of Radiation Therapy (from memory).

Two fields of lengths L1 and L2 on the skin, at source-skin distances SSD1 and SSD2, meet at depth
d when the gap on the skin is ½·L1·d/SSD1 + ½·L2·d/SSD2. Opposed pairs that all meet at d leave, at
depth z, a three-field overlap of ½(L1 - L2)(z - d)/SSD. Craniospinal laterals turn the collimator
by atan(spine jaw/SAD) and the couch by atan(own jaw/SAD).
"""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

import pytest
from hypothesis import given
from hypothesis import strategies as st
from spine_course import beam, junction, machine, pair

from featherlog.exchange.design_file import read_design
from featherlog.exchange.machine_file import read_machine
from featherlog.junction.design import Beam, Side
from featherlog.junction.hand_check import (
    COLLIMATOR_RULE,
    COUCH_RULE,
    GAP_RULE,
    OVERLAP_RULE,
    hand_checks,
)
from featherlog.junction.solve import solve

if TYPE_CHECKING:
    from featherlog.junction.plan import JunctionSetting

FIXTURES = Path(__file__).parents[2] / "fixtures"
SAD = 100.0
length = st.floats(4, 40)
ssd = st.floats(70, 130)


def opposed(name: str, half_length_cm: float, toward: int, depth_cm: float) -> list[Beam]:
    """Give an anterior and a posterior beam at SSD 100 whose edges meet at mid-depth."""
    z = toward * half_length_cm * (SAD + depth_cm) / SAD
    return [beam(f"{name}-AP", 0, (0, -depth_cm, z)), beam(f"{name}-PA", 180, (0, depth_cm, z))]


def matched_pairs(
    upper_cm: float, lower_cm: float, depth_cm: float, z_cm: float
) -> JunctionSetting:
    between = junction(
        "J",
        (0, -depth_cm, 0),
        depth_cm,
        entrance=Side.ANTERIOR,
        thickness_cm=2 * depth_cm,
        critical_depth_cm=z_cm,
    )
    upper = opposed("upper", upper_cm / 2, 1, depth_cm)
    lower = opposed("lower", lower_cm / 2, -1, depth_cm)
    return solve(pair(upper, lower, between), machine())[0].junction("J")


def test_mantle_and_para_aortic_fields() -> None:
    found = matched_pairs(30, 15, 10, 15)
    for skin in found.skin_gaps:
        assert skin.exact_cm == pytest.approx(2.25)
        assert skin.superior_part_cm == pytest.approx(1.50, abs=1e-5)
        assert skin.inferior_part_cm == pytest.approx(0.75, abs=1e-5)
    assert [skin.side for skin in found.skin_gaps] == ["anterior", "posterior"]
    assert found.three_field_overlap_cm == pytest.approx(0.375, abs=1e-5)
    assert found.gap_without_overlap_cm == pytest.approx(2.625, abs=1e-5)


def test_the_shipped_design_of_that_case_gives_its_numbers_by_hand_and_by_planes() -> None:
    on = read_machine(FIXTURES / "standard_100cm.toml")
    course = read_design(FIXTURES / "mantle_para_aortic.toml", on)
    settings = solve(course, on)
    found = {check.formula: check for check in hand_checks(course, settings)}
    expected = {GAP_RULE: 2.25, OVERLAP_RULE: 0.375}
    for rule, figure in expected.items():
        assert found[rule].by_formula == pytest.approx(figure)
        assert found[rule].exact == pytest.approx(figure)
    assert settings[0].junction("upper abdomen").gap_without_overlap_cm == pytest.approx(2.625)


@given(length, length, st.floats(5, 12), st.floats(0, 12))
def test_three_field_overlap(upper: float, lower: float, depth: float, beyond: float) -> None:
    found = matched_pairs(upper, lower, depth, depth + beyond)
    expected = abs(upper - lower) / 2 * beyond / SAD
    assert found.three_field_overlap_cm == pytest.approx(expected, abs=1e-5)


@given(
    st.tuples(length, length), st.tuples(ssd, ssd), st.floats(1, 15), st.sampled_from([0.0, 180.0])
)
def test_gap_of_two_fields_at_any_distance(
    lengths: tuple[float, float], ssds: tuple[float, float], depth: float, gantry: float
) -> None:
    entrance, inward = (Side.ANTERIOR, 1) if gantry == 0 else (Side.POSTERIOR, -1)

    def posed(name: str, length_cm: float, ssd_cm: float, toward: int) -> list[Beam]:
        z = toward * length_cm / 2 * (ssd_cm + depth) / ssd_cm
        return [beam(name, gantry, (0, inward * (SAD - ssd_cm), z))]

    between = junction("J", (0, 0, 0), depth, entrance=entrance)
    upper, lower = (posed(*each) for each in zip("ul", lengths, ssds, (1, -1), strict=True))
    course = pair(upper, lower, between)
    (skin,) = solve(course, machine())[0].junction("J").skin_gaps
    expected = sum(long / 2 * depth / far for long, far in zip(lengths, ssds, strict=True))
    assert skin.exact_cm == pytest.approx(expected, abs=1e-9)


@pytest.mark.parametrize(("spine_cm", "degrees"), [(15.0, 4.3), (36.0, 10.2)])
def test_collimator_of_laterals_over_a_spine_field(spine_cm: float, degrees: float) -> None:
    found = by_formula(COLLIMATOR_RULE, spine_cm=spine_cm, lateral_cm=20.0)
    assert found == pytest.approx(degrees, abs=0.05)


def test_couch_of_laterals_of_20_cm() -> None:
    found = by_formula(COUCH_RULE, spine_cm=15.0, lateral_cm=20.0)
    assert found == pytest.approx(5.7, abs=0.05)


def by_formula(rule: str, *, spine_cm: float, lateral_cm: float) -> float:
    """Return a textbook angle for fields of those lengths, the match point at isocentre level."""
    lateral = beam("lateral", 90, (0, 0, lateral_cm / 2))
    spine = beam("spine", 180, (0, 0, -spine_cm / 2))
    between = junction("J", (0, 0, 0), 0.0, turned_field="UPPER")
    course = pair([lateral], [spine], between)
    found = {check.formula: check for check in hand_checks(course, solve(course, machine()))}
    return found[rule].by_formula
