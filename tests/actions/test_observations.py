"""What people observe: table read-outs, image shifts, marks, the imager, physics presence."""

from __future__ import annotations

from typing import TYPE_CHECKING

import pytest
from department import (
    AUTHOR,
    SECOND,
    THERAPIST,
    THIGH,
    by,
    confirmed,
    moment,
    treated,
)

from featherlog.actions.departures import list_departures
from featherlog.actions.desk import at_desk, practice_time
from featherlog.actions.events import imager_out, list_events, physics_present, raised_risk
from featherlog.actions.observations import (
    attest_presence,
    note_image_shift,
    note_imager,
    note_marks_redrawn,
    read_table,
)
from featherlog.actions.stored import load
from featherlog.actions.table_reference import TableReference, table_reference, target_cm
from featherlog.errors import InputError, RefusedError
from featherlog.store import queries

if TYPE_CHECKING:
    from program import Program

    from featherlog.actions.table_reference import TableReading
    from featherlog.junction.plan import Triple
    from featherlog.store.rows import EventRow

UPPER, LOWER = "upper thigh", "lower thigh"
FIRST = "2026-03-02"
READ_OUT = (0.3, 101.2, -12.0)


def _read(department: Program, day: str, field: str = UPPER, **more: object) -> TableReading:
    values: dict[str, object] = {"table_cm": READ_OUT, "fraction": None}
    people = {"by": by(THERAPIST), "verified_by": by(SECOND)}
    with practice_time(moment(day)):
        return read_table(department.database, THIGH, field, **(values | people | more))  # type: ignore[arg-type] - a test's shorthand


def _events(department: Program) -> tuple[EventRow, ...]:
    with at_desk(department.database) as desk:
        return queries.events(desk.connection, THIGH)


def _reference(department: Program, revision: int = 1) -> TableReference:
    return table_reference(_events(department), revision)


def _target(department: Program, position: str, field: str) -> Triple:
    reading = _reference(department).reading
    assert reading is not None
    with at_desk(department.database) as desk:
        plan = load(desk, THIGH).plan
    return target_cm(plan, reading, plan.position(position), field)


class TestTableReading:
    def test_before_the_first_record_it_belongs_to_the_first_fraction(
        self, department: Program
    ) -> None:
        reading = _read(department, FIRST)
        assert (reading.fraction, reading.position, reading.table_cm) == (1, "A", READ_OUT)
        assert reading.read_by == (THERAPIST, SECOND)

    def test_the_field_that_was_read_has_it_as_its_target(self, department: Program) -> None:
        _read(department, FIRST)
        assert _target(department, "A", UPPER) == READ_OUT

    def test_every_other_field_follows_by_its_isocentre(self, department: Program) -> None:
        """Isocentres at z 14 and -15, head first: the table goes 29 cm toward the gantry."""
        _read(department, FIRST)
        assert _target(department, "A", LOWER) == (0.3, pytest.approx(130.2), -12.0)

    def test_whichever_field_was_read(self, department: Program) -> None:
        _read(department, FIRST, LOWER, table_cm=(0.3, 130.2, -12.0))
        assert _target(department, "A", UPPER) == (0.3, pytest.approx(101.2), -12.0)

    def test_after_a_record_it_must_say_its_fraction_until_the_next_is_confirmed(
        self, department: Program
    ) -> None:
        treated(department.database, THIGH, FIRST)
        with pytest.raises(InputError, match="1 was delivered last, 2 is due and not confirmed"):
            _read(department, FIRST)
        assert _read(department, FIRST, fraction=1).fraction == 1
        confirmed(department.database, THIGH, "2026-03-03")
        assert _read(department, "2026-03-03").fraction == 2

    def test_of_a_delivered_fraction_it_takes_the_position_that_was_treated(
        self, department: Program
    ) -> None:
        treated(department.database, THIGH, FIRST, field_positions={LOWER: "C"})
        assert _read(department, FIRST, LOWER, fraction=1).position == "C"

    @pytest.mark.parametrize(
        ("more", "fault"),
        [
            ({"field": "knee"}, "there is no field 'knee' in this course; it has upper thigh,"),
            ({"fraction": 9}, "fraction 9 is neither due nor delivered"),
            ({"table_cm": (301.0, 0, 0)}, "--lateral is 301, but must be -300 to 300 cm"),
            ({"table_cm": (0, 0, float("nan"))}, "--vertical is nan, but must be"),
        ],
    )
    def test_what_cannot_be_is_not_kept(
        self, department: Program, more: dict[str, object], fault: str
    ) -> None:
        with pytest.raises(InputError, match=fault):
            _read(department, FIRST, **more)  # type: ignore[arg-type] - as above
        assert _events(department) == ()

    def test_one_person_is_not_enough(self, department: Program) -> None:
        with pytest.raises(RefusedError, match="cannot read the table and verify it"):
            _read(department, FIRST, verified_by=by(THERAPIST))


