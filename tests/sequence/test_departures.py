from __future__ import annotations

from datetime import datetime, timedelta
from itertools import product
from typing import TYPE_CHECKING

import pytest
from deliveries import deliver
from spine_course import machine, spine

from featherlog.sequence.departures import (
    COHERENT,
    INCOHERENT,
    MINOR,
    Departure,
    MeasuredGap,
    again_departures,
    beams_by_field,
    expected_gap_cm,
    gap_departures,
    halt_departures,
    interval_departures,
    meterset_departures,
    order_departures,
    position_departures,
    table_departures,
)
from featherlog.sequence.planning import plan_course

if TYPE_CHECKING:
    from featherlog.junction.plan import Plan


def at(brain: str, upper: str, lower: str) -> dict[str, str]:
    return {"BRAIN": brain, "UPPER": upper, "LOWER": lower}


@pytest.mark.parametrize("where", [at("B", "B", "B"), {"UPPER": "B"}, {}])
def test_fields_where_they_were_planned_are_no_departure(plan: Plan, where: dict[str, str]) -> None:
    assert position_departures(plan, "B", where, {}) == ()


def test_fields_together_at_another_position_change_only_the_shares(plan: Plan) -> None:
    shares = {"A": 6, "B": 4, "C": 3.5}
    (found,) = position_departures(plan, "B", at("A", "A", "A"), shares)
    assert found == Departure(
        "other position",
        COHERENT,
        "all fields treated at A, planned B: shares become A 6, B 4, C 3.5",
    )


@pytest.mark.parametrize(
    ("where", "strips"),
    [
        # The upper field left behind ends 1 cm above where the lower field now begins.
        (at("B", "A", "B"), ("twice the dose", "no dose")),
        (at("B", "B", "A"), (None, "twice the dose")),
        (at("A", "B", "B"), ("no dose", None)),
    ],
)
def test_a_field_left_behind_leaves_a_strip_one_step_wide(
    plan: Plan, where: dict[str, str], strips: tuple[str | None, ...]
) -> None:
    (found,) = position_departures(plan, "B", where, {})
    assert (found.kind, found.grade) == ("fields apart", INCOHERENT)
    places = ", ".join(f"{field} at {place}" for field, place in where.items())
    shown = "; ".join(
        f"a strip of 1.0 cm at {junction} got {what} of this fraction (ideal edges)"
        for junction, what in zip(("J1", "J2"), strips, strict=True)
        if what
    )
    assert found.detail == f"{places}, planned B: {shown}"


def test_the_wrong_direction_leaves_a_strip_two_steps_wide() -> None:
    either_way = plan_course(spine(offsets_cm=(0.0, -1.0, 1.0)), machine())
    (found,) = position_departures(either_way, "B", at("B", "B", "C"), {})
    assert "a strip of 2.0 cm at J2 got twice the dose of this fraction" in found.detail


def test_only_fields_that_received_meterset_have_a_position(plan: Plan) -> None:
    rows = [*deliver(plan, 1, LOWER=None), *deliver(plan, 1, part=0, BRAIN=None, UPPER=None)]
    assert beams_by_field(rows) == {"BRAIN": "A", "UPPER": "A"}


def test_a_meterset_beyond_tolerance_is_named_with_its_figures() -> None:
    found = meterset_departures({"u": 0.4, "l": 1.03, "b": 1.0}, dict.fromkeys("ulb", 200.0), 2.0)
    assert found == (
        Departure("meterset short", MINOR, "beam u has had 80.0 of 200.0 MU (−60.0 %)"),
        Departure("meterset over", MINOR, "beam l has had 206.0 of 200.0 MU (+3.0 %)"),
    )


@pytest.mark.parametrize("part", [0.98, 1.02])
def test_a_meterset_at_its_tolerance_is_within_it(part: float) -> None:
    assert meterset_departures({"u": part}, {"u": 100.0}, 2.0) == ()


