"""What stops a treatment before the beam, what has to be read back, and whom a refusal calls."""

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
    treated,
)
from program import SCENARIO

from featherlog.actions.confirm import ReadBack, confirm
from featherlog.actions.course_life import end, pause
from featherlog.actions.designs import approve, check, prepare
from featherlog.actions.desk import at_desk, practice_time
from featherlog.actions.observations import attest_presence, note_imager, read_table
from featherlog.actions.policy import set_policy
from featherlog.actions.review import review
from featherlog.actions.stored import load
from featherlog.actions.table_reference import TableReading, target_cm
from featherlog.actions.today import due_list, today
from featherlog.errors import InputError, RefusedError
from featherlog.exchange.template import POLICY_TEMPLATE
from featherlog.store import ledger
from featherlog.store.entry import Kind

if TYPE_CHECKING:
    from pathlib import Path

    from program import Program

    from featherlog.views.day import DayView

DAYS = ("2026-03-02", "2026-03-03", "2026-03-04", "2026-03-05", "2026-03-06")
SHIFT_DAY = "2026-03-09"
CALL = "STOP. Do not treat. Call the physicist: physicist on call, telephone 4711."
GAPS = {"mid thigh": 2.3}
JAW = {"AP upper:Y1": -15.0}


def _confirm(department: Program, day: str, key: str = THIGH, **read: object) -> DayView:
    values: dict[str, object] = {"position": None, "page": None, "gaps_cm": {}}
    with practice_time(moment(day)):
        return confirm(
            department.database,
            key,
            by=by(THERAPIST),
            verified_by=by(SECOND),
            read_back=ReadBack(**(values | read)),  # type: ignore[arg-type] - a test's shorthand
        )


def _refused(department: Program, day: str, key: str = THIGH, **read: object) -> str:
    with pytest.raises(RefusedError) as refusal:
        _confirm(department, day, key, **read)
    return str(refusal.value)


def _policy(department: Program, folder: Path, *changes: tuple[str, str]) -> None:
    text = POLICY_TEMPLATE
    for old, new in changes:
        assert old in text
        text = text.replace(old, new)
    file = folder / "policy.toml"
    file.write_text(text, encoding="utf-8")
    with practice_time(moment("2026-02-28")):
        set_policy(department.database, file, by=by(AUTHOR))


def _couch_course(department: Program, folder: Path, key: str) -> None:
    """Approve a course like the thigh's whose fields the couch moves, borders and all."""
    text = (SCENARIO / "thigh.toml").read_text(encoding="utf-8")
    for old, new in ((THIGH, key), ('"jaws"', '"couch"'), ("held = true", "held = false")):
        text = text.replace(old, new)
    design = folder / "couch.toml"
    design.write_text(text, encoding="utf-8")
    with practice_time(moment("2026-02-27")):
        prepare(department.database, design, by=by(AUTHOR))
        check(department.database, key, by=by(CHECKER))
        approve(department.database, key, by=by(PHYSICIAN), verified_by=by(CHECKER))


@pytest.fixture
def strict(department: Program, tmp_path: Path) -> Program:
    """Give a department whose policy asks for every read-back, on the thigh's first shift day."""
    _policy(department, tmp_path)
    for day in DAYS:
        treated(department.database, THIGH, day)
    return department


class TestOrdinaryDay:
    def test_it_takes_two_people_and_nothing_else(self, department: Program) -> None:
        assert _confirm(department, DAYS[0]).fraction == 1
        recorded(department.database, THIGH, DAYS[0])
        assert _confirm(department, DAYS[1]).shift == "no"

    def test_nothing_is_asked_even_where_the_policy_asks_at_shifts(
        self, department: Program, tmp_path: Path
    ) -> None:
        _policy(department, tmp_path)
        assert _confirm(department, DAYS[0]).fraction == 1

    def test_a_value_that_is_given_is_looked_at_all_the_same(self, department: Program) -> None:
        fault = _refused(department, DAYS[0], readings_cm={"AP upper:Y1": -13.0})
        assert fault.startswith("AP upper:Y1 was read back as −13.0 cm, expected −14.0 ± 0.1 cm. ")