class TestTableReference:
    def test_there_is_none_before_a_reading(self, department: Program) -> None:
        words = "relative only: no reference reading of the table yet"
        assert _reference(department) == TableReference(None, words)

    def test_it_says_who_read_it_when(self, department: Program) -> None:
        _read(department, FIRST)
        assert _reference(department).words == (
            "absolute, by the read-out of upper thigh at A in fraction 1 "
            "(2026-03-02T09:00:00+01:00, Ash Plover and Maple Teal)"
        )

    def test_redrawn_marks_make_it_void_until_the_table_is_read_again(
        self, department: Program
    ) -> None:
        _read(department, FIRST)
        with practice_time(moment("2026-03-03")):
            note_marks_redrawn(
                department.database, THIGH, position="A", reason="washed off", by=by(THERAPIST)
            )
        assert _reference(department) == TableReference(
            None,
            "relative only: the marks were redrawn (2026-03-03T09:00:00+01:00) and the table was "
            "not read since",
        )
        _read(department, "2026-03-03", table_cm=(0.0, 100.0, -12.0))
        assert _target(department, "A", UPPER) == (0.0, 100.0, -12.0)

    def test_another_revision_of_the_design_needs_one_of_its_own(self, department: Program) -> None:
        _read(department, FIRST)
        assert _reference(department, revision=2).reading is None


class TestImageShift:
    def _shift(self, department: Program, field: str, shift_cm: Triple) -> tuple[str, ...]:
        with practice_time(moment(FIRST)):
            return note_image_shift(
                department.database,
                THIGH,
                fraction=1,
                field=field,
                shift_cm=shift_cm,
                by=by(THERAPIST),
            )

    def test_it_is_an_event_and_no_departure(self, department: Program) -> None:
        self._shift(department, UPPER, (0.2, -0.5, 0.0))
        (line,) = list_events(department.database, THIGH)
        assert (line.kind, line.fraction, line.signed_by) == ("image shift", 1, (THERAPIST,))
        assert line.content["longitudinal_cm"] == -0.5
        assert list_departures(department.database, THIGH) == ()

    def test_fields_shifted_together_are_no_matter(self, department: Program) -> None:
        self._shift(department, UPPER, (0.2, -0.5, 0.0))
        assert self._shift(department, LOWER, (0.2, -0.7, 0.0)) == ()

    def test_fields_shifted_apart_are_told(self, department: Program) -> None:
        """The practice machine's table has a tolerance of 0.2 cm."""
        self._shift(department, UPPER, (0.2, -0.5, 0.0))
        (sentence,) = self._shift(department, LOWER, (0.2, 0.3, 0.0))
        assert sentence.startswith(
            "lower thigh was shifted +0.80 cm longitudinal against upper thigh in fraction 1"
        )

    def test_a_fraction_that_is_not_prescribed_has_none(self, department: Program) -> None:
        with pytest.raises(InputError, match="--fraction is 16, but must be 1 to 15"):
            note_image_shift(
                department.database,
                THIGH,
                fraction=16,
                field=UPPER,
                shift_cm=(0, 0, 0),
                by=by(THERAPIST),
            )


class TestImager:
    def _note(self, department: Program, *, works: bool, reason: str = "tube fault") -> None:
        with practice_time(moment(FIRST)):
            note_imager(department.database, THIGH, works=works, reason=reason, by=by(THERAPIST))

    def test_while_it_is_out_the_risk_is_raised(self, department: Program) -> None:
        self._note(department, works=False)
        assert raised_risk(_events(department)) == (
            "imager out since 2026-03-02T09:00:00+01:00 (tube fault)",
        )
        self._note(department, works=True, reason="repaired")
        assert raised_risk(_events(department)) == ()
        assert imager_out(_events(department)) is None

    def test_it_is_out_once(self, department: Program) -> None:
        self._note(department, works=False)
        with pytest.raises(InputError, match="is out since 2026-03-02T09:00:00"):
            self._note(department, works=False)

    def test_it_is_back_only_from_an_outage(self, department: Program) -> None:
        with pytest.raises(InputError, match="the imager is not out"):
            self._note(department, works=True)

    def test_it_says_why(self, department: Program) -> None:
        with pytest.raises(InputError, match="--reason is empty"):
            self._note(department, works=False, reason=" ")


def test_marks_have_a_position_of_the_course(department: Program) -> None:
    with pytest.raises(InputError, match="there is no position 'Z' in this course; it has A, B, C"):
        note_marks_redrawn(
            department.database, THIGH, position="Z", reason="washed off", by=by(THERAPIST)
        )


def test_presence_counts_for_its_fraction_on_its_day(department: Program) -> None:
    at = moment(FIRST)
    with practice_time(at):
        attest_presence(department.database, THIGH, fraction=1, by=by(AUTHOR))
    events = _events(department)
    assert physics_present(events, 1, at.date())
    assert not physics_present(events, 2, at.date())
    assert not physics_present(events, 1, moment("2026-03-03").date())


def test_only_a_physicist_attests_presence(department: Program) -> None:
    with pytest.raises(RefusedError, match="may not attest physics presence"):
        attest_presence(department.database, THIGH, fraction=1, by=by(THERAPIST))
