"""Several processes at once, and one that dies. A kill shows process death, not power loss."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path

import store_scenario as scenario

from featherlog.store import queries
from featherlog.store.engine import open_engine, reading, writing
from featherlog.store.ledger import append, entries, first_fault

WRITER = Path(__file__).with_name("store_writer.py")


def start(*arguments: str) -> subprocess.Popen[str]:
    return subprocess.Popen(
        [sys.executable, str(WRITER), *arguments],
        stdin=subprocess.PIPE,
        stdout=subprocess.PIPE,
        text=True,
    )


def test_concurrent_writers_lose_nothing_and_number_consecutively(database_url: str) -> None:
    names = ("Alder", "Birch", "Cedar")
    writers = [start(database_url, name, "12") for name in names]
    for writer in writers:
        writer.communicate()
        assert writer.returncode == 0

    with reading(open_engine(database_url)) as connection:
        written = list(entries(connection))
        assert [entry.number for entry in written] == list(range(1, 37))
        expected = {f"{name} {number}" for name in names for number in range(12)}
        assert {entry.content["name"] for entry in written} == expected
        assert first_fault(connection) is None


def test_a_killed_writer_leaves_the_ledger_as_it_was(database_url: str) -> None:
    engine = open_engine(database_url)
    with writing(engine) as connection:
        append(connection, scenario.staff())

    with start(database_url, "hold") as writer:
        assert writer.stdout is not None
        assert writer.stdout.readline() == "holding\n"
        writer.kill()

    with writing(engine) as connection:
        append(connection, scenario.staff("Hazel Wren"))
    with reading(engine) as connection:
        assert [entry.number for entry in entries(connection)] == [1, 2]
        assert first_fault(connection) is None
        assert [person.name for person in queries.staff(connection)] == [
            "Hazel Wren",
            "Rowan Finch",
        ]


def test_the_store_starts_without_heavy_modules() -> None:
    program = (
        "import sys, featherlog.store.migrate, featherlog.store.queries, featherlog.store.ledger;"
        "print(*{'sqlalchemy.orm', 'alembic', 'psycopg', 'numpy'} & set(sys.modules))"
    )
    found = subprocess.run(
        [sys.executable, "-c", program], check=True, capture_output=True, text=True
    )
    assert found.stdout.strip() == ""
