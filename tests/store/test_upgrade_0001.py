"""A database from before there were signatures keeps all of its entries, and its triggers."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

import pytest
import store_scenario as scenario
from sqlalchemy import text

from featherlog.errors import RefusedError, StoreError
from featherlog.store import ledger, migrate, queries
from featherlog.store.engine import migrating, open_engine, reading, writing
from featherlog.store.entry import Entry, canonical, hash_of
from featherlog.store.verify import verify

if TYPE_CHECKING:
    from collections.abc import Iterator

STORY = [scenario.staff(), scenario.staff("Hazel Heron", "administrator")]
CHANGES = ["UPDATE ledger_entry SET signatures = '[1]'", "DELETE FROM ledger_entry"]
_INSERT = text(
    "INSERT INTO ledger_entry VALUES (:number, :course, :kind, :who, :role, :meaning, :at, :text, "
    ":previous_hash, :hash)"
)
_STAFF = text("INSERT INTO staff VALUES (:name, :role, :entry)")


def entries() -> Iterator[Entry]:
    """Yield the story as the first version of the program wrote it."""
    previous = ledger.FIRST_HASH
    for number, draft in enumerate(STORY, start=1):
        entry = Entry(
            number=number,
            course=draft.course,
            kind=str(draft.kind),
            who=draft.who,
            role=draft.role,
            meaning=draft.meaning,
            at=draft.at,
            content=draft.content,
            text=canonical(draft.content),
            previous_hash=previous,
            hash="",
        )
        entry = replace(entry, hash=hash_of(entry))
        previous = entry.hash
        yield entry


@pytest.fixture
def old_url(empty_database_url: str, monkeypatch: pytest.MonkeyPatch) -> str:
    with monkeypatch.context() as patch:
        patch.setattr(migrate, "REVISIONS", ("0001",))
        migrate.create(empty_database_url, demo=False)
    with migrating(open_engine(empty_database_url)) as owner:
        for entry in entries():
            fields = ("number", "course", "kind", "who", "role", "meaning", "at", "text")
            row = {name: getattr(entry, name) for name in (*fields, "previous_hash", "hash")}
            owner.execute(_INSERT, row)
            owner.execute(_STAFF, entry.content | {"entry": entry.number})
    return empty_database_url


def test_it_is_told_to_upgrade(old_url: str) -> None:
    with pytest.raises(StoreError, match="older"), reading(open_engine(old_url)):
        pass


@pytest.mark.parametrize("change", CHANGES)
def test_it_keeps_its_entries_and_its_triggers(old_url: str, change: str) -> None:
    migrate.upgrade(old_url)
    with reading(open_engine(old_url)) as connection:
        assert list(ledger.entries(connection)) == list(entries())
        assert [row.name for row in queries.staff(connection)] == ["Hazel Heron", "Rowan Finch"]
        assert verify(connection).fault == ""
    with (
        pytest.raises(StoreError, match="is append-only"),
        writing(open_engine(old_url)) as connection,
    ):
        connection.execute(text(change))


def test_it_does_not_go_back(old_url: str) -> None:
    migrate.upgrade(old_url)
    with pytest.raises(RefusedError, match="would lose"):
        migrate.downgrade(old_url, "0001")
