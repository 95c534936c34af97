"""An owner of the tables switches the triggers off and changes the ledger: it is found.

Every column of every entry, one character at a time: up to a hundred places of each value in the
long form, the first and the last in the short one. And a cut tail, which only an earlier head can
show.
"""

from __future__ import annotations

from collections import Counter
from typing import TYPE_CHECKING, Any

import pytest
from department import BREAST, THIGH, build, treated
from sqlalchemy import text, update

from featherlog.errors import FeatherlogError
from featherlog.store import ledger
from featherlog.store.engine import open_engine, reading, writing
from featherlog.store.tables import ledger_entry
from featherlog.store.verify import Head, verify

if TYPE_CHECKING:
    from collections.abc import Iterator

    from sqlalchemy import Connection


PLACES = 100


@pytest.fixture
def told(empty_database_url: str) -> str:
    """Give a department with a fraction of each course treated."""
    build(empty_database_url)
    treated(empty_database_url, THIGH, "2026-03-02")
    treated(empty_database_url, BREAST, "2026-03-04", position="B")
    return empty_database_url


def outcome(url: str, number: int, column: str, value: object) -> str:
    """Change one value of the ledger as an owner could, look, and take it back."""
    change = update(ledger_entry).where(ledger_entry.c.number == number).values({column: value})
    try:
        with writing(open_engine(url)) as connection:
            connection.execute(text("ALTER TABLE ledger_entry DISABLE TRIGGER USER"))
            connection.execute(change)
            result = "found" if verify(connection).fault else "missed"
            connection.rollback()
            return result
    except FeatherlogError:
        return "refused"


def other_values(value: Any, *, every: bool) -> Iterator[Any]:
    if isinstance(value, int):
        yield value + 1000
        return
    if not value:
        yield "x"
        return
    places = range(0, len(value), len(value) // PLACES + 1) if every else {0, len(value) - 1}
    for place in places:
        yield value[:place] + chr(ord(value[place]) ^ 1) + value[place + 1 :]


@pytest.mark.parametrize("backend", ["postgresql"])
@pytest.mark.parametrize(
    "every", [False, pytest.param(True, marks=pytest.mark.long)], ids=["short", "long"]
)
def test_every_column_of_the_ledger(told: str, every: bool) -> None:
    counted: Counter[str] = Counter()
    missed = []
    for row in rows(told):
        for column, value in row.items():
            for other in other_values(value, every=every):
                came = outcome(told, row["number"], column, other)
                counted[came] += 1
                if came == "missed":
                    missed.append((row["number"], column, other))
    print(  # noqa: T201 - a harness prints its figures
        f"\nledger columns on PostgreSQL, triggers off: {counted.total()} substitutions: "
        f"{dict(counted)}"
    )
    assert missed == []


def rows(url: str) -> list[dict[str, Any]]:
    with reading(open_engine(url)) as connection:
        query = ledger_entry.select().order_by(ledger_entry.c.number)
        return [dict(row) for row in connection.execute(query).mappings()]


@pytest.mark.parametrize("count", [1, 2, 5])
def test_a_cut_tail_is_found_with_an_earlier_head(told: str, backend: str, count: int) -> None:
    with reading(open_engine(told)) as connection:
        last = ledger.head(connection)
    assert last is not None
    with writing(open_engine(told)) as connection:
        cut(connection, backend, last.number - count)
        ledger.rebuild(connection)
    with reading(open_engine(told)) as connection:
        assert verify(connection).fault == ""
        earlier = Head(last.number, last.hash[:12])
        assert "cut off" in verify(connection, earlier).fault


def cut(connection: Connection, backend: str, to: int) -> None:
    if backend == "postgresql":
        connection.execute(text("ALTER TABLE ledger_entry DISABLE TRIGGER USER"))
    else:
        connection.execute(text("DROP TRIGGER ledger_entry_no_delete"))
    ledger.projection.empty(connection)
    connection.execute(ledger_entry.delete().where(ledger_entry.c.number > to))
