"""What a look at the whole ledger finds: the first entry that somebody changed, forged or broke."""

from __future__ import annotations

import re
from dataclasses import replace
from typing import TYPE_CHECKING

import msgspec
import pytest
import signed_story as story
import store_scenario as scenario
from signed_story import CRANE, FINCH, HERON, PLOVER, TEAL, WREN, Person, Told, joins, told
from sqlalchemy import delete, func, insert, text, update

from featherlog.policy import DEFAULT_POLICY, Act
from featherlog.store import ledger
from featherlog.store.engine import migrating, open_engine, reading, writing
from featherlog.store.entry import Draft, Kind, hash_of
from featherlog.store.tables import ledger_entry
from featherlog.store.verify import Head, Verified, verify

if TYPE_CHECKING:
    from collections.abc import Callable

    from sqlalchemy import Connection

    from featherlog.store.entry import Entry

PEOPLE = story.everyone()
OPENING, COURSE = story.opening(PEOPLE), story.course(PEOPLE)
HERE = len(OPENING) + len(COURSE)


def looked(url: str, earlier: Head | None = None) -> Verified:
    with reading(open_engine(url)) as connection:
        return verify(connection, earlier)


def tampered(url: str, backend: str, change: Callable[[Connection], None]) -> None:
    """Let somebody who owns the database change its ledger, and make all else fit."""
    with migrating(open_engine(url)) as owner:
        verbs = ("no_change",) if backend == "postgresql" else ("no_update", "no_delete")
        for verb in verbs:
            place = " ON ledger_entry" if backend == "postgresql" else ""
            owner.execute(text(f"DROP TRIGGER ledger_entry_{verb}{place}"))
        ledger.projection.empty(owner)
        change(owner)
        hashed_anew(owner)
    with writing(open_engine(url)) as connection:
        ledger.rebuild(connection)


def hashed_anew(owner: Connection) -> None:
    """Make the chain fit again, as anybody can who has no passphrase."""
    previous = "0" * 64
    for entry in list(ledger.entries(owner)):
        linked = replace(entry, previous_hash=previous)
        previous = hash_of(linked)
        values = {"previous_hash": linked.previous_hash, "hash": previous}
        owner.execute(
            update(ledger_entry).where(ledger_entry.c.number == entry.number).values(values)
        )


def forged(head: Entry, signatures: str, **content: object) -> Callable[[Connection], None]:
    """Return a change that adds a record nobody made."""

    def add(owner: Connection) -> None:
        draft = COURSE[-2].draft
        entry = replace(
            head,
            number=head.number + 1,
            kind=draft.kind,
            course=draft.course,
            who=PLOVER,
            role="therapist",
            text=ledger.canonical(draft.content | content),
            hash="f" * 64,
            signatures=signatures,
        )
        owner.execute(insert(ledger_entry).values(ledger.row_of(entry)))

    return add


def test_a_sound_ledger_fits(database_url: str) -> None:
    entries = story.tell(database_url, [*OPENING, *COURSE])
    signatures = sum(len(one.signers) for one in (*OPENING, *COURSE))
    head = f"{HERE}:{entries[-1].hash}"
    assert looked(database_url) == Verified(HERE, signatures, 0, head, None, "")


def test_an_empty_ledger_fits(database_url: str) -> None:
    assert looked(database_url) == Verified(0, 0, 0, "", None, "")


def test_a_ledger_from_before_there_were_keys_fits(database_url: str) -> None:
    unsigned = [scenario.staff(), scenario.machine(), scenario.prepared(), scenario.returned()]
    with writing(open_engine(database_url)) as connection:
        for draft in unsigned:
            ledger.append(connection, draft)
    assert (looked(database_url).fault, looked(database_url).signatures) == ("", 0)
    finch = Person(FINCH, "administrator")
    with writing(open_engine(database_url)) as connection:
        ledger.append(connection, scenario.staff(role="administrator"))
    first = told(scenario.draft(Kind.KEY_REPLACED, finch.content, course=None), finch)
    story.tell(database_url, [first])
    found = looked(database_url)
    assert (found.fault, found.signatures, found.unsigned) == ("", 1, 5)
    with writing(open_engine(database_url)) as connection:
        ledger.append(connection, scenario.machine())
    assert "does not fit: it is not signed" in looked(database_url).fault


