"""What a fraction's view says, and that screen, JSON and sheet say the same."""

from __future__ import annotations

import json
import re
from io import BytesIO
from typing import TYPE_CHECKING

import pytest
from department import (
    AUTHOR,
    BREAST,
    SECOND,
    THERAPIST,
    THIGH,
    by,
    confirmed,
    moment,
    recorded,
    treated,
)
from pypdf import PdfReader

from featherlog.actions.departures import explain
from featherlog.actions.desk import practice_time
from featherlog.actions.documents import to_json
from featherlog.actions.papers import sheet
from featherlog.actions.today import due_list, today
from featherlog.cli.show_day import day_text
from featherlog.views.day import NextShift

if TYPE_CHECKING:
    from collections.abc import Iterator

    from program import Program

    from featherlog.views.day import BeamView, DayView, DueLine

WEEK = ("2026-03-02", "2026-03-03", "2026-03-04", "2026-03-05", "2026-03-06")


def _view(department: Program, key: str, day: str = "2026-03-02") -> DayView:
    with practice_time(moment(day)):
        return today(department.database, key)


def _due(department: Program, on: str, machine: str | None = None) -> list[DueLine]:
    with practice_time(moment("2026-03-02")):
        return list(due_list(department.database, day=on, machine=machine).lines)


class TestPageCode:
    """A sheet's code is good for one fraction as the course stands."""

    def test_it_stays_while_nothing_happens(self, department: Program) -> None:
        code = _view(department, THIGH).page_code
        confirmed(department.database, THIGH, "2026-03-02")
        recorded(department.database, BREAST, "2026-03-02", position="A")
        assert _view(department, THIGH, "2026-03-03").page_code == code

    def test_it_changes_with_every_part_of_a_fraction(self, department: Program) -> None:
        codes = [_view(department, THIGH).page_code]
        for metersets in ({"PA lower": 40.0}, {"PA lower": 30.0}, {}):
            treated(department.database, THIGH, "2026-03-02", metersets_mu=metersets)
            codes.append(_view(department, THIGH).page_code)
        assert len(set(codes)) == len(codes)

    def test_it_changes_with_the_departures_that_the_sheet_shows(self, department: Program) -> None:
        treated(department.database, THIGH, "2026-03-02", position="B")
        code = _view(department, THIGH).page_code
        explain(department.database, THIGH, 1, by=by(AUTHOR), reason="label misread")
        view = _view(department, THIGH)
        assert (view.page_code != code, view.open_departures) == (True, ())


class TestShift:
    """Whether the junction moves today, and when it moves next."""

    def test_the_first_fraction(self, department: Program) -> None:
        view = _view(department, THIGH)
        assert (view.shift, view.previous_position) == ("first", None)
        assert {jaw.words for field in view.fields for b in field.beams for jaw in b.jaws} == {""}

    def test_the_next_shift_is_projected_over_the_closed_day(self, department: Program) -> None:
        for day in WEEK:
            treated(department.database, THIGH, day)
        view = _view(department, THIGH)
        assert (view.shift, view.shift_words) == (
            "yes",
            "Shift: from position A to position B, after fraction 5.",
        )
        # Fraction 6 on Monday 9, closed on Friday 13, so fraction 11 on Tuesday 17.
        assert view.next_shift == NextShift(11, "C", "2026-03-17")

    def test_a_missed_day_moves_what_follows_but_not_the_positions(
        self, department: Program
    ) -> None:
        treated(department.database, THIGH, "2026-03-02")
        assert _view(department, THIGH).next_shift == NextShift(6, "B", "2026-03-09")
        treated(department.database, THIGH, "2026-03-05")
        assert _view(department, THIGH).next_shift == NextShift(6, "B", "2026-03-11")

    def test_a_shift_is_seen_from_where_the_course_truly_was(self, department: Program) -> None:
        treated(department.database, THIGH, "2026-03-02", position="C")
        view = _view(department, THIGH)
        assert (view.position, view.previous_position, view.shift) == ("A", "C", "yes")
        assert view.junctions[0].words == "JUNCTION mid thigh moves 2.0 cm toward the head"

    def test_there_is_none_in_the_last_block(self, department: Program) -> None:
        for number in range(1, 12):
            recorded(department.database, THIGH, "2026-03-02", fraction=number, position="A")
        view = _view(department, THIGH)
        assert (view.fraction, view.next_shift) == (12, None)

    def test_unequal_sides_stop_a_shift(self, department: Program) -> None:
        """One field left out of a whole fraction, said to be another's."""
        for number in range(1, 6):
            recorded(department.database, THIGH, "2026-03-02", fraction=number, position="A")
        without = {"AP lower": 0.0, "PA lower": 0.0}
        recorded(
            department.database, THIGH, "2026-03-03", fraction=8, position="B", metersets_mu=without
        )
        view = _view(department, THIGH)
        assert (view.status, view.fraction) == ("stop", 6)
        assert view.stop_reasons == (
            "fraction 8 was begun and not finished",
            "fields upper thigh and lower thigh have had 6 and 5 whole fractions",
        )
        [line] = [line for line in _due(department, "2026-03-04") if line.course == THIGH]
        assert line.attention.startswith("STOP: see this course; ")


