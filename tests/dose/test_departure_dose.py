"""Strips where fields were apart, for ideal edges: thirteen fractions of 1.8 Gy, step 1 cm."""

from __future__ import annotations

import pytest
from small_plans import half_beam_plan

from featherlog.dose.departure_dose import PlaceDose, field_doses, given_in, strip_doses
from featherlog.sequence.progress import DeliveredBeam

SEQUENCE = "AAAAABBBBBCCC"
PLAN = half_beam_plan(SEQUENCE, 1.8)
FIELD = {field.beams[0].beam: field.field for field in PLAN.positions[0].fields}


def given(fraction: int, upper: str, lower: str, percent: float = 100.0) -> list[DeliveredBeam]:
    return [
        DeliveredBeam(fraction, FIELD[name], name, label, percent, 100.0)
        for name, label in (("UPPER", upper), ("LOWER", lower))
    ]


def strips(
    deliveries: list[DeliveredBeam], fraction: int, week: set[int] | None = None
) -> tuple[PlaceDose, ...]:
    what = given_in(PLAN, deliveries, fraction, week or {fraction})
    return strip_doses(PLAN, deliveries, fraction, what)


@pytest.mark.parametrize(
    ("upper", "lower", "fraction_gy", "percent", "total_gy"),
    [("A", "B", 0.0, 0.0, 21.6), ("B", "A", 3.6, 200.0, 25.2)],
)
def test_one_field_late_for_one_fraction(
    upper: str, lower: str, fraction_gy: float, percent: float, total_gy: float
) -> None:
    (strip,) = strips(given(6, upper, lower), 6)
    assert strip.place.startswith("strip at ")
    assert (strip.width_cm, strip.fraction_planned_gy) == pytest.approx((1.0, 1.8))
    assert (strip.fraction_gy, strip.fraction_percent) == pytest.approx((fraction_gy, percent))
    assert (strip.total_gy, strip.total_planned_gy) == pytest.approx((total_gy, 23.4))
    assert strip.total_percent == pytest.approx(100 * total_gy / 23.4)
    assert strip.week_gy == pytest.approx(fraction_gy - 1.8)


@pytest.mark.parametrize(("upper", "lower", "total_gy"), [("A", "B", 14.4), ("B", "A", 32.4)])
def test_one_field_late_for_a_block_of_five(upper: str, lower: str, total_gy: float) -> None:
    deliveries = [row for number in range(6, 11) for row in given(number, upper, lower)]
    (strip,) = strips(deliveries, 8, set(range(6, 11)))
    assert strip.total_gy == pytest.approx(total_gy)
    assert strip.week_gy == pytest.approx(total_gy - 23.4)


def test_a_field_moved_the_wrong_way_leaves_a_strip_two_steps_wide() -> None:
    (strip,) = strips(given(6, "A", "C"), 6)
    assert (strip.width_cm, strip.fraction_percent) == pytest.approx((2.0, 0.0))


def test_strips_with_another_history_are_told_apart() -> None:
    deliveries = [*given(6, "A", "B"), *given(7, "A", "C")]
    found = [(strip.width_cm, strip.total_gy) for strip in strips(deliveries, 7)]
    assert found == [pytest.approx((1.0, 21.6)), pytest.approx((1.0, 19.8))]


def test_fields_together_leave_no_strip() -> None:
    assert strips(given(6, "C", "C"), 6) == ()


@pytest.mark.parametrize(
    ("fraction", "percent", "fraction_percent", "total_gy"),
    [
        (14, 100.0, 100.0, 25.2),
        (6, 110.0, 110.0, 23.58),
        # What is missing is still to come.
        (6, 40.0, 40.0, 23.4),
    ],
)
def test_whole_fields_of_extra_and_partial_fractions(
    fraction: int, percent: float, fraction_percent: float, total_gy: float
) -> None:
    deliveries = given(fraction, "B", "B", percent)
    found = field_doses(PLAN, given_in(PLAN, deliveries, fraction, {fraction}))
    assert [(place.place, place.width_cm) for place in found] == [
        (FIELD["UPPER"], None),
        (FIELD["LOWER"], None),
    ]
    for place in found:
        assert place.fraction_percent == pytest.approx(fraction_percent)
        assert place.total_gy == pytest.approx(total_gy)


def test_a_field_given_as_planned_is_not_named() -> None:
    short = [given(6, "B", "B")[0], given(6, "B", "B", 50.0)[1]]
    (place,) = field_doses(PLAN, given_in(PLAN, short, 6, {6}))
    assert place.place == FIELD["LOWER"]