def test_progress_is_told(database_url: str) -> None:
    with writing(open_engine(database_url)) as connection:
        for _ in range(1001):
            ledger.append(connection, scenario.machine())
    said: list[tuple[int, int]] = []
    with reading(open_engine(database_url)) as connection:
        verify(connection, progress=lambda done, total: said.append((done, total)))
    assert said == [(1000, 1001)]


def test_a_chain_hashed_anew_without_a_passphrase_is_found(database_url: str, backend: str) -> None:
    story.tell(database_url, [*OPENING, *COURSE])
    number = HERE - 1
    less = update(ledger_entry).where(ledger_entry.c.number == number)
    less = less.values(content=func.replace(ledger_entry.c.content, "99.5", "98.5"))
    tampered(database_url, backend, lambda owner: owner.execute(less) and None)
    with reading(open_engine(database_url)) as connection:
        assert ledger.first_fault(connection) is None
    found = looked(database_url)
    assert (found.fault_entry, found.entries) == (number, number - 1)
    assert found.fault.endswith(f"does not fit: the signature of {PLOVER} does not hold.")


@pytest.mark.parametrize(
    ("signatures", "content", "fault"),
    [
        ("[]", {}, "it is not signed"),
        ("[]", {"signed_by": [PLOVER, TEAL]}, "are not those of the people whom it names"),
        ("[{}]", {}, "its signatures cannot be read"),
        ("{", {}, "its signatures cannot be read"),
        ("COPY", {"signed_by": [PLOVER, TEAL]}, f"the signature of {PLOVER} does not hold"),
    ],
)
def test_an_entry_forged_without_a_passphrase_is_found(
    database_url: str, backend: str, signatures: str, content: dict[str, object], fault: str
) -> None:
    *_, record, last = story.tell(database_url, [*OPENING, *COURSE])
    copied = record.signatures if signatures == "COPY" else signatures
    tampered(database_url, backend, forged(last, copied, **content))
    found = looked(database_url)
    assert (found.fault_entry, fault in found.fault) == (HERE + 1, True)


def test_a_cut_tail_is_found_with_an_earlier_head(database_url: str, backend: str) -> None:
    entries = story.tell(database_url, [*OPENING, *COURSE])
    heads = [Head(entry.number, entry.hash[:12]) for entry in entries]
    assert all(looked(database_url, head).fault == "" for head in heads)
    cut = delete(ledger_entry).where(ledger_entry.c.number > HERE - 2)
    tampered(database_url, backend, lambda owner: owner.execute(cut) and None)
    assert looked(database_url).fault == ""
    assert looked(database_url, heads[-3]).fault == ""
    assert looked(database_url, heads[-2]).fault == (
        f"The ledger ends at entry {HERE - 2}, but the earlier head is of entry {HERE - 1}: "
        "entries were cut off its end."
    )


@pytest.mark.parametrize("backend", ["sqlite"])
def test_a_ledger_written_anew_with_other_keys_is_found_with_an_earlier_head(
    database_url: str,
) -> None:
    others = story.everyone()
    story.tell(database_url, [*story.opening(others), *story.course(others)])
    assert looked(database_url).fault == ""
    found = looked(database_url, Head(3, "0" * 12))
    assert (found.fault_entry, "was written anew" in found.fault) == (3, True)


