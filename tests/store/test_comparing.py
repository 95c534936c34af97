"""Projections that the ledger did not make are found, on both databases."""

from __future__ import annotations

import pytest
import store_scenario as scenario
from sqlalchemy import text

from featherlog.store.comparing import first_difference
from featherlog.store.engine import open_engine, reading, writing
from featherlog.store.ledger import append


@pytest.fixture
def told(database_url: str) -> str:
    with writing(open_engine(database_url)) as connection:
        for draft in scenario.whole_story():
            append(connection, draft)
        append(connection, scenario.staff("älder Wren"))
        append(connection, scenario.staff("Zirbe Crane"))
    return database_url


def difference(url: str) -> str | None:
    with reading(open_engine(url)) as connection:
        return first_difference(connection)


def test_what_was_written_live_is_what_the_ledger_makes(told: str) -> None:
    assert difference(told) is None


@pytest.mark.parametrize(
    ("statement", "fault"),
    [
        (
            "UPDATE delivery SET meterset_mu = 101 WHERE entry = 11 AND beam = 'left'",
            "The row of delivery 11/upper/left differs from what the ledger made, in meterset_mu.",
        ),
        (
            "DELETE FROM observation WHERE entry = 11",
            "The row of observation 11/upper spine/posterior is missing, but the ledger made it.",
        ),
        (
            "INSERT INTO staff VALUES ('Ash Plover', 'therapist', 1, NULL)",
            "The row of staff Ash Plover is there, but no ledger entry made it.",
        ),
    ],
)
def test_what_was_not_is_named(told: str, statement: str, fault: str) -> None:
    with writing(open_engine(told)) as connection:
        connection.execute(text(statement))
    assert difference(told) == fault
