"""The chain of entries: how it is made, and that its first fault is named."""

from __future__ import annotations

import json
import re
from hashlib import sha256

import pytest
import store_scenario as scenario
from sqlalchemy import text

from featherlog.errors import IntegrityError
from featherlog.store import projection
from featherlog.store.engine import migrating, open_engine, reading, writing
from featherlog.store.entry import Draft, Kind
from featherlog.store.ledger import append, entries, first_fault, head

CHAIN = [scenario.staff(f"Person {number}") for number in (1, 2, 3)]


def tell(url: str, *drafts: Draft) -> None:
    with writing(open_engine(url)) as connection:
        for told in drafts:
            append(connection, told)


def test_each_entry_names_the_one_before_and_hashes_all_it_says(database_url: str) -> None:
    tell(database_url, *CHAIN)
    with reading(open_engine(database_url)) as connection:
        first, second, third = entries(connection)
        assert head(connection) == third
    assert first.previous_hash == "0" * 64
    assert third.previous_hash == second.hash
    said = {
        "number": 2,
        "course": None,
        "kind": "staff added",
        "who": "Rowan Finch",
        "role": "physicist",
        "meaning": "author",
        "at": "2025-03-03T08:00:00+01:00",
        "content": '{"name":"Person 2","role":"physicist"}',
        "previous_hash": first.hash,
    }
    # For plain ASCII text and small integers, sorted compact JSON is what RFC 8785 asks for.
    canonical = json.dumps(said, sort_keys=True, separators=(",", ":"))
    assert second.hash == sha256(canonical.encode()).hexdigest()


def test_the_entries_of_one_course_are_found(database_url: str) -> None:
    tell(database_url, *scenario.whole_story())
    with reading(open_engine(database_url)) as connection:
        numbers = [entry.number for entry in entries(connection, scenario.COURSE)]
    assert numbers == [*range(5, 17), 23]


def test_a_sound_chain_has_no_fault(database_url: str) -> None:
    tell(database_url, *scenario.whole_story())
    with reading(open_engine(database_url)) as connection:
        assert first_fault(connection) is None


@pytest.mark.parametrize(
    ("tampering", "fault"),
    [
        ("UPDATE ledger_entry SET who = 'X' WHERE number = 2", r"entry 2 .* was changed"),
        ("UPDATE ledger_entry SET content = '{' WHERE number = 2", r"entry 2 .* was changed"),
        ("UPDATE ledger_entry SET course = 'X' WHERE number = 1", r"entry 1 .* was changed"),
        ("DELETE FROM ledger_entry WHERE number = 2", "entry 2 is missing: entry 3 stands"),
        ("DELETE FROM ledger_entry WHERE number = 1", "entry 1 is missing"),
        (
            "UPDATE ledger_entry SET hash = substr(hash, 2) || substr(hash, 1, 1) WHERE number = 3",
            r"entry 3 .* was changed",
        ),
        (
            "UPDATE ledger_entry SET previous_hash = hash WHERE number = 3",
            r"entry 3 .* does not follow",
        ),
    ],
)
def test_the_first_fault_of_a_chain_is_named(
    database_url: str, backend: str, tampering: str, fault: str
) -> None:
    tell(database_url, *CHAIN)
    with migrating(open_engine(database_url)) as owner:
        projection.empty(owner)
        for name in ("no_change",) if backend == "postgresql" else ("no_update", "no_delete"):
            place = " ON ledger_entry" if backend == "postgresql" else ""
            owner.execute(text(f"DROP TRIGGER ledger_entry_{name}{place}"))
        owner.execute(text(tampering))
    with reading(open_engine(database_url)) as connection:
        found = first_fault(connection)
    assert found is not None
    assert re.search(fault, found)


@pytest.mark.parametrize(
    ("story", "fault"),
    [
        ([scenario.draft("moon phase", {})], "'moon phase', which this program does not know"),
        ([scenario.draft(Kind.STAFF_ADDED, {"name": "Ash Plover"})], "lacks 'role'"),
        ([scenario.checked()], "speaks of a revision of course 'FIR-1'"),
        ([scenario.prepared(), scenario.approved(2)], "speaks of a revision of course 'FIR-1'"),
        ([scenario.recorded()], "does not fit those before it"),
        ([scenario.prepared(), scenario.prepared()], "does not fit those before it"),
        ([scenario.prepared(course="FIR-2")], "names two courses"),
        ([scenario.prepared(), scenario.explained()], "speaks of a departure"),
    ],
)
def test_an_entry_that_does_not_fit_is_refused_whole(
    database_url: str, story: list[Draft], fault: str
) -> None:
    with pytest.raises(IntegrityError, match=fault):
        tell(database_url, *story)
    with reading(open_engine(database_url)) as connection:
        assert head(connection) is None
