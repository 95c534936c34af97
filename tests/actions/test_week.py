"""The weekly review: what changed since the last sign-off, what is outstanding, and signing it."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

import pytest
from department import (
    AUTHOR,
    CHECKER,
    PHYSICIAN,
    THERAPIST,
    THIGH,
    by,
    moment,
    recorded,
    treated,
)
from program import SCENARIO

from featherlog.actions.decisions import check_position, sign_review
from featherlog.actions.designs import prepare
from featherlog.actions.desk import at_desk, practice_time
from featherlog.actions.documents import TEMPLATES
from featherlog.actions.observations import (
    attest_presence,
    note_image_shift,
    note_imager,
    note_marks_redrawn,
)
from featherlog.actions.policy import set_policy
from featherlog.actions.review import _sides, review
from featherlog.actions.stored import load
from featherlog.cli.show_review import review_text
from featherlog.errors import InputError, RefusedError
from featherlog.views.review import BreakLine, PositionCheckLine

if TYPE_CHECKING:
    from program import Program

    from featherlog.views.review import ReviewView, WeekView

WEEK = ("2026-03-02", "2026-03-03", "2026-03-04", "2026-03-05", "2026-03-06")
MONDAY = "2026-03-09"
PHYSICS_B = "position B was first treated in fraction 6: physics check outstanding"


def _review(program: Program, day: str = MONDAY, key: str = THIGH) -> ReviewView:
    with practice_time(moment(day)):
        return review(program.database, key)


def _week(program: Program, day: str = MONDAY) -> WeekView:
    return _review(program, day).week


def _sign(program: Program, name: str, day: str) -> None:
    week = _week(program, day)
    with practice_time(moment(day)):
        sign_review(program.database, THIGH, week, by=by(name))


@pytest.fixture
def second_week(department: Program) -> Program:
    """Give a course with its first shift treated."""
    for day in (*WEEK, MONDAY):
        treated(department.database, THIGH, day)
    return department


class TestChanges:
    """Everything of the course since somebody last signed, by kind."""

    def test_before_any_sign_off_all_of_it(self, department: Program) -> None:
        treated(department.database, THIGH, WEEK[0])
        week = _week(department)
        told = {change.kind: (change.count, change.words) for change in week.changes}
        assert week.since == ""
        assert told == {
            "design prepared": (1, ("revision 1",)),
            "design checked": (1, ("revision 1",)),
            "design approved": (1, ("revision 1",)),
            "fraction confirmed": (1, ("fraction 1",)),
            "fraction recorded": (1, ("fraction 1",)),
        }

    def test_after_one_only_what_came_since(self, department: Program) -> None:
        treated(department.database, THIGH, WEEK[0])
        _sign(department, AUTHOR, WEEK[0])
        assert _week(department).changes == ()
        treated(department.database, THIGH, WEEK[1])
        treated(department.database, THIGH, WEEK[2])
        week = _week(department)
        assert [(change.kind, change.words) for change in week.changes] == [
            ("fraction confirmed", ("fraction 2", "fraction 3")),
            ("fraction recorded", ("fraction 2", "fraction 3")),
        ]
        assert week.since == "2026-03-02T09:00:00+01:00"

    def test_image_shifts_stand_apart_from_events(self, department: Program) -> None:
        treated(department.database, THIGH, WEEK[0])
        with practice_time(moment(WEEK[0])):
            note_image_shift(
                department.database,
                THIGH,
                fraction=1,
                field="upper thigh",
                shift_cm=(0.2, 0.0, -0.1),
                by=by(THERAPIST),
            )
            note_marks_redrawn(
                department.database, THIGH, position="A", reason="washed off", by=by(THERAPIST)
            )
        week = _week(department)
        (shift,), (event,) = week.image_shifts, week.events
        assert shift.words == (
            "field upper thigh, fraction 1, lateral +0.2 cm, longitudinal 0.0 cm, vertical −0.1 cm"
        )
        assert (event.kind, event.who) == ("marks redrawn", THERAPIST)
        assert event.words == "position A, washed off"

    def test_breaks_are_treatment_days_without_a_fraction(self, department: Program) -> None:
        for day in (WEEK[0], WEEK[1], "2026-03-10"):
            treated(department.database, THIGH, day)
        # Thursday 12 is not over while it lasts, Friday 13 is closed.
        assert _week(department, "2026-03-12").breaks == (
            BreakLine("2026-03-04", "2026-03-09", 4),
            BreakLine("2026-03-11", "2026-03-11", 1),
        )


class TestOutstanding:
    """What a review calls for."""

    def test_a_shift_calls_for_a_physics_check(self, second_week: Program) -> None:
        week = _week(second_week)
        assert week.position_checks == (PositionCheckLine("B", 6, "", ""),)
        assert PHYSICS_B in week.outstanding
        with practice_time(moment(MONDAY)):
            check_position(second_week.database, THIGH, "B", by=by(CHECKER))
        week = _week(second_week)
        assert week.position_checks == (
            PositionCheckLine("B", 6, CHECKER, "2026-03-09T09:00:00+01:00"),
        )
        assert PHYSICS_B not in week.outstanding

    def test_a_position_that_is_not_there_is_not_checked(self, department: Program) -> None:
        with pytest.raises(InputError, match="no position 'D' in this course; it has A, B, C"):
            check_position(department.database, THIGH, "D", by=by(CHECKER))
        with pytest.raises(RefusedError, match="may not check a new position"):
            check_position(department.database, THIGH, "B", by=by(THERAPIST))

    def test_undecided_departures_and_an_unfinished_fraction(self, department: Program) -> None:
        treated(department.database, THIGH, WEEK[0], position="B", reason="misread")
        part = {"AP lower": 50.0}
        treated(department.database, THIGH, WEEK[1], metersets_mu=part)
        found = _week(department).outstanding
        assert found[0] == "departures 1, 2: no decision is signed"
        assert "fraction 2 was begun and is not finished" in found

    def test_an_imager_that_is_out(self, department: Program) -> None:
        with practice_time(moment(WEEK[0])):
            note_imager(
                department.database, THIGH, works=False, reason="tube fault", by=by(THERAPIST)
            )
        assert any(
            text.startswith("raised risk: imager out since 2026-03-02")
            for text in _week(department).outstanding
        )

    def test_presence_at_a_shift_where_the_policy_asks_for_it(self, second_week: Program) -> None:
        said = "fraction 6 was a shift: no physicist's presence is on record"
        assert said not in _week(second_week).outstanding
        file = second_week.folder / "policy.toml"
        text = TEMPLATES["policy"]
        flag = "physics_presence_at_shifts = "
        file.write_text(text.replace(f"{flag}false", f"{flag}true"), encoding="utf-8")
        with practice_time(moment(MONDAY)):
            set_policy(second_week.database, file, by=by(AUTHOR))
            assert said in review(second_week.database, THIGH).week.outstanding
            attest_presence(second_week.database, THIGH, fraction=6, by=by(AUTHOR))
            assert said not in review(second_week.database, THIGH).week.outstanding

    def test_each_role_signs_for_itself(self, second_week: Program) -> None:
        _sign(second_week, AUTHOR, MONDAY)
        week = _week(second_week)
        assert [(line.role, line.who, line.entries_since) for line in week.sign_offs] == [
            ("physicist", AUTHOR, 0),
            ("physician", "", 15),
            ("therapist", "", 15),
        ]
        assert week.outstanding == (
            PHYSICS_B,
            "sign-off by a physician: 15 entries and no earlier one",
        )
        _sign(second_week, PHYSICIAN, MONDAY)
        treated(second_week.database, THIGH, "2026-03-10")
        assert _week(second_week, "2026-03-10").outstanding == (
            PHYSICS_B,
            "sign-off by a physicist: 2 entries since 2026-03-09",
            "sign-off by a physician: 2 entries since 2026-03-09",
        )


def test_a_signature_is_for_what_was_seen(department: Program) -> None:
    week = _week(department)
    treated(department.database, THIGH, WEEK[0])
    with pytest.raises(RefusedError, match=r"has gone on to entry .* look at it again"):
        sign_review(department.database, THIGH, week, by=by(AUTHOR))


def test_strips_are_counted_and_not_called_dose(department: Program) -> None:
    treated(department.database, THIGH, WEEK[0])
    treated(department.database, THIGH, WEEK[1], field_positions={"lower thigh": "C"})
    view = _review(department)
    assert [(strip.expected_count, strip.covered_count) for strip in view.strips] == [(2, 1)] * 2
    screen = review_text(view)
    assert "mid thigh, strip coverage so far, a count and not a dose:" in screen
    assert [line for line in screen.splitlines() if len(line) > 80] == []


def test_late_entries_are_told(department: Program) -> None:
    recorded(
        department.database,
        THIGH,
        WEEK[1],
        position="A",
        treated_at="2026-03-02T10:00",
    )
    assert _week(department).late_fractions == (1,)


class TestSides:
    """Whether the two sides of a junction have had the same."""

    def test_fields_with_doses_of_their_own_are_equal_by_fractions(
        self, department: Program
    ) -> None:
        text = (SCENARIO / "thigh.toml").read_text(encoding="utf-8").replace("FH-2041", "FH-2047")
        before, mark, after = text.partition("[[field]]\n")
        file = department.folder / "own.toml"
        file.write_text(f"{before}{mark}dose_per_fraction_gy = 1.5\n{after}", encoding="utf-8")
        with practice_time(moment("2026-02-27")):
            prepare(department.database, file, by=by(AUTHOR))
        recorded(department.database, "FH-2047", WEEK[0], position="A")
        (side,) = _review(department, WEEK[0], "FH-2047").sides
        assert (side.superior_gy, side.inferior_gy) == pytest.approx((1.5, 2.0))
        assert (side.superior_fractions, side.inferior_fractions) == (1.0, 1.0)
        assert side.equal is True

    def test_a_part_leaves_them_unequal(self, department: Program) -> None:
        part = {"AP lower": 50.0}
        treated(department.database, THIGH, WEEK[0], metersets_mu=part)
        (side,) = _review(department).sides
        assert side.superior_fractions == 1.0
        assert side.inferior_fractions < 1.0
        assert side.equal is False

    def test_the_side_of_an_earlier_course_is_not_compared(self, department: Program) -> None:
        treated(department.database, THIGH, WEEK[0])
        with at_desk(department.database) as desk:
            stored = load(desk, THIGH)
        first, *others = stored.plan.positions
        upper, lower = first.fields
        earlier = replace(upper, earlier_course="2029", earlier_dose_gy=30.0)
        positions = (replace(first, fields=(earlier, lower)), *others)
        given = tuple(row for row in stored.deliveries if row.field == lower.field)
        (side,) = _sides(
            replace(stored, plan=replace(stored.plan, positions=positions), deliveries=given)
        )
        assert (side.superior_gy, side.superior_fractions) == (30.0, None)
        assert (side.inferior_gy, side.inferior_fractions) == pytest.approx((2.0, 1.0))
        assert side.equal is None
