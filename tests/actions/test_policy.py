"""A policy is set by version and holds from its entry on."""

from __future__ import annotations

from typing import TYPE_CHECKING

import pytest
from department import AUTHOR, CHECKER, PHYSICIAN, THERAPIST, THIGH, by, moment, treated

from featherlog.actions.departures import explain
from featherlog.actions.desk import practice_time
from featherlog.actions.documents import TEMPLATES
from featherlog.actions.ledger import list_entries, verify_ledger
from featherlog.actions.policy import set_policy, show_policy
from featherlog.errors import RefusedError
from featherlog.policy import DEFAULT_POLICY

if TYPE_CHECKING:
    from collections.abc import Iterator

    from program import Program


@pytest.fixture(autouse=True)
def february() -> Iterator[None]:
    with practice_time(moment("2026-02-28")):
        yield


def put(program: Program, *changes: tuple[str, str]) -> int:
    text = TEMPLATES["policy"]
    for written, instead in changes:
        assert written in text
        text = text.replace(written, instead)
    file = program.folder / "policy.toml"
    file.write_text(text, encoding="utf-8")
    return set_policy(program.database, file, by=by(AUTHOR))


def test_the_built_in_policy_holds_until_one_is_set(department: Program) -> None:
    view = show_policy(department.database)
    assert (view.version, view.entry, view.policy) == (0, None, DEFAULT_POLICY)


def test_the_latest_version_holds(department: Program) -> None:
    assert put(department) == 1
    assert put(department, ("My department", "Fernhollow")) == 2
    view = show_policy(department.database)
    assert (view.version, view.policy.department) == (2, "Fernhollow")
    assert view.entry == list_entries(department.database, None)[-1].entry


def test_times_are_told_in_its_zone(department: Program) -> None:
    put(department, ("Europe/Berlin", "America/Halifax"))
    put(department)
    assert list_entries(department.database, None)[-1].at == "2026-02-28T04:00:00-04:00"


def test_what_it_asks_two_people_for_takes_two(department: Program) -> None:
    database = department.database
    put(department, ('["approve a design"]', '["explain a departure"]'))
    treated(database, THIGH, "2026-03-02", position="B")
    with pytest.raises(RefusedError, match="two people must sign to explain a departure"):
        explain(database, THIGH, 1, by=by(AUTHOR), reason="misread")
    explain(database, THIGH, 1, by=by(AUTHOR), verified_by=by(PHYSICIAN), reason="misread")
    assert list_entries(database, None)[-1].signed_by == (AUTHOR, PHYSICIAN)
    assert verify_ledger(database, None, lambda _done, _total: None).fault == ""


def test_not_everyone_sets_it(department: Program) -> None:
    file = department.folder / "policy.toml"
    file.write_text(TEMPLATES["policy"], encoding="utf-8")
    with pytest.raises(RefusedError, match=f"{THERAPIST} has the role therapist and may not set"):
        set_policy(department.database, file, by=by(THERAPIST), verified_by=by(CHECKER))