@pytest.mark.parametrize(
    ("change", "table", "entry"),
    [
        ("UPDATE delivery SET meterset_mu = 99 WHERE beam = 'right'", "delivery", HERE - 1),
        ("DELETE FROM observation", "observation", HERE - 1),
        ("UPDATE course SET next_position = 'A'", "course", HERE),
        ("UPDATE staff SET role = 'physicist' WHERE name = 'Ash Plover'", "staff", 5),
        ("UPDATE staff_key SET to_entry = 7 WHERE name = 'Maple Teal'", "staff_key", 6),
        ("INSERT INTO policy VALUES (1, '{}', 2)", "policy", 2),
    ],
)
def test_a_table_changed_behind_the_program_is_found(
    database_url: str, change: str, table: str, entry: int
) -> None:
    story.tell(database_url, [*OPENING, *COURSE])
    with migrating(open_engine(database_url)) as owner:
        owner.execute(text(change))
    found = looked(database_url)
    assert (found.fault_entry, f"The row of {table} " in found.fault) == (entry, True)


FINCH_, WREN_, HERON_ = PEOPLE[FINCH], PEOPLE[WREN], PEOPLE[HERON]
CRANE_, PLOVER_, TEAL_ = PEOPLE[CRANE], PEOPLE[PLOVER], PEOPLE[TEAL]
NEW_PLOVER, ROOK = Person(PLOVER, "therapist"), Person("Elm Rook", "administrator")
KEY = scenario.draft(Kind.KEY_REPLACED, NEW_PLOVER.content, course=None)
RESTORED = scenario.draft(
    Kind.ADMINISTRATOR_RESTORED, ROOK.content | {"role": "administrator"}, course=None
)
PAUSED = scenario.paused()
RELEASED = scenario.draft(Kind.COURSE_RELEASED, {"next_date": "2025-03-06"})
STRICT = replace(DEFAULT_POLICY, two_people=(*DEFAULT_POLICY.two_people, Act.EXPLAIN))


def policy(version: int = 1) -> Draft:
    content = {"version": version, "policy": msgspec.to_builtins(STRICT)}
    return scenario.draft(Kind.POLICY_SET, content, course=None)


