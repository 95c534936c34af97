"""What differs from the plan is recorded and named, never refused."""

from __future__ import annotations

from typing import TYPE_CHECKING

import pytest
from department import (
    AUTHOR,
    BREAST,
    CHECKER,
    PHYSICIAN,
    SECOND,
    THERAPIST,
    THIGH,
    by,
    confirmed,
    moment,
    recorded,
    said,
    treated,
)
from program import SCENARIO

from featherlog.actions.departures import explain, list_departures
from featherlog.actions.designs import approve, check, prepare
from featherlog.actions.desk import practice_time
from featherlog.actions.record import record
from featherlog.actions.review import review
from featherlog.actions.today import today
from featherlog.errors import NotFoundError, RefusedError

if TYPE_CHECKING:
    from program import Program

    from featherlog.actions.record import Recorded

COHERENT = ("other position", "coherent")
INCOHERENT = ("fields apart", "incoherent")
UNCONFIRMED = ("not confirmed", "for review")


def _kinds(done: Recorded) -> list[tuple[str, str]]:
    return [(departure.kind, departure.grade) for departure in done.departures]


def test_as_confirmed_nothing_differs(department: Program) -> None:
    done = treated(department.database, THIGH, "2026-03-02")
    assert (done.departures, done.positions) == ((), (("upper thigh", "A"), ("lower thigh", "A")))


def test_all_fields_elsewhere_are_coherent(department: Program) -> None:
    done = treated(department.database, THIGH, "2026-03-02", position="B")
    assert _kinds(done) == [COHERENT]
    assert done.departures[0].detail == (
        "all fields treated at B, planned A: shares become A 4, B 6, C 5"
    )


def test_naming_every_field_is_the_same_as_the_position(department: Program) -> None:
    everywhere = {"upper thigh": "B", "lower thigh": "B"}
    done = recorded(department.database, THIGH, "2026-03-02", field_positions=everywhere)
    assert _kinds(done) == [UNCONFIRMED, COHERENT]


def test_one_field_elsewhere_is_incoherent(department: Program) -> None:
    done = treated(department.database, THIGH, "2026-03-02", field_positions={"lower thigh": "C"})
    assert _kinds(done) == [INCOHERENT]
    assert "2.0 cm" in done.departures[0].detail


def test_a_gap_out_of_tolerance_is_kept_and_named(department: Program) -> None:
    gaps = {"mid thigh": 2.4, "mid thigh:posterior": 2.9}
    done = treated(department.database, THIGH, "2026-03-02", gaps_cm=gaps)
    assert [departure.detail for departure in done.departures] == [
        "gap on the posterior skin at mid thigh measured +2.90 cm, expected +2.32 ± 0.20 cm"
    ]


def test_a_meterset_within_its_tolerance_is_complete(department: Program) -> None:
    """The practice machine allows one percent of 112 MU."""
    done = treated(department.database, THIGH, "2026-03-02", metersets_mu={"AP upper": 111.0})
    assert (done.complete, done.departures) == (True, ())


def test_an_extra_fraction_takes_the_next_number(department: Program) -> None:
    for number in range(1, 16):
        recorded(department.database, THIGH, "2026-03-02", fraction=number, position="A")
    extra = [recorded(department.database, THIGH, "2026-03-03", position="C") for _ in range(2)]
    assert [done.fraction for done in extra] == [16, 17]
    assert ("extra fraction", "for review") in _kinds(extra[0])
    found = review(department.database, THIGH)
    assert [row.fraction for row in found.grid][-2:] == [16, 17]
    assert found.sides[0].superior_gy == pytest.approx(34.0)


def test_a_fraction_out_of_order_leaves_the_one_before_due(department: Program) -> None:
    done = recorded(department.database, THIGH, "2026-03-02", fraction=3, position="A")
    assert _kinds(done) == [("fraction order", "for review"), UNCONFIRMED]
    assert (done.next_fraction, done.next_position) == (1, "A")


def test_treatment_before_approval_is_recorded(department: Program) -> None:
    text = (SCENARIO / "breast.toml").read_text(encoding="utf-8")
    design = department.folder / "early.toml"
    design.write_text(text.replace("FH-2042", "FH-2044"), encoding="utf-8")
    prepare(department.database, design, by=by(AUTHOR))
    done = recorded(department.database, "FH-2044", "2026-03-04", position="A")
    assert ("not approved", "for review") in _kinds(done)
    assert today(department.database, "FH-2044").status == "stop"


def test_the_remainder_is_due_at_the_position_where_the_fraction_began(
    department: Program,
) -> None:
    part = {"SCV anterior": 100.0, "lateral tangent": 0.0}
    treated(department.database, BREAST, "2026-03-04", position="C", metersets_mu=part)
    confirmed(department.database, BREAST, "2026-03-05")
    done = recorded(department.database, BREAST, "2026-03-05")
    assert (done.fraction, done.complete) == (1, True)
    assert done.positions == (("supraclavicular", "C"), ("tangents", "C"))
    assert (done.next_fraction, done.next_position, done.next_date) == (2, "B", "2026-03-06")


def test_a_confirmation_is_good_for_one_record(department: Program) -> None:
    confirmed(department.database, THIGH, "2026-03-02")
    recorded(department.database, THIGH, "2026-03-02", metersets_mu={"AP upper": 50.0})
    done = recorded(department.database, THIGH, "2026-03-02", position="A")
    assert UNCONFIRMED in _kinds(done)


def test_a_reason_closes_what_it_was_given_for(department: Program) -> None:
    done = treated(department.database, THIGH, "2026-03-02", position="B", reason=" misread ")
    assert done.explained
    [line] = list_departures(department.database, THIGH)
    assert line.reason == "misread"


