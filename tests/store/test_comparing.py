"""Projections that the ledger did not make are found, on both databases."""

from __future__ import annotations

import pytest
import signed_story as story
from sqlalchemy import text

from featherlog.store.engine import open_engine, reading, writing
from featherlog.store.verify import verify


@pytest.fixture
def told(database_url: str) -> str:
    people = story.everyone()
    strangers = [story.Person(name, "therapist") for name in ("älder Wren", "Zirbe Crane")]
    joining = [story.joins(one, people[story.HERON]) for one in strangers]
    story.tell(database_url, [*story.opening(people), *story.course(people), *joining])
    return database_url


def difference(url: str) -> str:
    with reading(open_engine(url)) as connection:
        return verify(connection).fault


def test_what_was_written_live_is_what_the_ledger_makes(told: str) -> None:
    assert difference(told) == ""


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
            "INSERT INTO staff VALUES ('Rowan Crane', 'therapist', 1, NULL)",
            "The row of staff Rowan Crane is there, but no ledger entry made it.",
        ),
    ],
)
def test_what_was_not_is_named(told: str, statement: str, fault: str) -> None:
    with writing(open_engine(told)) as connection:
        connection.execute(text(statement))
    assert difference(told) == fault