def test_a_measured_gap_beyond_tolerance_is_named_with_its_figures() -> None:
    within, beyond = (MeasuredGap("J1", "posterior", gap, 1.7, 0.3) for gap in (2.0, 1.3))
    assert gap_departures((within, beyond)) == (
        Departure(
            "skin gap",
            MINOR,
            "gap on the posterior skin at J1 measured +1.30 cm, expected +1.70 ± 0.30 cm",
        ),
    )


@pytest.mark.parametrize(
    ("fraction", "expected", "found"),
    [
        (3, 3, []),
        (4, 3, [("fraction order", "fraction 4 recorded, fraction 3 was due")]),
        (3, None, [("fraction order", "fraction 3 recorded, no fraction was due")]),
        (7, None, [("extra fraction", "fraction 7 is beyond the 6 prescribed")]),
    ],
)
def test_the_order_of_fractions(
    fraction: int, expected: int | None, found: list[tuple[str, str]]
) -> None:
    departures = order_departures(fraction, expected, 6, confirmed=True, approved=True)
    assert [(each.kind, each.detail) for each in departures] == found


def test_what_was_treated_without_confirmation_or_approval() -> None:
    found = order_departures(2, 2, 6, confirmed=False, approved=False)
    assert [each.kind for each in found] == ["not approved", "not confirmed"]


@pytest.mark.parametrize(("upper", "lower"), list(product("ABC", repeat=2)))
def test_the_gap_of_fields_apart_is_where_their_edges_are(
    plan: Plan, upper: str, lower: str
) -> None:
    """On the skin at y = 0: where the upper field's lower edge is, less the lower's upper edge."""
    above, below = plan.position(upper).fields[1].beams[0], plan.position(lower).fields[2].beams[0]
    ends = (above.inferior_edge, below.superior_edge)
    z = [edge.offset_cm / edge.normal[2] for edge in ends]
    found = expected_gap_cm(plan, "J2", "posterior", upper, lower)
    assert found == pytest.approx(z[0] - z[1], abs=1e-6)


def test_a_skin_whose_gap_is_not_known_has_none_to_expect(plan: Plan) -> None:
    assert expected_gap_cm(plan, "J2", "anterior", "A", "B") is None


NOON = datetime.fromisoformat("2031-03-03T12:00:00+01:00")


@pytest.mark.parametrize(
    ("others", "detail"),
    [
        ({3: -6.0}, None),
        ({4: -1.0}, None),
        ({3: -5.5, 2: -26.0}, "5.5 h after fraction 3, at least 6.0 h are asked"),
        ({3: -5.5, 5: 2.25}, "2.25 h before fraction 5, at least 6.0 h are asked"),
    ],
)
def test_the_interval_to_the_nearest_other_fraction(
    others: dict[int, float], detail: str | None
) -> None:
    times = [(number, NOON + timedelta(hours=hours)) for number, hours in others.items()]
    found = [departure.detail for departure in interval_departures(4, NOON, times, 6.0)]
    assert found == ([f"fraction 4 was treated {detail}"] if detail else [])


def test_the_table_is_compared_by_differences(plan: Plan) -> None:
    """The isocentres of the spine fields lie 30 cm apart, those of brain and upper spine 23."""
    where = at("A", "A", "A")
    readings = {"BRAIN": 81.0, "UPPER": 104.1, "LOWER": 134.1}
    assert table_departures(plan, readings, where, 0.2) == ()
    (found,) = table_departures(plan, readings | {"LOWER": 133.0}, where, 0.2)
    assert found == Departure(
        "table",
        MINOR,
        "from UPPER to LOWER the table moved +28.9 cm (longitudinal), planned +30.0 ± 0.2 cm",
    )


def test_what_was_delivered_again_is_told_beam_by_beam(plan: Plan) -> None:
    (found,) = again_departures(3, deliver(plan, 3, part=0.5, BRAIN=None))
    assert (
        found.detail
        == "fraction 3 was complete and was delivered again: upper 50.5 MU, lower 50.5 MU"
    )


@pytest.mark.parametrize("halted", ["", "paused", "ended"])
def test_a_course_that_was_not_to_be_treated(halted: str) -> None:
    found = [departure.detail for departure in halt_departures(3, halted)]
    assert found == ([f"fraction 3 was treated with the course {halted}"] if halted else [])