class TestDueList:
    """The list of a day."""

    def test_courses_are_due_from_their_first_day(self, department: Program) -> None:
        assert [line.course for line in _due(department, "2026-03-01")] == []
        assert [line.course for line in _due(department, "2026-03-02")] == [THIGH]
        assert [line.course for line in _due(department, "2026-03-04")] == [THIGH, BREAST]

    def test_the_day_says_since_when(self, department: Program) -> None:
        dues = {line.course: line.due for line in _due(department, "2026-03-04")}
        assert dues == {THIGH: "since 2026-03-02", BREAST: "today"}

    def test_a_treated_course_is_due_again_on_its_next_day(self, department: Program) -> None:
        treated(department.database, THIGH, "2026-03-12")
        assert _due(department, "2026-03-15", "Alder")[0].course == BREAST
        [line] = [line for line in _due(department, "2026-03-16") if line.course == THIGH]
        assert (line.fraction, line.position, line.shift, line.due) == (2, "A", "no", "today")

    def test_a_broken_fraction_and_its_departure_ask_for_attention(
        self, department: Program
    ) -> None:
        treated(department.database, THIGH, "2026-03-02", metersets_mu={"PA lower": 40.0})
        [line] = _due(department, "2026-03-02")
        assert line.attention == ("1 open departure(s); fraction 1 part delivered: finish it at A")


@pytest.fixture(params=[THIGH, BREAST])
def shift_day(request: pytest.FixtureRequest, department: Program) -> tuple[Program, str]:
    """Give a course on a shift day, its fraction begun and broken off."""
    key = str(request.param)
    for day in WEEK:
        treated(department.database, key, day)
    beam = {THIGH: "AP upper", BREAST: "medial tangent"}[key]
    treated(department.database, key, "2026-03-09", metersets_mu={beam: 20.5})
    return department, key


def _numbers(text: str) -> set[float]:
    signed = text.replace("-", " ").replace("−", "-")
    return {float(found) for found in re.findall(r"-?\d+\.?\d*", signed)}


def _figures(beam: BeamView) -> Iterator[float]:
    yield from (beam.gantry_deg, beam.collimator_deg, beam.couch_deg, beam.ssd_cm)
    yield round(beam.to_deliver_mu, 2)
    for jaw in beam.jaws:
        yield jaw.cm
        if jaw.previous_cm is not None:
            yield jaw.previous_cm


def test_json_screen_and_sheet_hold_the_same_numbers(shift_day: tuple[Program, str]) -> None:
    department, key = shift_day
    view = _view(department, key, "2026-03-09")
    plain = json.loads(to_json(view))
    screen = day_text(view)
    with practice_time(moment("2026-03-09")):
        on_sheet, pdf = sheet(department.database, key)
    paper = " ".join(page.extract_text() for page in PdfReader(BytesIO(pdf)).pages)
    assert on_sheet == view
    for field, told in zip(view.fields, plain["fields"], strict=True):
        for beam, same in zip(field.beams, told["beams"], strict=True):
            # Its own line, the meterset and four jaws.
            block = screen.partition(f"  {beam.beam}: ")[2].splitlines()[:6]
            figures = set(_figures(beam))
            assert figures <= _numbers("\n".join(block))
            assert figures <= _numbers(paper)
            assert {jaw["cm"] for jaw in same["jaws"]} == {jaw.cm for jaw in beam.jaws}
    for junction in view.junctions:
        assert junction.words in screen
        for gap in junction.gaps:
            assert {round(gap.expected_cm, 2), gap.tolerance_cm} <= _numbers(screen)
            accepted = (gap.expected_cm + side * gap.tolerance_cm for side in (-1, 0, 1))
            assert {round(value, 2) for value in accepted} <= _numbers(paper)
    for word in (view.page_code, view.ledger_head, view.heading.patient_name):
        assert word in screen
        assert word in paper


def test_a_fraction_that_went_on_elsewhere_comes_back_to_where_it_began(
    department: Program,
) -> None:
    parts = dict.fromkeys(("AP upper", "PA upper", "AP lower", "PA lower"), 25.0)
    for place in "AB":
        treated(department.database, THIGH, "2026-03-02", position=place, metersets_mu=parts)
    view = _view(department, THIGH, "2026-03-02")
    assert (view.fraction, view.position, view.shift) == (1, "A", "yes")
    assert view.shift_words == "Fraction 1 was begun at A: what remains belongs there."
    assert [(field.previous_position, field.begun) for field in view.fields] == [("B", False)] * 2


def test_two_people_are_named_in_the_record(department: Program) -> None:
    from featherlog.actions.review import review  # noqa: PLC0415 - this test alone reviews

    treated(department.database, THIGH, "2026-03-02")
    row = review(department.database, THIGH).grid[0]
    assert (row.performer, row.verifier, row.delivered_at) == (
        THERAPIST,
        SECOND,
        "2026-03-02T09:00:00+01:00",
    )
