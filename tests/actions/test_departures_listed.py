"""Departures by severity, with what they did to the dose and what the department flags."""

from __future__ import annotations

from typing import TYPE_CHECKING

import pytest
from department import AUTHOR, PHYSICIAN, THIGH, by, moment, recorded, treated

from featherlog.actions.courses import list_courses
from featherlog.actions.decisions import decide
from featherlog.actions.departures import explain, list_departures
from featherlog.actions.desk import practice_time
from featherlog.actions.documents import TEMPLATES
from featherlog.actions.policy import set_policy
from featherlog.errors import InputError, NotFoundError, RefusedError

if TYPE_CHECKING:
    from program import Program

    from featherlog.views.common import DepartureLine

WEEK = ("2026-03-02", "2026-03-03", "2026-03-04", "2026-03-05", "2026-03-06")


def _apart(program: Program, day: str = "2026-03-02") -> None:
    treated(program.database, THIGH, day, field_positions={"lower thigh": "C"})


def _thresholds(program: Program, *, total: float, fraction: float, weekly: float) -> None:
    text = TEMPLATES["policy"]
    for name, percent in (("total", total), ("fraction", fraction), ("weekly", weekly)):
        [line] = [line for line in text.splitlines() if line.startswith(f"{name}_percent")]
        text = text.replace(line, f"{name}_percent = {percent}")
    file = program.folder / "policy.toml"
    file.write_text(text, encoding="utf-8")
    with practice_time(moment("2026-03-01")):
        set_policy(program.database, file, by=by(AUTHOR))


def _listed(program: Program) -> tuple[DepartureLine, ...]:
    return list_departures(program.database, THIGH)


def test_the_gravest_undecided_come_first(department: Program) -> None:
    treated(department.database, THIGH, WEEK[0], gaps_cm={"mid thigh": 3.0})
    treated(department.database, THIGH, WEEK[1], position="B")
    recorded(department.database, THIGH, WEEK[2], position="A")
    _apart(department, WEEK[3])
    kinds = [line.kind for line in _listed(department)]
    assert kinds == ["fields apart", "other position", "skin gap", "not confirmed"]
    apart = _listed(department)[0].number
    explain(department.database, THIGH, apart, by=by(AUTHOR), reason="label misread")
    assert _listed(department)[0].kind == "fields apart"
    decide(department.database, THIGH, apart, by=by(AUTHOR), decision="no compensation")
    assert [line.kind for line in _listed(department)][-1] == "fields apart"


def test_fields_apart_have_the_width_and_dose_of_their_strip(department: Program) -> None:
    """Thirty gray in fifteen fractions; the lower field two steps toward the feet once."""
    _apart(department)
    ((strip,),) = [line.doses for line in _listed(department)]
    assert (strip.place, strip.width_cm) == ("strip at mid thigh", 2.0)
    assert (strip.fraction_gy, strip.fraction_planned_gy) == (0.0, 2.0)
    assert (strip.total_gy, strip.total_planned_gy) == pytest.approx((28.0, 30.0))


def test_an_extra_fraction_tells_its_dose_and_another_position_none(department: Program) -> None:
    for number in range(1, 16):
        recorded(department.database, THIGH, WEEK[0], fraction=number, position="A")
    treated_extra = recorded(department.database, THIGH, WEEK[1], position="C")
    lines = [line for line in _listed(department) if line.fraction == treated_extra.fraction]
    doses = {line.kind: [dose.total_gy for dose in line.doses] for line in lines}
    assert doses["extra fraction"] == pytest.approx([32.0, 32.0])
    assert doses["not confirmed"] == []


class TestThresholds:
    """A figure at the department's threshold is flagged for a person, and no other."""

    def test_none_is_flagged_where_none_is_set(self, department: Program) -> None:
        _apart(department)
        assert [line.flags for line in _listed(department)] == [()]

    def test_each_is_flagged_from_its_own_figure_on(self, department: Program) -> None:
        # One fraction of 2 Gy is missing: of 30 Gy, of 2 Gy, of a week of five.
        _thresholds(department, total=6.6, fraction=100.0, weekly=20.0)
        _apart(department)
        (line,) = _listed(department)
        assert line.flags == tuple(
            f"{figure}, beyond the department's reporting threshold of {limit}: for a person's "
            "decision"
            for figure, limit in (
                ("6.7 %", "6.6 % of the total"),
                ("100.0 %", "100 % of one fraction"),
                ("20.0 %", "20 % of one week's dose"),
            )
        )

    def test_below_them_nothing_is_flagged(self, department: Program) -> None:
        _thresholds(department, total=6.8, fraction=101.0, weekly=20.1)
        _apart(department)
        assert [line.flags for line in _listed(department)] == [()]

    def test_a_week_adds_up(self, department: Program) -> None:
        _thresholds(department, total=90.0, fraction=200.0, weekly=40.0)
        for day in WEEK[:2]:
            elsewhere = {"lower thigh": "C"}
            recorded(department.database, THIGH, day, position="A", field_positions=elsewhere)
        flagged = {line.kind: len(line.flags) for line in _listed(department)}
        assert flagged == {"fields apart": 1, "not confirmed": 0}

    def test_what_is_still_to_come_is_not_missing(self, department: Program) -> None:
        _thresholds(department, total=1.0, fraction=30.0, weekly=10.0)
        part = {"AP lower": 0.0, "PA lower": 0.0}
        treated(department.database, THIGH, WEEK[0], metersets_mu=part)
        assert {line.flags for line in _listed(department)} == {()}


class TestDecisions:
    """A departure is open until a decision is signed."""

    def _open(self, program: Program) -> int:
        return next(c.open_departures for c in list_courses(program.database) if c.course == THIGH)

    def test_a_reason_leaves_it_open_and_a_decision_closes_it(self, department: Program) -> None:
        database = department.database
        _apart(department)
        statuses = [_listed(department)[0].status]
        explain(database, THIGH, 1, by=by(AUTHOR), reason="label misread")
        statuses.append(_listed(department)[0].status)
        assert self._open(department) == 1
        decide(database, THIGH, 1, by=by(PHYSICIAN), decision="no compensation")
        (line,) = _listed(department)
        assert [*statuses, line.status] == ["open", "explained", "decided"]
        assert (line.decision, line.undecided, self._open(department)) == (
            "no compensation",
            False,
            0,
        )

    def test_it_needs_a_reason_first(self, department: Program) -> None:
        _apart(department)
        with pytest.raises(RefusedError, match="departure 1 of FH-2041 has no reason yet; give it"):
            decide(department.database, THIGH, 1, by=by(AUTHOR), decision="leave it")

    def test_it_is_made_once_and_says_something(self, department: Program) -> None:
        treated(department.database, THIGH, WEEK[0], position="B", reason="misread")
        with pytest.raises(InputError, match="--decision is empty"):
            decide(department.database, THIGH, 1, by=by(AUTHOR), decision=" ")
        decide(department.database, THIGH, 1, by=by(AUTHOR), decision="shares stay")
        with pytest.raises(NotFoundError, match="has no undecided departure 1"):
            decide(department.database, THIGH, 1, by=by(AUTHOR), decision="another")
