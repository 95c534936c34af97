"""Whole lives of a course, made up step by step, against a model of them in plain memory.

Whatever people do in whatever order, the program says what the model says, refuses what the model
refuses, and the ledger fits together. The long form makes up more and longer lives.
"""

from __future__ import annotations

import shutil
from functools import cache
from typing import TYPE_CHECKING, Any
from uuid import uuid4

import pytest
from course_life_machine import LifeOfACourse
from hypothesis import HealthCheck, settings
from hypothesis.stateful import run_state_machine_as_test
from short_thigh import build_department

from featherlog.actions import desk, signing

if TYPE_CHECKING:
    from collections.abc import Callable, Iterator
    from pathlib import Path

    from sqlalchemy import URL

SHORT = {"max_examples": 15, "stateful_step_count": 25, "derandomize": True}
LONG = {"max_examples": 200, "stateful_step_count": 50, "print_blob": True}


@pytest.fixture(autouse=True)
def kept_open(monkeypatch: pytest.MonkeyPatch) -> None:
    """Opening a key takes long on purpose; here the same few are opened thousands of times."""
    monkeypatch.setattr(signing, "unwrap", cache(signing.unwrap))
    # An engine keeps the statements it made once, and no connection.
    monkeypatch.setattr(desk, "open_engine", cache(desk.open_engine))


@pytest.fixture
def postgresql_copies(postgresql_server: URL, tmp_path: Path) -> Iterator[Callable[[], str]]:
    """Give a way to copy a department's database on the server."""
    made: list[str] = []
    build_department(_copy(postgresql_server, "template0", made), tmp_path)
    yield lambda: _copy(postgresql_server, made[0], made)
    for database in made:
        _administer(postgresql_server, f'DROP DATABASE "{database}" WITH (FORCE)')


def _copy(server: URL, template: str, made: list[str]) -> str:
    name = f"featherlog_test_{uuid4().hex}"
    _administer(server, f'CREATE DATABASE "{name}" TEMPLATE "{template}"')
    made.append(name)
    return server.set(database=name).render_as_string(hide_password=False)


def _administer(server: URL, statement: str) -> None:
    psycopg = pytest.importorskip("psycopg")
    conninfo = server.set(drivername="postgresql").render_as_string(hide_password=False)
    with psycopg.connect(conninfo, autocommit=True) as connection:
        connection.execute(statement)


def live(database: Callable[[], str], folder: Path, **how: Any) -> None:
    """Make up lives, each in a database of its own."""
    run_state_machine_as_test(
        lambda: LifeOfACourse(database(), folder),
        settings=settings(
            deadline=None,
            database=None,
            report_multiple_bugs=False,
            suppress_health_check=list(HealthCheck),
            **how,
        ),
    )


@pytest.mark.parametrize(
    "how", [SHORT, pytest.param(LONG, marks=pytest.mark.long)], ids=["short", "long"]
)
def test_on_sqlite(how: dict[str, Any], tmp_path: Path) -> None:
    template = build_department(str(tmp_path / "template.db"), tmp_path)
    live(lambda: str(shutil.copy(template, str(tmp_path / "life.db"))), tmp_path, **how)


def test_on_postgresql(postgresql_copies: Callable[[], str], tmp_path: Path) -> None:
    live(postgresql_copies, tmp_path, **(SHORT | {"max_examples": 3}))
