from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from featherlog.words import figure, head_first, meterset, patient_position, signed


@pytest.mark.parametrize(
    ("value", "text"),
    [(9.6, "9.6"), (-9.65, "−9.65"), (0.0, "0.0"), (-0.001, "0.0"), (352.0, "352.0")],
)
def test_a_length_keeps_the_decimals_it_needs(value: float, text: str) -> None:
    assert figure(value) == text


@given(st.integers(-99999, 99999))
def test_a_hundredth_of_a_centimetre_is_never_lost(hundredths: int) -> None:
    shown = figure(hundredths / 100)
    assert round(float(shown.replace("−", "-")) * 100) == hundredths


@pytest.mark.parametrize(("value", "text"), [(1.0, "+1.0"), (-1.0, "−1.0"), (0.0, "0.0")])
def test_a_move_carries_its_sign(value: float, text: str) -> None:
    assert signed(value) == text


@pytest.mark.parametrize(("value", "text"), [(112.0, "112"), (103.5, "103.5"), (100.0, "100")])
def test_a_meterset_has_no_trailing_zero_to_misread(value: float, text: str) -> None:
    assert meterset(value) == text


def test_patient_position_is_spelled_out_and_an_unknown_one_left_alone() -> None:
    assert patient_position("FFP") == "FFP, feet first, prone"
    assert patient_position("HFDR") == "HFDR"
    assert (head_first("HFP"), head_first("FFS"), head_first("HFDR")) == (True, False, None)
