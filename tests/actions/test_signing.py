"""Who may sign, what a wrong passphrase does, and the procedures of the staff list."""

from __future__ import annotations

from typing import TYPE_CHECKING

import pytest
from department import (
    ADMINISTRATOR,
    AUTHOR,
    CHECKER,
    PHYSICIAN,
    SECOND,
    THERAPIST,
    THIGH,
    by,
    confirmed,
    moment,
)
from program import PASSPHRASE, SCENARIO

from featherlog.actions.desk import Signer, practice_time
from featherlog.actions.ledger import list_entries, verify_ledger
from featherlog.actions.machines import add_machine
from featherlog.actions.staff import (
    add_staff,
    list_staff,
    remove_staff,
    replace_key,
    restore_administrator,
)
from featherlog.errors import InputError, NotFoundError, RefusedError

if TYPE_CHECKING:
    from collections.abc import Iterator

    from program import Program

NEW, WHY = "another bird altogether", "passphrase forgotten"
ROOK = "Elm Rook"


@pytest.fixture(autouse=True)
def february() -> Iterator[None]:
    with practice_time(moment("2026-02-28")):
        yield


@pytest.fixture
def slept(monkeypatch: pytest.MonkeyPatch) -> list[int]:
    waits: list[int] = []
    monkeypatch.setattr("featherlog.actions.signing.sleep", waits.append)
    return waits


def knowing(name: str, passphrase: str) -> Signer:
    return Signer(name, lambda: passphrase)


def never(name: str) -> Signer:
    """Return a person who must not be asked."""

    def fail() -> str:
        pytest.fail(f"{name} was asked for a passphrase")

    return Signer(name, fail)


def describe_machine(database: str, signer: Signer) -> None:
    add_machine(database, SCENARIO / "alder.toml", by=signer)


def kinds(database: str, last: int) -> list[tuple[str, tuple[str, ...]]]:
    lines = list_entries(database, None)
    return [(line.kind, line.signed_by) for line in lines[-last:]]


def fault(database: str) -> str:
    return verify_ledger(database, None, lambda _done, _total: None).fault


class TestWrongPassphrase:
    """It is on record, slows answers down, and locks nobody out."""

    def test_it_signs_nothing_but_is_on_record(self, department: Program, slept: list[int]) -> None:
        before = len(list_entries(department.database, None))
        with pytest.raises(RefusedError, match=rf"not the passphrase of {AUTHOR}.* 1 s longer"):
            describe_machine(department.database, knowing(AUTHOR, NEW))
        assert len(list_entries(department.database, None)) == before + 1
        assert kinds(department.database, 1) == [("signing failed", ())]
        assert slept == [0]
        assert fault(department.database) == ""

    def test_answers_slow_down_until_the_next_success(
        self, department: Program, slept: list[int]
    ) -> None:
        for _ in range(7):
            with pytest.raises(RefusedError):
                describe_machine(department.database, knowing(AUTHOR, NEW))
        describe_machine(department.database, by(AUTHOR))
        describe_machine(department.database, by(AUTHOR))
        assert slept == [0, 1, 2, 4, 8, 16, 30, 30, 0]

    def test_another_person_does_not_wait(self, department: Program, slept: list[int]) -> None:
        with pytest.raises(RefusedError):
            describe_machine(department.database, knowing(AUTHOR, NEW))
        describe_machine(department.database, by(CHECKER))
        assert slept == [0, 0]

    @pytest.mark.usefixtures("slept")
    def test_the_state_of_a_course_is_not_touched(self, department: Program) -> None:
        confirmed(department.database, THIGH, "2026-03-02")
        entries = list_entries(department.database, THIGH)
        with pytest.raises(RefusedError):
            describe_machine(department.database, knowing(AUTHOR, NEW))
        assert list_entries(department.database, THIGH) == entries


class TestAskedLast:
    """Nobody types a passphrase for what is refused anyway."""

    def test_a_stranger_is_not_asked(self, department: Program) -> None:
        with pytest.raises(NotFoundError, match=f"nobody called '{ROOK}'"):
            describe_machine(department.database, never(ROOK))

    def test_a_role_that_may_not_is_not_asked(self, department: Program) -> None:
        with pytest.raises(RefusedError, match="may not add a machine"):
            describe_machine(department.database, never(THERAPIST))


def test_a_newcomer_signs_with_their_own_passphrase(department: Program) -> None:
    database = department.database
    add_staff(database, newcomer=knowing(ROOK, NEW), role="physicist", by=by(ADMINISTRATOR))
    assert kinds(database, 1) == [("staff added", (ADMINISTRATOR, ROOK))]
    describe_machine(database, knowing(ROOK, NEW))
    assert fault(database) == ""


