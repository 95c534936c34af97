"""What became of a printed page, from the ledger alone."""

from __future__ import annotations

from itertools import pairwise
from typing import TYPE_CHECKING

import pytest
from department import AUTHOR, BREAST, CHECKER, PHYSICIAN, THIGH, by, moment, recorded, treated
from program import SCENARIO

from featherlog.actions.course_life import end, pause, release
from featherlog.actions.decisions import check_position, decide
from featherlog.actions.departures import explain
from featherlog.actions.designs import approve, check, prepare, send_back
from featherlog.actions.desk import practice_time
from featherlog.actions.ledger import list_entries
from featherlog.actions.paper_codes import LEAVES_PAGES_VALID, PageCheck, check_page
from featherlog.actions.today import today
from featherlog.errors import InputError, NotFoundError
from featherlog.store import projecting_delivery, projecting_life, projection

if TYPE_CHECKING:
    from program import Program

DAY = "2026-03-02"


def _code(program: Program, key: str = THIGH) -> str:
    with practice_time(moment(DAY)):
        return today(program.database, key).page_code


def _check(program: Program, code: str) -> PageCheck:
    return check_page(program.database, code)


def _last_entry(program: Program) -> int:
    return list_entries(program.database, None)[-1].entry


def test_a_page_is_valid_while_nothing_happens(department: Program) -> None:
    found = _check(department, _code(department))
    assert (found.status, found.course, found.fraction) == ("valid", THIGH, 1)
    assert found.words == (
        f"{found.code} is valid: a page of course {THIGH}, fraction 1, as the course stands since "
        f"entry {found.entry} (2026-02-27T09:00:00+01:00)"
    )


def test_it_stays_valid_beside_other_courses_and_what_changes_no_setting(
    department: Program,
) -> None:
    code = _code(department)
    recorded(department.database, BREAST, DAY, position="A")
    check_position(department.database, THIGH, "B", by=by(CHECKER))
    assert _check(department, code).status == "valid"


def test_a_superseded_page_names_the_entry_since_which_it_is(department: Program) -> None:
    code = _code(department)
    done = treated(department.database, THIGH, DAY)
    treated(department.database, THIGH, "2026-03-03")
    found = _check(department, code)
    assert (found.status, found.superseded_by, found.superseded_kind) == (
        "superseded",
        done.entry,
        "fraction recorded",
    )
    assert found.superseded_at == "2026-03-02T09:00:00+01:00"
    assert found.words.endswith(
        f"by entry {done.entry} (fraction recorded, Ash Plover); print a new one"
    )


def test_every_page_of_a_whole_life_is_known(department: Program) -> None:
    """From the design to an early end: each page superseded by what came next, the last valid."""
    database, key = department.database, "FH-2050"
    text = (SCENARIO / "thigh.toml").read_text(encoding="utf-8").replace(THIGH, key)
    file = department.folder / "life.toml"
    file.write_text(text, encoding="utf-8")
    acts = [
        lambda: prepare(database, file, by=by(AUTHOR)),
        lambda: send_back(database, key, reason="gap", by=by(CHECKER)),
        lambda: prepare(database, file, by=by(AUTHOR)),
        lambda: check(database, key, by=by(CHECKER)),
        lambda: approve(database, key, by=by(PHYSICIAN), verified_by=by(CHECKER)),
        lambda: recorded(database, key, DAY, position="B", metersets_mu={"AP lower": 20.0}),
        lambda: explain(database, key, 1, by=by(AUTHOR), reason="misread"),
        lambda: decide(database, key, 1, by=by(AUTHOR), decision="finish it"),
        lambda: recorded(database, key, DAY, position="B"),
        lambda: pause(database, key, by=by(AUTHOR), reason="fever"),
        lambda: release(database, key, by=by(AUTHOR), reason="well again"),
        lambda: end(database, key, by=by(PHYSICIAN), reason="wish of the patient"),
    ]
    pages = []
    for act in acts:
        with practice_time(moment(DAY)):
            act()
        pages.append((_code(department, key), _last_entry(department)))
    for (code, entry), (_, following) in pairwise(pages):
        found = _check(department, code)
        assert (found.status, found.course) == ("superseded", key)
        assert (found.entry, found.superseded_by) == (entry, following)
    assert _check(department, pages[-1][0]).status == "valid"


def test_a_code_may_be_typed_as_it_is_read(department: Program) -> None:
    code = _code(department)
    misread = code.replace("O", "0").replace("I", "1").replace("B", "8")
    for typed in (code.lower(), code.replace("-", ""), f" {misread} "):
        assert _check(department, typed).code == code


def test_an_unknown_code_is_told(department: Program) -> None:
    found = _check(department, "AAAA-AAAA")
    assert (found.status, found.course) == ("unknown", "")
    assert found.words == "no page of this database has the code AAAA-AAAA; do not use it"


@pytest.mark.parametrize("code", ["", "AAAA", "AAAA-AAAA-AAAA", "AAAA-AAA9"])
def test_what_is_no_code_is_refused(department: Program, code: str) -> None:
    with pytest.raises(InputError, match="but a code has eight letters and figures"):
        _check(department, code)


def test_one_course_can_be_looked_at_alone(department: Program) -> None:
    code = _code(department)
    assert check_page(department.database, code, THIGH).status == "valid"
    assert check_page(department.database, code, BREAST).status == "unknown"
    with pytest.raises(NotFoundError, match="there is no course 'FH-9'"):
        check_page(department.database, code, "FH-9")


def test_the_entries_that_leave_pages_valid_are_those_that_change_no_course() -> None:
    still = {projecting_delivery.confirmed, projecting_life.noted}
    assert {kind for kind, by_it in projection._PROJECTORS.items() if by_it in still} == (
        LEAVES_PAGES_VALID
    )