def test_a_reason_can_follow(department: Program) -> None:
    done = treated(department.database, THIGH, "2026-03-02", position="B")
    assert not done.explained
    explain(department.database, THIGH, 1, by=by(PHYSICIAN), reason="label misread")
    assert [line.reason for line in list_departures(department.database, THIGH)] == [
        "label misread"
    ]


def test_the_worst_comes_first_in_the_review(department: Program) -> None:
    treated(department.database, THIGH, "2026-03-02", position="B", reason="misread")
    treated(department.database, THIGH, "2026-03-03", position="B")
    treated(department.database, THIGH, "2026-03-04", field_positions={"lower thigh": "B"})
    found = review(department.database, THIGH).departures
    assert [(line.fraction, line.grade, bool(line.reason)) for line in found] == [
        (3, "incoherent", False),
        (2, "coherent", False),
        (1, "coherent", True),
    ]


def test_a_physicist_may_treat_with_a_therapist(department: Program) -> None:
    with practice_time(moment("2026-03-02")):
        done = record(
            department.database,
            THIGH,
            by=by(AUTHOR),
            verified_by=by(SECOND),
            delivery=said(position="A"),
        )
    assert done.fraction == 1
    assert review(department.database, THIGH).grid[0].performer == AUTHOR != THERAPIST


def test_two_fractions_a_day(department: Program) -> None:
    text = (SCENARIO / "breast.toml").read_text(encoding="utf-8")
    design = department.folder / "twice.toml"
    text = text.replace("fractions_a_day = 1", "fractions_a_day = 2").replace("FH-2042", "FH-2045")
    design.write_text(text, encoding="utf-8")
    prepare(department.database, design, by=by(AUTHOR))
    check(department.database, "FH-2045", by=by(CHECKER))
    with practice_time(moment("2026-03-04")):
        approve(department.database, "FH-2045", by=by(PHYSICIAN), verified_by=by(CHECKER))
    dates = [
        treated(department.database, "FH-2045", day).next_date
        for day in ("2026-03-12T08:00:00", "2026-03-12T15:00:00", "2026-03-16T08:00:00")
    ]
    assert dates == ["2026-03-12", "2026-03-16", "2026-03-16"]
    treated(department.database, "FH-2045", "2026-03-16T15:00:00")
    with pytest.raises(RefusedError, match=r"^fractions 3 and 4 were delivered today already"):
        confirmed(department.database, "FH-2045", "2026-03-16T18:00:00")


def test_sides_that_had_unequal_dose_are_told(department: Program) -> None:
    without = {"AP lower": 0.0, "PA lower": 0.0}
    recorded(department.database, THIGH, "2026-03-02", fraction=2, position="B")
    recorded(
        department.database, THIGH, "2026-03-02", fraction=3, position="B", metersets_mu=without
    )
    recorded(department.database, THIGH, "2026-03-03", fraction=1, position="B")
    [sides] = review(department.database, THIGH).sides
    assert (sides.superior_gy, sides.inferior_gy, sides.equal) == (6.0, 4.0, False)


def test_a_reason_is_given_once(department: Program) -> None:
    treated(department.database, THIGH, "2026-03-02", position="B", reason="misread")
    with pytest.raises(NotFoundError, match="has no open departure 1"):
        explain(department.database, THIGH, 1, by=by(PHYSICIAN), reason="another")


def test_a_remainder_elsewhere_differs_from_where_the_fraction_began(department: Program) -> None:
    part = {"AP lower": 0.0, "PA lower": 0.0}
    treated(department.database, THIGH, "2026-03-02", position="B", metersets_mu=part)
    done = treated(department.database, THIGH, "2026-03-02", position="A")
    assert _kinds(done) == [INCOHERENT]
    assert done.departures[0].detail.startswith("upper thigh at B, lower thigh at A, planned B")


def _split(department: Program) -> None:
    """Prepare a thigh course whose every fraction is split over its three positions."""
    text = (SCENARIO / "thigh.toml").read_text(encoding="utf-8")
    file = department.folder / "split.toml"
    file.write_text(
        text.replace("FH-2041", "FH-2046")
        .replace('pattern = "blocks"', 'pattern = "split"')
        .replace("block_fractions = 5", "weights = [1.0, 1.0, 1.0]"),
        encoding="utf-8",
    )
    with practice_time(moment("2026-02-28")):
        prepare(department.database, file, by=by(AUTHOR))
        check(department.database, "FH-2046", by=by(CHECKER))
        approve(department.database, "FH-2046", by=by(PHYSICIAN), verified_by=by(CHECKER))


def test_a_split_fraction_is_treated_step_by_step_at_its_positions(department: Program) -> None:
    _split(department)
    done = [treated(department.database, "FH-2046", "2026-03-02") for _ in range(3)]
    assert [record.positions[0][1] for record in done] == ["A", "B", "C"]
    assert [record.complete for record in done] == [False, False, True]
    assert all(record.departures == () and record.step_complete for record in done)
    assert (done[-1].next_fraction, done[-1].next_position) == (2, "A")


def test_a_broken_step_is_judged_by_that_step_alone(department: Program) -> None:
    _split(department)
    treated(department.database, "FH-2046", "2026-03-02")
    short = {"AP lower": 0.0, "PA lower": 0.0}
    broken = treated(department.database, "FH-2046", "2026-03-02", metersets_mu=short)
    assert {kind for kind, _ in _kinds(broken)} == {"meterset short"}
    view = today(department.database, "FH-2046")
    assert (view.step, view.position, view.part_delivered) == (2, "B", True)
    assert treated(department.database, "FH-2046", "2026-03-02").departures == ()