def test_a_newcomer_needs_a_long_passphrase(department: Program) -> None:
    before = list_entries(department.database, None)
    with pytest.raises(InputError, match="must have at least 12"):
        add_staff(
            department.database,
            newcomer=knowing(ROOK, "short"),
            role="physicist",
            by=by(ADMINISTRATOR),
        )
    assert list_entries(department.database, None) == before


@pytest.mark.usefixtures("slept")
def test_a_lost_passphrase_is_replaced_by_an_administrator(department: Program) -> None:
    database = department.database
    replace_key(database, owner=knowing(AUTHOR, NEW), reason=WHY, by=by(ADMINISTRATOR))
    assert kinds(database, 1) == [("key replaced", (ADMINISTRATOR, AUTHOR))]
    with pytest.raises(RefusedError, match="not the passphrase"):
        describe_machine(database, by(AUTHOR))
    describe_machine(database, knowing(AUTHOR, NEW))
    assert fault(database) == ""


def test_a_person_changes_their_own_passphrase(department: Program) -> None:
    database = department.database
    replace_key(database, owner=knowing(THERAPIST, NEW), reason=WHY, by=by(THERAPIST))
    assert kinds(database, 1) == [("key replaced", (THERAPIST, THERAPIST))]
    assert fault(database) == ""


@pytest.mark.parametrize(
    ("owner", "who", "reason", "words"),
    [
        (AUTHOR, CHECKER, WHY, "may not replace a key"),
        (ROOK, ADMINISTRATOR, WHY, "nobody called 'Elm Rook'"),
        (AUTHOR, ADMINISTRATOR, " ", "--reason is empty"),
    ],
)
def test_a_key_is_not_replaced(
    owner: str, who: str, reason: str, words: str, department: Program
) -> None:
    with pytest.raises((InputError, NotFoundError, RefusedError), match=words):
        replace_key(department.database, owner=never(owner), reason=reason, by=never(who))


def test_somebody_who_has_left_cannot_sign_and_may_come_back(department: Program) -> None:
    database = department.database
    remove_staff(database, name=AUTHOR, reason="moved away", by=by(ADMINISTRATOR))
    with pytest.raises(RefusedError, match=f"{AUTHOR} has left the department"):
        describe_machine(database, never(AUTHOR))
    [line] = [line for line in list_staff(database) if line.name == AUTHOR]
    assert (line.key, line.left_entry is None) == ("", False)
    add_staff(database, newcomer=knowing(AUTHOR, NEW), role="physicist", by=by(ADMINISTRATOR))
    describe_machine(database, knowing(AUTHOR, NEW))
    assert fault(database) == ""


def test_the_last_administrator_does_not_leave(department: Program) -> None:
    with pytest.raises(RefusedError, match="is the last administrator; add another one first"):
        remove_staff(department.database, name=ADMINISTRATOR, reason=WHY, by=by(ADMINISTRATOR))


@pytest.mark.parametrize("name", [ADMINISTRATOR, ROOK])
def test_two_of_different_roles_restore_an_administrator(name: str, department: Program) -> None:
    database = department.database
    restore_administrator(
        database,
        owner=knowing(name, NEW),
        reason=WHY,
        by=by(AUTHOR),
        verified_by=by(PHYSICIAN),
    )
    assert kinds(database, 1) == [("administrator restored", (AUTHOR, PHYSICIAN, name))]
    remove_staff(database, name=SECOND, reason="moved away", by=knowing(name, NEW))
    assert fault(database) == ""


@pytest.mark.parametrize(
    ("name", "two", "words"),
    [
        (ADMINISTRATOR, (AUTHOR, CHECKER), "are both physicist; two people of different roles"),
        (ADMINISTRATOR, (AUTHOR, AUTHOR), "cannot restore an administrator and verify it"),
        (AUTHOR, (AUTHOR, PHYSICIAN), "cannot restore themselves"),
        ("hazel  heron", (AUTHOR, PHYSICIAN), "'Hazel Heron' is on the staff list already"),
        (ROOK, (ROOK, PHYSICIAN), "cannot restore themselves"),
    ],
)
def test_an_administrator_is_not_restored(
    name: str, two: tuple[str, str], words: str, department: Program
) -> None:
    first, second = map(never, two)
    with pytest.raises((InputError, RefusedError), match=words):
        restore_administrator(
            department.database, owner=never(name), reason=WHY, by=first, verified_by=second
        )


def test_a_passphrase_is_not_kept(department: Program) -> None:
    from pathlib import Path  # noqa: PLC0415 - this test alone looks into the file

    assert PASSPHRASE.encode() not in Path(department.database).read_bytes()
