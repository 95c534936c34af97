"""What a therapist is told when fields did not go together, or a fraction was broken off."""

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
    moment,
    recorded,
    treated,
)
from program import SCENARIO

from featherlog.actions.confirm import ReadBack, confirm
from featherlog.actions.course_life import end, pause, release
from featherlog.actions.designs import approve, check, prepare
from featherlog.actions.desk import practice_time
from featherlog.actions.today import today
from featherlog.errors import RefusedError

if TYPE_CHECKING:
    from program import Program

    from featherlog.views.day import DayView, FieldView

WEEK = ("2026-03-02", "2026-03-03", "2026-03-04", "2026-03-05", "2026-03-06")
COUCH = "FH-2047"


def _view(department: Program, day: str, key: str = THIGH) -> DayView:
    with practice_time(moment(day)):
        return today(department.database, key)


def _five(department: Program, key: str = THIGH) -> None:
    for day in WEEK:
        treated(department.database, key, day)


def _couch_course(department: Program) -> None:
    """Approve a thigh course whose lower field is moved by the couch."""
    text = (SCENARIO / "thigh.toml").read_text(encoding="utf-8").replace(THIGH, COUCH)
    head, tail = text.split('name = "lower thigh"\nmoved_by = "jaws"')
    file = department.folder / "couch.toml"
    file.write_text(f'{head}name = "lower thigh"\nmoved_by = "couch"{tail}', encoding="utf-8")
    with practice_time(moment("2026-02-28")):
        prepare(department.database, file, by=by(AUTHOR))
        check(department.database, COUCH, by=by(CHECKER))
        approve(department.database, COUCH, by=by(PHYSICIAN), verified_by=by(CHECKER))


def _changed(field: FieldView) -> set[str]:
    return {jaw.words for beam in field.beams for jaw in beam.jaws if jaw.words}


def test_a_remainder_is_locked_where_its_own_field_was_begun(department: Program) -> None:
    _five(department)
    done = recorded(
        department.database,
        THIGH,
        "2026-03-09",
        position="B",
        field_positions={"lower thigh": "A"},
        metersets_mu={"PA upper": 50.0},
    )
    view = _view(department, "2026-03-09")
    assert (done.next_position, view.position) == ("B", "B")
    assert view.status == "stop"
    assert view.stop_reasons == (
        "fraction 6 was begun with its fields apart (upper thigh at B, lower thigh at A)",
    )


@pytest.mark.parametrize(
    ("behind", "moves"), [("upper thigh", {"upper thigh"}), ("lower thigh", {"lower thigh"})]
)
def test_a_field_that_stayed_behind_has_its_own_shift(
    department: Program, behind: str, moves: set[str]
) -> None:
    _five(department)
    treated(department.database, THIGH, "2026-03-09", field_positions={behind: "A"})
    view = _view(department, "2026-03-10")
    assert (view.shift, view.position) == ("yes", "B")
    assert {field.field for field in view.fields if _changed(field)} == moves
    assert "the fields stood apart" in view.junctions[0].words
    with (
        practice_time(moment("2026-03-10")),
        pytest.raises(RefusedError, match="read the position back"),
    ):
        confirm(
            department.database,
            THIGH,
            by=by(THERAPIST),
            verified_by=by(SECOND),
            read_back=ReadBack(None, None, {}),
        )


def test_a_remainder_repeats_no_move_of_what_was_begun(department: Program) -> None:
    _couch_course(department)
    _five(department, COUCH)
    shifted = _view(department, "2026-03-09", COUCH)
    assert any("longitudinal +1.0" in note for note in shifted.fields[1].notes)
    treated(department.database, COUCH, "2026-03-09", metersets_mu={"PA lower": 40.0})
    view = _view(department, "2026-03-09", COUCH)
    assert (view.part_delivered, view.shift) == (True, "no")
    assert all(field.begun and not _changed(field) for field in view.fields)
    assert not any("CHANGED" in order for field in view.fields for order in field.orders)
    assert view.fields[1].since_last.words == ()


def test_each_field_has_one_table_order_that_says_what_changed(department: Program) -> None:
    _couch_course(department)
    _five(department, COUCH)
    upper, lower = _view(department, "2026-03-09", COUCH).fields
    assert upper.orders == ()
    move = "TABLE moves 30.0 cm toward the gantry (longitudinal +30.0 cm, CHANGED, was +29.0)"
    assert lower.orders == (f"{move} from upper thigh",)
    [border] = [jaw for jaw in lower.beams[0].jaws if jaw.jaw == "Y1"]
    assert border.words == "closes 1.0 cm, its edge stays in the patient"


def test_a_broken_beam_says_what_is_left_of_this_step(department: Program) -> None:
    treated(department.database, THIGH, "2026-03-02", metersets_mu={"PA lower": 40.0})
    beams = {b.beam: b for f in _view(department, "2026-03-02").fields for b in f.beams}
    left = beams["PA lower"]
    assert (left.planned_mu, left.delivered_mu, left.to_deliver_mu) == (112.0, 40.0, 72.0)
    assert beams["AP upper"].to_deliver_mu == 0.0


def test_a_paused_course_stops_and_goes_on_when_released(department: Program) -> None:
    with practice_time(moment("2026-03-02")):
        pause(department.database, THIGH, by=by(THERAPIST), reason="fever")
    view = _view(department, "2026-03-02")
    assert (view.status, view.stop_reasons) == ("stop", ("the course is paused: fever",))
    with practice_time(moment("2026-03-03")):
        release(department.database, THIGH, by=by(PHYSICIAN), reason="well again")
    assert _view(department, "2026-03-03").status == "ready"


def test_an_ended_course_stops(department: Program) -> None:
    with practice_time(moment("2026-03-02")):
        end(department.database, THIGH, by=by(PHYSICIAN), reason="patient's wish")
    assert _view(department, "2026-03-03").stop_reasons == ("the course was ended: patient's wish",)