class TestReadBackAtAShift:
    def test_everything_that_the_policy_asks_for(self, strict: Program) -> None:
        fault = _refused(strict, SHIFT_DAY)
        assert fault == (
            "this is a shift day: read the position back from the console with --position (planned "
            "B); this is a shift day: read back a jaw or table value that changes, with --reading "
            "NAME=CM (AP upper:Y1, PA upper:Y1, AP lower:Y2, PA lower:Y2); this is a shift day: "
            f"measure the gap at mid thigh and give it with --gap. {CALL}"
        )

    def test_given_it_is_confirmed_and_stays_on_record(self, strict: Program) -> None:
        view = _confirm(strict, SHIFT_DAY, position="B", readings_cm=JAW, gaps_cm=GAPS)
        assert (view.fraction, view.position) == (6, "B")
        with at_desk(strict.database) as desk:
            last = [*ledger.entries(desk.connection, THIGH)][-1]
        assert last.kind == Kind.FRACTION_CONFIRMED
        assert last.content["readings"] == [
            {"name": "AP upper:Y1", "read_cm": -15.0, "planned_cm": -15.0}
        ]
        assert last.content["gaps"] == [
            {"junction": "mid thigh", "side": "anterior", "gap_cm": 2.3}
        ]
        changes = {one.kind: one.words for one in review(strict.database, THIGH).week.changes}
        assert changes[Kind.FRACTION_CONFIRMED][-1] == (
            "fraction 6, AP upper:Y1 read as −15.0 cm (planned −15.0), anterior gap at mid thigh "
            "+2.30 cm"
        )

    def test_a_value_that_stays_does_not_show_the_shift(self, strict: Program) -> None:
        fault = _refused(
            strict, SHIFT_DAY, position="B", readings_cm={"AP upper:X1": -8.0}, gaps_cm=GAPS
        )
        assert fault.startswith("this is a shift day: read back a jaw or table value that changes")

    @pytest.mark.parametrize(
        ("value", "stops"), [(-14.9, False), (-15.1, False), (-14.85, True), (15.0, True)]
    )
    def test_a_jaw_may_be_off_by_the_machines_tolerance(
        self, strict: Program, value: float, stops: bool
    ) -> None:
        read = {"position": "B", "readings_cm": {"AP upper:Y1": value}, "gaps_cm": GAPS}
        if stops:
            assert "expected −15.0 ± 0.1 cm" in _refused(strict, SHIFT_DAY, **read)
        else:
            assert _confirm(strict, SHIFT_DAY, **read).fraction == 6

    def test_one_field_left_behind_makes_a_shift_of_an_ordinary_day(
        self, department: Program
    ) -> None:
        treated(department.database, THIGH, DAYS[0], field_positions={"upper thigh": "B"})
        assert _refused(department, DAYS[1]).startswith("this is a shift day")

    def test_a_value_of_nothing_is_no_value(self, strict: Program) -> None:
        with pytest.raises(InputError, match="--reading 'AP upper:Z' names no value of this"):
            _confirm(strict, SHIFT_DAY, position="B", readings_cm={"AP upper:Z": 1.0})


