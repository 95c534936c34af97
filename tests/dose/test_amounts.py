from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

import pytest
from small_plans import beam, half_beam_plan, plan, position

from featherlog.dose.amounts import (
    completed_dose_gy,
    delivered_amounts,
    earlier_amounts,
    has_unfinished,
    planned_amounts,
    predicted_amounts,
    unfeathered_amounts,
)
from featherlog.junction.plan import FractionStep
from featherlog.sequence.progress import DeliveredBeam

if TYPE_CHECKING:
    from featherlog.junction.plan import Plan


def whole(fraction: int, beam_name: str, label: str) -> DeliveredBeam:
    return DeliveredBeam(fraction, "field", beam_name, label, 100.0, 100.0)


def both(fraction: int, label: str) -> list[DeliveredBeam]:
    return [whole(fraction, "UPPER", label), whole(fraction, "LOWER", label)]


def part(fraction: int, beam_name: str, label: str, percent: float) -> DeliveredBeam:
    return DeliveredBeam(fraction, "field", beam_name, label, 1.2 * percent, 120.0)


def test_the_plan_gives_each_position_its_fractions() -> None:
    amounts = planned_amounts(half_beam_plan("AABC", 2.0))
    assert amounts == {
        (label, name): gy
        for label, gy in (("A", 4.0), ("B", 2.0), ("C", 2.0))
        for name in ("UPPER", "LOWER")
    }


def test_a_fields_dose_is_divided_by_the_weights_of_its_beams() -> None:
    laterals = [
        beam(name, inferior_jaw_cm=0.0, superior_jaw_cm=9.0, gantry_deg=gantry, weight=weight)
        for name, gantry, weight in (("LEFT", 90.0, 0.6), ("RIGHT", 270.0, 0.4))
    ]
    p = plan([position("A", [laterals])], [("A", 2.0), ("A", 1.5)])
    assert planned_amounts(p) == pytest.approx({("A", "LEFT"): 2.1, ("A", "RIGHT"): 1.4})


def test_without_a_shift_everything_goes_to_the_first_position() -> None:
    amounts = unfeathered_amounts(half_beam_plan("BBC", 2.0))
    assert amounts == {("A", "UPPER"): 6.0, ("A", "LOWER"): 6.0}


def test_parts_of_one_fraction_add_up_at_the_positions_they_were_given_at() -> None:
    p = half_beam_plan("AB", 2.0)
    deliveries = [part(1, "UPPER", "A", 40), part(1, "UPPER", "A", 60), part(2, "UPPER", "C", 50)]
    assert delivered_amounts(p, deliveries) == pytest.approx(
        {("A", "UPPER"): 2.0, ("C", "UPPER"): 1.0}
    )


def test_a_fraction_beyond_the_prescribed_number_adds_the_last_fractions_dose() -> None:
    p = plan(half_beam_plan("A").positions, [("A", 1.8), ("A", 2.5)])
    assert delivered_amounts(p, [whole(3, "UPPER", "B")]) == {("B", "UPPER"): 2.5}


def test_before_the_first_fraction_the_prediction_is_the_plan() -> None:
    p = half_beam_plan("AABC")
    assert predicted_amounts(p, []) == pytest.approx(planned_amounts(p))


def test_after_a_coherent_departure_only_the_shares_change() -> None:
    p = half_beam_plan("AB", 2.0)
    amounts = predicted_amounts(p, both(1, "B"))
    assert {key: gy for key, gy in amounts.items() if gy} == {
        ("B", "UPPER"): 4.0,
        ("B", "LOWER"): 4.0,
    }


def test_a_broken_fraction_is_finished_where_it_began() -> None:
    p = half_beam_plan("AB", 2.0)
    amounts = predicted_amounts(p, [*both(1, "A"), part(2, "UPPER", "A", 30)])
    assert amounts == pytest.approx({("A", "UPPER"): 4.0, ("A", "LOWER"): 4.0})


def test_where_a_fraction_began_is_where_its_first_part_was_given() -> None:
    begun = [part(1, "UPPER", "A", 30), part(1, "UPPER", "B", 50)]
    assert predicted_amounts(half_beam_plan("C", 2.0), begun) == pytest.approx(
        {("A", "UPPER"): 1.0, ("B", "UPPER"): 1.0, ("A", "LOWER"): 2.0}
    )


def test_too_much_meterset_is_dose_and_leaves_nothing_to_come() -> None:
    p = half_beam_plan("A", 2.0)
    amounts = predicted_amounts(p, [part(1, "UPPER", "A", 110)])
    assert amounts == pytest.approx({("A", "UPPER"): 2.2, ("A", "LOWER"): 2.0})


