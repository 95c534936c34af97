"""The ledger and the properties of a database refuse every change, whoever asks."""

from __future__ import annotations

import pytest
import store_scenario as scenario
from sqlalchemy import text

from featherlog.errors import StoreError
from featherlog.store.engine import open_engine, writing
from featherlog.store.ledger import append, entries
from featherlog.store.queries import properties

CHANGES = [
    "UPDATE ledger_entry SET who = 'Ash Plover'",
    "DELETE FROM ledger_entry",
    "UPDATE store_property SET value = 'yes'",
    "DELETE FROM store_property",
]
REPLACEMENTS = [
    "INSERT OR REPLACE INTO ledger_entry SELECT * FROM ledger_entry",
    "INSERT OR REPLACE INTO store_property VALUES ('demo', 'yes')",
]
TRUNCATIONS = ["TRUNCATE ledger_entry CASCADE", "TRUNCATE store_property"]


@pytest.mark.parametrize("change", CHANGES)
def test_no_row_is_changed_or_deleted(database_url: str, change: str) -> None:
    assert_refused(database_url, change)


@pytest.mark.parametrize("backend", ["sqlite"])
@pytest.mark.parametrize("change", REPLACEMENTS)
def test_no_row_is_replaced(database_url: str, change: str) -> None:
    assert_refused(database_url, change)


@pytest.mark.parametrize("backend", ["postgresql"])
@pytest.mark.parametrize("change", TRUNCATIONS)
def test_no_table_is_truncated(database_url: str, change: str) -> None:
    assert_refused(database_url, change)


def assert_refused(url: str, change: str) -> None:
    engine = open_engine(url)
    with writing(engine) as connection:
        written = append(connection, scenario.staff())
    with pytest.raises(StoreError, match="is append-only"), writing(engine) as connection:
        connection.execute(text(change))
    with writing(engine) as connection:
        assert list(entries(connection)) == [written]
        assert properties(connection) == {"demo": "no"}