class TestTableValues:
    """The thigh's fields have one isocentre height: the table goes 29 cm between them."""

    @pytest.fixture
    def with_table(self, department: Program) -> Program:
        with practice_time(moment(DAYS[0])):
            read_table(
                department.database,
                THIGH,
                "upper thigh",
                table_cm=(0.3, 101.2, -12.0),
                by=by(THERAPIST),
                verified_by=by(SECOND),
            )
        return department

    def test_they_cannot_be_read_back_before_the_table_was_read(self, department: Program) -> None:
        with pytest.raises(InputError, match="'upper thigh:longitudinal' names no value"):
            _confirm(department, DAYS[0], readings_cm={"upper thigh:longitudinal": 101.2})

    @pytest.mark.parametrize(("value", "stops"), [(130.4, False), (130.5, True)])
    def test_they_may_be_off_by_the_tables_tolerance(
        self, with_table: Program, value: float, stops: bool
    ) -> None:
        read = {"lower thigh:longitudinal": value}
        if stops:
            fault = _refused(with_table, DAYS[0], readings_cm=read)
            assert fault.startswith(
                "lower thigh:longitudinal was read back as +130.5 cm, expected +130.2 ± 0.2 cm. "
            )
        else:
            assert _confirm(with_table, DAYS[0], readings_cm=read).fraction == 1

    def test_the_day_shows_where_the_table_must_stand(self, with_table: Program) -> None:
        with practice_time(moment(DAYS[0])):
            view = today(with_table.database, THIGH)
        assert [field.target.words for field in view.fields if field.target] == [
            "TABLE to lateral +0.3, longitudinal +101.2, vertical −12.0 cm",
            "TABLE to lateral +0.3, longitudinal +130.2, vertical −12.0 cm",
        ]
        assert view.table_reference.startswith("absolute, by the read-out of upper thigh at A in ")


class TestTableOnly:
    """Both fields moved by the couch, with no read-out of the table: nothing to compare with."""

    def test_a_shift_that_only_the_table_makes(self, department: Program, tmp_path: Path) -> None:
        _policy(department, tmp_path, ('"jaw or table value", "gap"', '"jaw or table value"'))
        _couch_course(department, tmp_path, "FH-2049")
        for day in DAYS:
            treated(department.database, "FH-2049", day)
        read = {"key": "FH-2049", "position": "B"}
        fault = _refused(department, SHIFT_DAY, **read)
        assert fault == (
            "only the table moves, and there is no read-out of it to compare a value with "
            f"(`featherlog table read`). {CALL}"
        )
        with practice_time(moment(DAYS[-1])):
            read_table(
                department.database,
                "FH-2049",
                "upper thigh",
                table_cm=(0.3, 101.2, -12.0),
                fraction=5,
                by=by(THERAPIST),
                verified_by=by(SECOND),
            )
        value = {"upper thigh:longitudinal": 102.2}
        assert _confirm(department, SHIFT_DAY, **read, readings_cm=value).fraction == 6


def test_targets_are_the_same_whichever_field_was_read_at_whichever_position(
    department: Program, tmp_path: Path
) -> None:
    _couch_course(department, tmp_path, "FH-2049")
    with at_desk(department.database) as desk:
        plan = load(desk, "FH-2049").plan
    places = [(one, field.field) for one in plan.positions for field in one.treated]
    origin = TableReading("upper thigh", "A", 1, 0.3, 101.2, -12.0, 1, "", ())
    known = {(at.label, name): target_cm(plan, origin, at, name) for at, name in places}
    assert len(set(known.values())) == len(places)
    for read_at, read in places:
        reading = TableReading(read, read_at.label, 1, *known[read_at.label, read], 1, "", ())
        for at, name in places:
            found = target_cm(plan, reading, at, name)
            assert found == pytest.approx(known[at.label, name])