@pytest.mark.parametrize(("percent", "dose_gy"), [(97.9, 1.8), (98.0, 3.6), (100.0, 3.6)])
def test_a_fraction_counts_once_every_beam_has_its_meterset_within_tolerance(
    percent: float, dose_gy: float
) -> None:
    p = half_beam_plan("AAA", 1.8)
    begun = [*both(1, "A"), whole(2, "UPPER", "A"), part(2, "LOWER", "A", percent)]
    assert completed_dose_gy(p, begun, 2.0) == pytest.approx(dose_gy)


@pytest.mark.parametrize(
    ("given", "unfinished"),
    [
        ([], False),
        (both(1, "A"), False),
        ([*both(1, "A"), whole(2, "UPPER", "A")], True),
        # A fraction beyond the prescribed number can be left unfinished, too.
        ([*both(1, "A"), *both(2, "A"), part(3, "UPPER", "A", 40)], True),
        ([whole(1, "UPPER", "A"), part(1, "LOWER", "A", 98.5)], False),
    ],
)
def test_an_unfinished_fraction_is_seen(given: list[DeliveredBeam], *, unfinished: bool) -> None:
    assert has_unfinished(half_beam_plan("AA"), given, 2.0) is unfinished


def test_a_fraction_beyond_the_prescribed_number_is_not_prescribed_dose() -> None:
    assert completed_dose_gy(half_beam_plan("A", 1.8), both(2, "A"), 2.0) == 0.0


def split_plan() -> Plan:
    """Two fractions of 2 Gy, a quarter at A and three quarters at B."""
    steps = (FractionStep("A", 0.25), FractionStep("B", 0.75))
    whole_plan = half_beam_plan("AB", 2.0)
    fractions = tuple(replace(fraction, steps=steps) for fraction in whole_plan.fractions)
    return replace(whole_plan, fractions=fractions)


def test_split_fractions_give_each_position_its_part() -> None:
    amounts = planned_amounts(split_plan())
    for name in ("UPPER", "LOWER"):
        assert (amounts["A", name], amounts["B", name]) == pytest.approx((1.0, 3.0))


@pytest.mark.parametrize(
    ("given", "a_gy", "b_gy"),
    [
        ([], 1.0, 3.0),
        # The rest of a broken step is still to come where it was planned.
        ([part(1, "UPPER", "A", 10)], 1.0, 3.0),
        ([part(1, "UPPER", "A", 25), part(1, "UPPER", "B", 30)], 1.0, 3.0),
        # What went to another position stays there: half of the fraction at A.
        ([part(1, "UPPER", "A", 50)], 1.5, 2.5),
    ],
)
def test_a_split_fractions_remainder_is_given_step_by_step(
    given: list[DeliveredBeam], a_gy: float, b_gy: float
) -> None:
    amounts = predicted_amounts(split_plan(), given)
    assert (amounts["A", "UPPER"], amounts["B", "UPPER"]) == pytest.approx((a_gy, b_gy))
    assert (amounts["A", "LOWER"], amounts["B", "LOWER"]) == pytest.approx((1.0, 3.0))


def test_a_split_fraction_is_complete_by_the_sum_of_its_steps() -> None:
    steps = [
        part(1, name, label, percent)
        for name in ("UPPER", "LOWER")
        for label, percent in (("A", 25), ("B", 75))
    ]
    assert completed_dose_gy(split_plan(), steps, 2.0) == pytest.approx(2.0)
    assert completed_dose_gy(split_plan(), steps[:-1], 2.0) == 0.0


def with_fields(of: Plan, **changes: object) -> Plan:
    """Return the plan with the first field's values changed at every position."""
    return replace(
        of,
        positions=tuple(
            replace(each, fields=(replace(each.fields[0], **changes), *each.fields[1:]))
            for each in of.positions
        ),
    )


def test_a_field_with_its_own_dose_gets_that_in_every_fraction() -> None:
    own = with_fields(half_beam_plan("AAB", 2.0), dose_per_fraction_gy=1.5)
    assert planned_amounts(own) == pytest.approx(
        {("A", "UPPER"): 3.0, ("A", "LOWER"): 4.0, ("B", "UPPER"): 1.5, ("B", "LOWER"): 2.0}
    )
    assert delivered_amounts(own, [part(1, "UPPER", "A", 50)]) == pytest.approx(
        {("A", "UPPER"): 0.75}
    )
    split = with_fields(split_plan(), dose_per_fraction_gy=1.0)
    assert planned_amounts(split)["B", "UPPER"] == pytest.approx(1.5)


def test_an_earlier_courses_dose_is_whole_from_the_first_and_never_given_again() -> None:
    of = with_fields(half_beam_plan("AB", 2.0), earlier_course="2029", earlier_dose_gy=30.0)
    assert earlier_amounts(of) == {("A", "UPPER"): 30.0}
    for amounts in (planned_amounts(of), predicted_amounts(of, []), unfeathered_amounts(of)):
        assert {name for _, name in amounts} == {"LOWER"}
    # A fraction of this course is complete without it.
    assert completed_dose_gy(of, [whole(1, "LOWER", "A")], 2.0) == pytest.approx(2.0)
