"""What else happens in a course: late entries, corrections, pauses, an end, a revised design."""

from __future__ import annotations

from typing import TYPE_CHECKING

import pytest
from department import (
    AUTHOR,
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

from featherlog.actions import course_life as life
from featherlog.actions.corrections import correct, corrections
from featherlog.actions.departures import list_departures
from featherlog.actions.designs import approve, check, prepare, send_back
from featherlog.actions.desk import at_desk, practice_time
from featherlog.actions.ledger import verify_ledger
from featherlog.actions.machines import add_machine
from featherlog.actions.stored import Stored, load
from featherlog.errors import InputError, NotFoundError, RefusedError

if TYPE_CHECKING:
    from collections.abc import Callable

    from program import Program

    from featherlog.actions.record import Recorded

INTERVAL, UNCONFIRMED = "interval too short", "not confirmed"


def kinds(done: Recorded) -> list[str]:
    return [departure.kind for departure in done.departures]


def now(department: Program) -> Stored:
    with at_desk(department.database) as desk:
        return load(desk, THIGH)


def corrected(
    department: Program, entry: int, *, void: bool = False, **differs: object
) -> Recorded:
    delivery = said(**({"reason": "a slip"} | differs))
    with practice_time(moment("2026-03-20")):
        return correct(
            department.database,
            THIGH,
            entry,
            by=by(AUTHOR),
            verified_by=by(CHECKER),
            delivery=delivery,
            void=void,
        )


@pytest.fixture(autouse=True)
def fits_together(department: Program) -> object:
    """Whatever a test did, the ledger and its projections fit together after it."""
    yield
    assert verify_ledger(department.database, None, lambda *_: None).fault == ""


class TestRecordedAlready:
    def test_who_and_when_is_said_instead_of_taking_the_next_fraction(
        self, department: Program
    ) -> None:
        treated(department.database, THIGH, "2026-03-02")
        with pytest.raises(
            RefusedError,
            match=r"^fraction 1 was recorded at 2026-03-02T09:00:00\+01:00 by Ash Plover with "
            r"Maple Teal; fraction 2 was not confirmed: name it with --fraction 2",
        ):
            recorded(department.database, THIGH, "2026-03-02", position="A")

    def test_a_remainder_that_was_not_confirmed(self, department: Program) -> None:
        treated(department.database, THIGH, "2026-03-02", metersets_mu={"AP upper": 50.0})
        with pytest.raises(RefusedError, match="what remains of it was not confirmed"):
            recorded(department.database, THIGH, "2026-03-02")

    def test_the_next_day_is_another_matter(self, department: Program) -> None:
        treated(department.database, THIGH, "2026-03-02")
        done = recorded(department.database, THIGH, "2026-03-03", position="A")
        assert (done.fraction, kinds(done)) == (2, [UNCONFIRMED])

    def test_a_complete_fraction_needs_to_be_named_as_given_again(
        self, department: Program
    ) -> None:
        treated(department.database, THIGH, "2026-03-02")
        with pytest.raises(RefusedError, match=r"^fraction 1 was .* recorded with --again$"):
            recorded(department.database, THIGH, "2026-03-03", fraction=1, position="A")
        done = recorded(
            department.database, THIGH, "2026-03-03", fraction=1, position="B", again=True
        )
        assert kinds(done) == [UNCONFIRMED, "extra delivery"]
        assert done.departures[1].detail.startswith(
            "fraction 1 was complete and was delivered again: AP upper 111 MU, "
        )
        assert done.next_fraction == 2

    @pytest.mark.parametrize(
        ("differs", "fault"),
        [
            ({"fraction": 1}, "--again is for a complete fraction, and fraction 1 is not"),
            ({}, "--again needs the fraction's number: give --fraction"),
        ],
    )
    def test_again_is_for_a_named_complete_fraction(
        self, department: Program, differs: dict[str, object], fault: str
    ) -> None:
        with pytest.raises(InputError, match=fault):
            recorded(department.database, THIGH, "2026-03-02", position="A", again=True, **differs)


class TestLateEntry:
    def test_it_counts_at_its_own_time_and_is_marked(self, department: Program) -> None:
        done = recorded(
            department.database, THIGH, "2026-03-04", position="A", treated_at="2026-03-02T09:10"
        )
        assert (kinds(done), done.next_date) == ([UNCONFIRMED], "2026-03-04")
        assert {(row.at, row.late) for row in now(department).deliveries} == {
            ("2026-03-02T09:10:00+01:00", True)
        }

    def test_an_offset_that_is_told_holds(self, department: Program) -> None:
        told = "2026-03-02T08:10:00+00:00"
        recorded(department.database, THIGH, "2026-03-04", position="A", treated_at=told)
        assert now(department).deliveries[0].at == "2026-03-02T09:10:00+01:00"

    def test_its_order_is_that_of_its_time(self, department: Program) -> None:
        treated(department.database, THIGH, "2026-03-02")
        recorded(department.database, THIGH, "2026-03-05", fraction=3, position="A")
        late = recorded(
            department.database,
            THIGH,
            "2026-03-05",
            fraction=2,
            position="A",
            treated_at="2026-03-03T09:00",
        )
        assert kinds(late) == [UNCONFIRMED]
        assert late.next_fraction == 4

    @pytest.mark.parametrize(
        ("told", "fault"),
        [
            ("2026-03-02T09:01", "which is still to come"),
            ("2026-03-02", "must be a date and time such as"),
            ("noon", "must be a date and time such as"),
            ("0001-01-01T00:00+14:00", "must be a date and time such as"),
        ],
    )
    def test_a_time_that_cannot_be(self, department: Program, told: str, fault: str) -> None:
        with pytest.raises(InputError, match=fault):
            recorded(department.database, THIGH, "2026-03-02", position="A", treated_at=told)


class TestInterval:
    def test_two_fractions_too_near_each_other(self, department: Program) -> None:
        treated(department.database, THIGH, "2026-03-02T09:00")
        done = recorded(department.database, THIGH, "2026-03-02T13:30", fraction=2, position="A")
        assert kinds(done) == [UNCONFIRMED, INTERVAL]
        assert done.departures[1].detail == (
            "fraction 2 was treated 4.5 h after fraction 1, at least 6.0 h are asked"
        )

    def test_the_remainder_of_a_fraction_is_not_another_one(self, department: Program) -> None:
        treated(department.database, THIGH, "2026-03-02T09:00", metersets_mu={"AP upper": 50.0})
        assert treated(department.database, THIGH, "2026-03-02T10:00").departures == ()


class TestDepartures:
    def test_finishing_fields_apart_is_not_told_twice(self, department: Program) -> None:
        half = dict.fromkeys(("AP upper", "PA upper", "AP lower", "PA lower"), 50.0)
        apart = {"upper thigh": "A", "lower thigh": "B"}
        first = treated(
            department.database, THIGH, "2026-03-02", field_positions=apart, metersets_mu=half
        )
        assert kinds(first)[0] == "fields apart"
        rest = recorded(department.database, THIGH, "2026-03-02", field_positions=apart)
        assert (kinds(rest), rest.complete) == ([UNCONFIRMED], True)

    def test_an_extra_fraction_elsewhere_is_only_that(self, department: Program) -> None:
        for number in range(1, 16):
            recorded(
                department.database,
                THIGH,
                "2026-03-26",
                fraction=number,
                position="A",
                treated_at=f"2026-03-{number + 1:02}T09:00",
            )
        extra = recorded(department.database, THIGH, "2026-03-26", position="C")
        assert kinds(extra) == ["extra fraction", UNCONFIRMED]

    def test_the_gap_between_fields_apart_follows_both(self, department: Program) -> None:
        """The lower field 1 cm further down leaves 1 cm more, less what its jaw closes: 8/100."""
        plain = treated(department.database, THIGH, "2026-03-02", gaps_cm={"mid thigh": 9.0})
        apart = treated(
            department.database,
            THIGH,
            "2026-03-03",
            field_positions={"lower thigh": "B"},
            gaps_cm={"mid thigh": 9.0},
        )
        details = [
            departure.detail
            for done in (plain, apart)
            for departure in done.departures
            if departure.kind == "skin gap"
        ]
        assert [detail.split(", ")[1] for detail in details] == [
            "expected +2.32 ± 0.20 cm",
            "expected +3.24 ± 0.20 cm",
        ]

    def test_the_table_between_two_fields(self, department: Program) -> None:
        planned = now(department).plan.positions[0].fields[1].table_from_first_field_cm[1]
        within, beyond = (
            treated(
                department.database,
                THIGH,
                day,
                table_cm={"upper thigh": 50.0, "lower thigh": 50.0 + planned + off},
            )
            for day, off in (("2026-03-02", 0.1), ("2026-03-03", -1.0))
        )
        assert (kinds(within), kinds(beyond)) == ([], ["table"])


class TestCorrection:
    def test_what_is_not_named_stays_as_it_was(self, department: Program) -> None:
        first = treated(
            department.database,
            THIGH,
            "2026-03-02",
            metersets_mu={"AP upper": 50.0},
            gaps_cm={"mid thigh": 2.4},
        )
        treated(department.database, THIGH, "2026-03-02")
        again = corrected(department, first.entry, position="B")
        stored = now(department)
        old = [row for row in stored.deliveries if row.entry == again.entry]
        assert {row.position for row in old} == {"B"}
        assert {row.beam: row.meterset_mu for row in old}["AP upper"] == 50.0
        assert {(row.at, row.performer, row.verifier, row.late) for row in old} == {
            ("2026-03-02T09:00:00+01:00", THERAPIST, SECOND, False)
        }
        assert kinds(again) == ["other position", "meterset short"]
        assert (again.next_fraction, again.next_position) == (2, "A")

    def test_a_corrected_beginning_stays_the_beginning(self, department: Program) -> None:
        part = {"AP upper": 50.0}
        first = treated(department.database, THIGH, "2026-03-02", position="B", metersets_mu=part)
        recorded(department.database, THIGH, "2026-03-02T11:00", position="B")
        corrected(department, first.entry, position="C")
        state = now(department).states[1]
        assert (state.began_at, state.last_position["upper thigh"]) == ("C", "B")

    def test_the_departures_of_the_wrong_version_are_closed(self, department: Program) -> None:
        wrong = treated(department.database, THIGH, "2026-03-02", position="B")
        assert now(department).row.open_departures == 1
        assert corrected(department, wrong.entry, position="A").departures == ()
        assert now(department).row.open_departures == 0

    def test_a_reason_that_was_given_still_holds(self, department: Program) -> None:
        short = {"AP upper": 50.0}
        wrong = treated(
            department.database, THIGH, "2026-03-02", metersets_mu=short, reason="interlock"
        )
        corrected(department, wrong.entry, metersets_mu={"AP upper": 60.0}, reason="misread")
        assert list_departures(department.database, THIGH)[-1].reason == "interlock"

    def test_both_versions_are_told(self, department: Program) -> None:
        wrong = treated(department.database, THIGH, "2026-03-02", gaps_cm={"mid thigh": 2.4})
        right = corrected(department, wrong.entry, metersets_mu={"PA lower": 60.0})
        with at_desk(department.database) as desk:
            (line,) = corrections(desk, THIGH)
        assert (line.entry, line.corrects, line.reason) == (right.entry, wrong.entry, "a slip")
        assert line.who == (AUTHOR, CHECKER)
        start = "fraction 1 at 2026-03-02T09:00:00+01:00: AP upper 112 MU at A, "
        assert line.was.startswith(start)
        assert "PA lower 60 MU at A; posterior gap at mid thigh" not in line.was
        assert "PA lower 60 MU at A; " in line.became

    def test_the_number_of_a_fraction(self, department: Program) -> None:
        treated(department.database, THIGH, "2026-03-02")
        wrong = recorded(department.database, THIGH, "2026-03-03", fraction=3, position="A")
        right = corrected(department, wrong.entry, fraction=2)
        assert kinds(right) == [UNCONFIRMED]
        assert now(department).progress.next_fraction == 3

    def test_a_fraction_that_another_record_holds(self, department: Program) -> None:
        treated(department.database, THIGH, "2026-03-02")
        second = treated(department.database, THIGH, "2026-03-03")
        with pytest.raises(RefusedError, match=r"^fraction 1 was recorded .* with --again$"):
            corrected(department, second.entry, fraction=1)

    def test_a_record_of_another_patient_is_undone(self, department: Program) -> None:
        for number in range(1, 16):
            day = "2026-03-20"
            done = recorded(department.database, THIGH, day, fraction=number, position="A")
        assert now(department).row.state == "complete"
        corrected(department, done.entry, void=True)
        stored = now(department)
        assert (stored.row.state, stored.row.next_fraction) == ("approved", 15)
        assert stored.progress.next_fraction == 15

    def test_a_correction_can_be_corrected(self, department: Program) -> None:
        wrong = treated(department.database, THIGH, "2026-03-02", position="B")
        second = corrected(department, wrong.entry, position="C")
        third = corrected(department, second.entry, position="A")
        assert third.departures == ()
        with pytest.raises(RefusedError, match=f"corrected already by entry {second.entry}"):
            corrected(department, wrong.entry, position="A")

    def test_an_entry_that_is_no_record(self, department: Program) -> None:
        with pytest.raises(RefusedError, match="entry 1 is no record of a fraction of course"):
            corrected(department, 1)

    def test_a_correction_says_why(self, department: Program) -> None:
        with pytest.raises(InputError, match="--reason is empty"):
            corrected(department, 1, reason=" ")


class TestMissedDay:
    def test_dates_move_and_numbers_stay(self, department: Program) -> None:
        treated(department.database, THIGH, "2026-03-02")
        with practice_time(moment("2026-03-06")):
            following = life.miss(
                department.database, THIGH, day=None, by=by(THERAPIST), reason="service"
            )
        row = now(department).row
        assert (following, row.next_date, row.next_fraction) == ("2026-03-09", "2026-03-09", 2)

    @pytest.mark.parametrize(
        ("day", "fault"),
        [
            ("2026-03-02", "was treated on 2026-03-02: fraction 1"),
            ("2026-03-07", "is no treatment day"),
            ("2026-03-11", "is still to come"),
            ("2026-03-03", "is on record as missed already"),
        ],
    )
    def test_a_day_that_was_not_missed(self, department: Program, day: str, fault: str) -> None:
        treated(department.database, THIGH, "2026-03-02")
        with practice_time(moment("2026-03-10")):
            _miss(department, "2026-03-03")
            with pytest.raises(RefusedError, match=fault):
                _miss(department, day)

    def test_a_day_that_is_none(self, department: Program) -> None:
        with pytest.raises(InputError, match="--date is 'friday'"):
            _miss(department, "friday")


def _miss(department: Program, day: str) -> str:
    return life.miss(department.database, THIGH, day=day, by=by(THERAPIST), reason="ill")


class TestPauseAndEnd:
    def test_a_pause_until_its_release(self, department: Program) -> None:
        _told(department, life.pause, THERAPIST, "2026-03-02")
        assert now(department).row.paused_reason == "skin"
        with pytest.raises(RefusedError, match="is paused already: skin"):
            _told(department, life.pause, THERAPIST, "2026-03-02")
        treated_meanwhile = recorded(department.database, THIGH, "2026-03-03", position="A")
        assert "not to be treated" in kinds(treated_meanwhile)
        _told(department, life.release, PHYSICIAN, "2026-03-10")
        row = now(department).row
        assert (row.paused_reason, row.next_date) == (None, "2026-03-10")
        with pytest.raises(RefusedError, match="is not paused"):
            _told(department, life.release, PHYSICIAN, "2026-03-10")

    def test_a_late_entry_is_judged_by_its_own_time(self, department: Program) -> None:
        _told(department, life.pause, THERAPIST, "2026-03-03")
        before = recorded(
            department.database, THIGH, "2026-03-04", position="A", treated_at="2026-03-02T09:00"
        )
        assert kinds(before) == [UNCONFIRMED]

    def test_an_end_is_for_good(self, department: Program) -> None:
        treated(department.database, THIGH, "2026-03-02")
        _told(department, life.end, PHYSICIAN, "2026-03-03")
        row = now(department).row
        assert (row.state, row.ended_reason, row.next_fraction) == ("complete", "skin", None)
        with pytest.raises(RefusedError, match=r"was ended: skin$"):
            _told(department, life.pause, THERAPIST, "2026-03-03")
        done = recorded(department.database, THIGH, "2026-03-04", position="A")
        assert (kinds(done), done.next_fraction) == (["not to be treated", UNCONFIRMED][::-1], None)

    def test_only_a_physician_ends_a_course(self, department: Program) -> None:
        with pytest.raises(RefusedError, match="may not end a course"):
            _told(department, life.end, AUTHOR, "2026-03-03")


def _told(department: Program, what: Callable[..., object], who: str, day: str) -> None:
    with practice_time(moment(day)):
        what(department.database, THIGH, by=by(who), reason="skin")


class TestAnotherMachine:
    def test_one_like_it_in_all_but_name(self, department: Program) -> None:
        _add_machine(department, "Birch")
        life.change_machine(
            department.database, THIGH, "Birch", by=by(AUTHOR), reason="Alder is down"
        )
        assert now(department).row.machine == "Birch"

    @pytest.mark.parametrize(
        ("name", "changed", "fault"),
        [
            ("Birch", ("sad_cm = 100.0", "sad_cm = 100.1"), "in more than its name; revise"),
            ("Alder", ("", ""), "is on Alder already"),
        ],
    )
    def test_one_that_will_not_do(
        self, department: Program, name: str, changed: tuple[str, str], fault: str
    ) -> None:
        _add_machine(department, "Birch", *changed)
        with pytest.raises(RefusedError, match=fault):
            life.change_machine(department.database, THIGH, name, by=by(AUTHOR), reason="down")

    def test_one_that_nobody_knows(self, department: Program) -> None:
        with pytest.raises(NotFoundError, match="there is no machine 'Elm'"):
            life.change_machine(department.database, THIGH, "Elm", by=by(AUTHOR), reason="down")


def _add_machine(department: Program, name: str, old: str = "", new: str = "") -> None:
    text = (SCENARIO / "alder.toml").read_text(encoding="utf-8").replace('"Alder"', f'"{name}"')
    assert old in text
    file = department.folder / "machine.toml"
    file.write_text(text.replace(old, new) if old else text, encoding="utf-8")
    add_machine(department.database, file, by=by(AUTHOR))


class TestRevision:
    def test_the_course_goes_on_from_what_was_delivered(self, department: Program) -> None:
        treated(department.database, THIGH, "2026-03-02")
        treated(department.database, THIGH, "2026-03-03", position="C")
        _revise(department, "2026-03-03", 'positions = ["B", "A", "C"]')
        _approve(department, "2026-03-03")
        stored = now(department)
        assert [f.position for f in stored.plan.fractions[:4]] == ["A", "A", "B", "B"]
        assert (stored.row.next_fraction, stored.row.next_position) == (3, "B")
        assert stored.row.next_date == "2026-03-04"

    def test_every_fault_is_named(self, department: Program) -> None:
        treated(department.database, THIGH, "2026-03-02")
        recorded(department.database, THIGH, "2026-03-03", fraction=12, position="C")
        treated(department.database, THIGH, "2026-03-04", metersets_mu={"AP upper": 50.0})
        with pytest.raises(
            RefusedError,
            match="prescribes only 11; fraction 2 was begun and not finished; finish it before",
        ):
            _revise(department, "2026-03-05", fractions=11)

    def test_a_fraction_since_it_was_prepared(self, department: Program) -> None:
        treated(department.database, THIGH, "2026-03-02")
        _revise(department, "2026-03-02")
        treated(department.database, THIGH, "2026-03-03")
        with pytest.raises(RefusedError, match="fraction 2 of FH-2041 was recorded after revision"):
            _approve(department, "2026-03-03")

    def test_a_complete_course_is_extended(self, department: Program) -> None:
        for number in range(1, 16):
            recorded(department.database, THIGH, "2026-03-20", fraction=number, position="A")
        _revise(department, "2026-03-20", fractions=17)
        _approve(department, "2026-03-20")
        row = now(department).row
        assert (row.state, row.next_fraction, row.next_date) == ("approved", 16, "2026-03-23")

    def test_an_ended_course_is_not_revised(self, department: Program) -> None:
        _told(department, life.end, PHYSICIAN, "2026-03-03")
        with pytest.raises(RefusedError, match=r"was ended: skin$"):
            _revise(department, "2026-03-03")

    def test_a_course_treated_before_any_approval_finds_its_way(self, department: Program) -> None:
        """Even with a fraction begun: nobody can finish it before an approval."""
        _revise(department, "2026-02-27", key="FH-2044", approved=False)
        part = {"AP upper": 50.0}
        recorded(department.database, "FH-2044", "2026-03-02", position="A", metersets_mu=part)
        send_back(department.database, "FH-2044", by=by(CHECKER), reason="another order")
        _revise(department, "2026-03-02", 'positions = ["B", "A", "C"]', key="FH-2044")
        _approve(department, "2026-03-02", "FH-2044")
        confirmed(department.database, "FH-2044", "2026-03-02T15:00")
        rest = recorded(department.database, "FH-2044", "2026-03-02T15:00")
        assert (rest.fraction, rest.complete, rest.next_position) == (1, True, "B")


def _revise(
    department: Program,
    day: str,
    order: str = 'positions = ["A", "B", "C"]',
    *,
    fractions: int = 15,
    key: str = THIGH,
    approved: bool = True,
) -> None:
    text = (SCENARIO / "thigh.toml").read_text(encoding="utf-8").replace(THIGH, key)
    assert 'positions = ["A", "B", "C"]' in text
    assert "fractions = 15" in text
    text = text.replace('positions = ["A", "B", "C"]', order)
    file = department.folder / "revised.toml"
    file.write_text(text.replace("fractions = 15", f"fractions = {fractions}"), encoding="utf-8")
    with practice_time(moment(day)):
        prepare(department.database, file, by=by(AUTHOR))
        if approved:
            check(department.database, key, by=by(CHECKER))


def _approve(department: Program, day: str, key: str = THIGH) -> None:
    with practice_time(moment(day)):
        approve(department.database, key, by=by(PHYSICIAN), verified_by=by(CHECKER))


def test_a_missed_day_does_not_come_back_after_a_late_record(department: Program) -> None:
    treated(department.database, THIGH, "2026-03-02")
    with practice_time(moment("2026-03-04")):
        life.miss(department.database, THIGH, by=by(THERAPIST), day=None, reason="machine down")
    late = recorded(
        department.database,
        THIGH,
        "2026-03-04T10:00:00",
        position="A",
        treated_at="2026-03-03T09:00",
    )
    assert (late.next_fraction, late.next_date) == (3, "2026-03-05")