class TestStops:
    def test_a_paused_course(self, department: Program) -> None:
        with practice_time(moment(DAYS[0])):
            pause(department.database, THIGH, by=by(THERAPIST), reason="fever")
        assert _refused(department, DAYS[0]).startswith("the course is paused: fever. STOP.")

    def test_an_ended_course_calls_the_physician(self, department: Program) -> None:
        with practice_time(moment(DAYS[0])):
            end(department.database, THIGH, by=by(PHYSICIAN), reason="the patient declines")
        assert _refused(department, DAYS[0]) == (
            "the course was ended: the patient declines. STOP. Do not treat. Call the physician."
        )
        assert today(department.database, THIGH).status == "stop"

    def test_the_second_fraction_of_a_day(self, department: Program) -> None:
        treated(department.database, THIGH, f"{DAYS[0]}T08:00:00")
        fault = _refused(department, f"{DAYS[0]}T15:00:00")
        assert fault.startswith(
            "fraction 1 was delivered today already, and the course has 1 a day. STOP."
        )

    @pytest.mark.parametrize(("time", "stops"), [("05:29:59", True), ("05:30:00", False)])
    def test_too_short_an_interval(self, department: Program, time: str, stops: bool) -> None:
        """The built-in policy has 6 h; the last fraction here was late in the evening before."""
        treated(department.database, THIGH, f"{DAYS[0]}T23:30:00")
        at = f"{DAYS[1]}T{time}"
        if stops:
            assert _refused(department, at).startswith(
                "only 5 h 59 min lie between fraction 1 (2026-03-02T23:30:00+01:00) and now, at "
                "least 6.0 h are needed between two fractions. STOP."
            )
        else:
            assert _confirm(department, at).fraction == 2

    def test_a_fraction_begun_out_of_order_is_finished_first(self, department: Program) -> None:
        part = {"AP upper": 50.0}
        recorded(department.database, THIGH, DAYS[0], fraction=2, position="A", metersets_mu=part)
        assert _refused(department, DAYS[1]).startswith("fraction 2 was begun and not finished. ")

    def test_a_shift_without_the_physicist_the_policy_asks_for(
        self, department: Program, tmp_path: Path
    ) -> None:
        asked = ("physics_presence_at_shifts = false", "physics_presence_at_shifts = true")
        plain = ('"position", "jaw or table value", "gap"', '"position"')
        _policy(department, tmp_path, asked, plain)
        for day in DAYS:
            treated(department.database, THIGH, day)
        fault = _refused(department, SHIFT_DAY, position="B")
        assert fault == (
            "a physicist has to be there at a shift and has not attested it today for fraction 6 "
            f"(`featherlog note physics-present`). {CALL}"
        )
        with practice_time(moment(SHIFT_DAY)):
            attest_presence(department.database, THIGH, fraction=6, by=by(AUTHOR))
        assert _confirm(department, SHIFT_DAY, position="B").fraction == 6

    def test_the_prescribed_count_calls_the_physician(
        self, department: Program, tmp_path: Path
    ) -> None:
        _policy(department, tmp_path)
        for number in range(1, 16):
            recorded(department.database, THIGH, DAYS[0], fraction=number, position="A")
        assert _refused(department, DAYS[1]) == (
            "all 15 prescribed fractions are complete. STOP. Do not treat. Call the physician: "
            "physician on call, telephone 4712."
        )

    def test_reasons_are_told_all_at_once(self, department: Program) -> None:
        treated(department.database, THIGH, DAYS[0])
        fault = _refused(department, DAYS[0], page="ABCD-EFGH", position="C")
        parts = ("delivered today already", "lie between", "ABCD-EFGH", "position C was read back")
        assert all(part in fault for part in parts)

    def test_nothing_is_written(self, department: Program) -> None:
        with at_desk(department.database) as desk:
            before = ledger.head(desk.connection)
        _refused(department, DAYS[0], position="C")
        with at_desk(department.database) as desk:
            assert ledger.head(desk.connection) == before


def test_the_remainder_of_a_fraction_waits_for_no_interval(department: Program) -> None:
    part = {"SCV anterior": 100.0, "lateral tangent": 0.0}
    treated(department.database, BREAST, DAYS[2], metersets_mu=part)
    confirmed(department.database, BREAST, DAYS[2])
    assert recorded(department.database, BREAST, DAYS[2]).complete


def test_while_the_imager_is_out_the_day_shows_raised_risk(department: Program) -> None:
    with practice_time(moment(DAYS[0])):
        note_imager(department.database, THIGH, works=False, reason="tube fault", by=by(THERAPIST))
        risk = "imager out since 2026-03-02T09:00:00+01:00 (tube fault)"
        assert today(department.database, THIGH).raised_risk == (risk,)
        (line,) = due_list(department.database, day=None, machine=None).lines
        assert line.attention == risk
        assert _confirm(department, DAYS[0]).fraction == 1