CASES = {
    "a role that may not": (
        [told(scenario.prepared(), PLOVER_)],
        "Ash Plover has the role therapist and may not prepare a design",
    ),
    "another role than one's own": (
        [told(scenario.prepared(), replace(PLOVER_, role="physicist"))],
        "Ash Plover had another key or role than it is signed with",
    ),
    "a stranger": (
        [told(scenario.prepared(), Person("Elm Rook", "physicist"))],
        "Elm Rook had another key or role than it is signed with",
    ),
    "a key of one's own making": (
        [told(scenario.prepared(), Person(FINCH, "physicist"))],
        "Rowan Finch had another key or role than it is signed with",
    ),
    "the author's own check": (
        [COURSE[0], told(scenario.checked(), FINCH_)],
        "Rowan Finch prepared this revision and may not check it",
    ),
    "the author's own approval": (
        [*COURSE[:2], told(scenario.approved(), CRANE_, FINCH_)],
        "Rowan Finch prepared this revision and may not approve it",
    ),
    "approval by one": (
        [*COURSE[:2], told(scenario.approved(), CRANE_)],
        "two people must sign to approve a design",
    ),
    "approval without check": (
        [COURSE[0], told(scenario.approved(), CRANE_, WREN_)],
        "revision 1 is prepared, not checked",
    ),
    "confirmation without approval": (
        [*COURSE[:2], COURSE[3]],
        "no revision of the course is approved",
    ),
    "one person twice": (
        [*COURSE[:3], told(scenario.confirmed(), PLOVER_, PLOVER_)],
        "one person signed twice",
    ),
    "a verifier who did not sign": (
        [
            *COURSE[:3],
            Told(
                replace(COURSE[3].draft, content=COURSE[3].draft.content | {"verifier": CRANE}),
                (PLOVER_, TEAL_),
            ),
        ],
        "performer and verifier are not the two who signed it",
    ),
    "another who made it": (
        [Told(replace(COURSE[0].draft, who=WREN), (FINCH_,))],
        "it is made by Linden Wren (physicist), but signed by Rowan Finch first",
    ),
    "a revision left out": (
        [told(scenario.prepared(2), FINCH_)],
        "it is revision 2, but 1 is due",
    ),
    "a content that is not the one hashed": (
        [told(scenario.prepared(plan={"positions": ["B"]}), FINCH_)],
        "its content hash is not that of its design, plan and machine",
    ),
    "a departure explained twice": (
        [*COURSE, told(scenario.explained(), FINCH_)],
        "departure 1 is not open",
    ),
    "somebody who has left": (
        [told(scenario.left(FINCH), HERON_), told(scenario.prepared(), FINCH_)],
        "Rowan Finch had another key or role",
    ),
    "a key that was replaced": (
        [*COURSE[:3], told(KEY, HERON_, NEW_PLOVER), told(scenario.confirmed(), PLOVER_, TEAL_)],
        "Ash Plover had another key or role",
    ),
    "a new key whose owner did not sign": (
        [told(KEY, HERON_)],
        "the new key of Ash Plover did not sign it",
    ),
    "a key replaced by a colleague": (
        [told(KEY, TEAL_, NEW_PLOVER)],
        "Maple Teal has the role therapist and may not replace a key",
    ),
    "a key replaced by itself": (
        [told(KEY, NEW_PLOVER, NEW_PLOVER)],
        "Ash Plover had another key or role",
    ),
    "a key replaced by nobody": (
        [told(KEY, NEW_PLOVER)],
        "one person who is administrator must sign to replace a key",
    ),
    "a new key in a role of one's own": (
        [told(KEY, HERON_, replace(NEW_PLOVER, role="physicist"))],
        "the new key of Ash Plover did not sign it",
    ),
    "an administrator who restores themselves": (
        [told(RESTORED, Person("Elm Rook", "physicist"), CRANE_, ROOK)],
        "Elm Rook had another key or role",
    ),
    "a person who adds themselves": (
        [joins(ROOK)],
        "one person who is administrator must sign to add staff",
    ),
    "an administrator restored by two of one role": (
        [told(RESTORED, FINCH_, WREN_, ROOK)],
        "the two who restore an administrator must have different roles",
    ),
    "an administrator restored by one": (
        [told(RESTORED, FINCH_, ROOK)],
        "two people must sign to restore an administrator",
    ),
    "confirmation of a paused course": (
        [*COURSE[:3], told(PAUSED, PLOVER_), COURSE[3]],
        "the course is paused",
    ),
    "release of a course that goes on": (
        [*COURSE[:3], told(RELEASED, WREN_)],
        "the course is not paused",
    ),
    "one where the policy asks for two": (
        [told(policy(), FINCH_), *COURSE],
        "two people must sign to explain a departure",
    ),
    "a policy left out": (
        [told(policy(2), FINCH_)],
        "it is policy 2, but 1 is due",
    ),
}


@pytest.mark.parametrize("backend", ["sqlite"])
@pytest.mark.parametrize("case", CASES)
def test_what_nobody_may_do_is_found(database_url: str, case: str) -> None:
    wrong, fault = CASES[case]
    entries = story.tell(database_url, [*OPENING, *wrong])
    found = looked(database_url)
    assert found.fault_entry == entries[-1].number
    assert re.search(fault.replace("(", r"\(").replace(")", r"\)"), found.fault), found.fault


@pytest.mark.parametrize("backend", ["sqlite"])
def test_what_people_may_do_fits(database_url: str) -> None:
    newer = Person(PLOVER, "therapist")
    again = Person(FINCH, "physicist")
    right = [
        told(KEY, HERON_, NEW_PLOVER),
        told(scenario.draft(Kind.KEY_REPLACED, newer.content, course=None), NEW_PLOVER, newer),
        told(RESTORED, FINCH_, CRANE_, ROOK),
        told(scenario.left(FINCH), ROOK),
        joins(again, HERON_),
        told(policy(), again),
        *story.course({**PEOPLE, FINCH: again, PLOVER: newer})[:-1],
        told(PAUSED, TEAL_),
        told(RELEASED, WREN_),
        told(scenario.explained(), again, WREN_),
    ]
    story.tell(database_url, [*OPENING, *right])
    with writing(open_engine(database_url)) as connection:
        ledger.append(connection, scenario.signing_failed(TEAL))
    assert looked(database_url).fault == ""
