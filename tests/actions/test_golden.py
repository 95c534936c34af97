"""Databases that earlier revisions wrote are opened, upgraded and used."""

from __future__ import annotations

import shutil
from pathlib import Path
from typing import TYPE_CHECKING

import pytest
from department import ADMINISTRATOR, BREAST, STAFF, THIGH, by, moment, treated

from featherlog.actions.database import status, upgrade
from featherlog.actions.departures import list_departures
from featherlog.actions.desk import practice_time
from featherlog.actions.operations import health
from featherlog.actions.staff import list_staff, replace_key
from featherlog.actions.today import today
from featherlog.errors import StoreError
from featherlog.store.backup import restore
from featherlog.store.engine import migrating, open_engine, resolve_url, sqlite_file
from featherlog.store.schema import REVISIONS

if TYPE_CHECKING:
    from collections.abc import Iterator

GOLDEN = Path(__file__).parents[2] / "fixtures" / "golden"
ALIKE = {"append-only", "schema", "ledger"}


KEPT = sorted(file.stem for file in GOLDEN.glob("*.db"))


@pytest.fixture(params=KEPT)
def golden_url(request: pytest.FixtureRequest, backend: str, tmp_path: Path) -> Iterator[str]:
    """Give a copy of what this revision wrote, on either database."""
    if backend == "sqlite":
        yield resolve_url(str(shutil.copy(GOLDEN / f"{request.param}.db", tmp_path)))
        return
    url = request.getfixturevalue("empty_database_url")
    statements = (GOLDEN / f"{request.param}.sql").read_text(encoding="utf-8")
    with migrating(open_engine(url)) as connection:
        connection.exec_driver_sql(statements.replace("%", "%%"))
    yield url


@pytest.mark.parametrize("ending", ["db", "sql"])
def test_every_revision_but_the_last_is_kept(ending: str) -> None:
    kept = {file.stem for file in GOLDEN.glob(f"*.{ending}")}
    assert set(REVISIONS[:-1]) <= kept <= set(REVISIONS)


def test_it_is_opened_upgraded_and_used(golden_url: str, request: pytest.FixtureRequest) -> None:
    older = request.node.callspec.params["golden_url"] != REVISIONS[-1]
    if older:
        with pytest.raises(StoreError, match="featherlog database upgrade"):
            status(golden_url)
    backup = upgrade(golden_url)
    assert (backup is not None) == (older and sqlite_file(golden_url) is not None)

    found = {line.name: line.grade for line in health(golden_url).lines}
    assert {name: found[name] for name in ALIKE} == dict.fromkeys(ALIKE, "OK")
    before = status(golden_url)
    assert (before.demo, before.courses, before.first_fault) == (True, 2, "")

    day = today(golden_url, THIGH)
    assert (day.fraction, day.position) == (3, "A")
    kinds = [(line.fraction, line.kind) for line in list_departures(golden_url, THIGH)]
    assert kinds == [(2, "other position"), (3, "meterset short"), (3, "not confirmed")]
    assert today(golden_url, BREAST).fraction == 2

    _give_keys(golden_url)
    done = treated(golden_url, THIGH, "2026-03-05")
    assert (done.fraction, done.complete, done.next_fraction) == (3, True, 4)
    assert status(golden_url).first_fault == ""


def _give_keys(url: str) -> None:
    """Give everyone a key, the administrator first, where nobody has one yet."""
    if any(person.key for person in list_staff(url)):
        return
    with practice_time(moment("2026-03-05")):
        for name in STAFF:
            replace_key(url, owner=by(name), reason="the first key", by=by(ADMINISTRATOR))


@pytest.mark.parametrize("backend", ["sqlite"])
def test_it_can_be_restored(golden_url: str, tmp_path: Path) -> None:
    source = sqlite_file(golden_url)
    assert source is not None
    file = tmp_path / "restored.db"
    restore(file, source)
    assert today(str(file), THIGH).fraction == 3
