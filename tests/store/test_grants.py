"""What the roles of PostgreSQL can do with the rights that the program's own SQL gives them."""

from __future__ import annotations

import uuid
from concurrent.futures import ThreadPoolExecutor
from typing import TYPE_CHECKING

import pytest
import store_scenario as scenario
from department import THIGH, build
from program import PAIR, Program
from sqlalchemy import make_url, text

from featherlog.actions.grants import grants
from featherlog.errors import InputError, RefusedError, StoreError
from featherlog.store.engine import migrating, open_engine, reading, writing
from featherlog.store.ledger import append, entries, head

if TYPE_CHECKING:
    from collections.abc import Iterator
    from pathlib import Path

pytestmark = pytest.mark.parametrize("backend", ["postgresql"])
FORBIDDEN = [
    ("UPDATE ledger_entry SET who = 'Elm Rook'", "permission denied for table ledger_entry"),
    ("DELETE FROM ledger_entry", "permission denied for table ledger_entry"),
    ("TRUNCATE ledger_entry CASCADE", "permission denied for table"),
    ("TRUNCATE course CASCADE", "permission denied for table"),
    ("INSERT INTO store_property VALUES ('more', '')", "permission denied for table store_prop"),
    ("UPDATE alembic_version SET version_num = '0001'", "permission denied for table alembic"),
    ("ALTER TABLE ledger_entry DISABLE TRIGGER USER", "must be owner of table ledger_entry"),
    ("DROP TRIGGER ledger_entry_no_change ON ledger_entry", "must be owner of relation ledger_e"),
    ("CREATE TABLE another (x integer)", "permission denied for schema public"),
    ("LOCK TABLE ledger_entry IN SHARE ROW EXCLUSIVE MODE", "permission denied for table ledger_e"),
    ("SET session_replication_role = replica", "permission denied to set parameter"),
]


def run(url: str, *statements: str) -> None:
    with migrating(open_engine(url)) as connection:
        for statement in statements:
            connection.execute(text(statement.replace(":", r"\:")))


@pytest.fixture
def roles(postgresql_server: object) -> Iterator[tuple[str, str]]:
    """Give the names of two roles that may log in, awkward ones, to be dropped afterwards."""
    names = tuple(f"{kind} {uuid.uuid4().hex[:8]}" for kind in ('a"recorder;', "a 'reader\\"))
    server = make_url(str(postgresql_server)).render_as_string(hide_password=False)
    quoted = [f'"{name.replace(chr(34), chr(34) * 2)}"' for name in names]
    run(server, *(f"CREATE ROLE {name} LOGIN PASSWORD 'wren'" for name in quoted))
    yield names[0], names[1]
    run(server, *(f"DROP ROLE {name}" for name in quoted))


def granted(url: str, roles: tuple[str, str]) -> Iterator[tuple[str, str]]:
    """Let the owner apply the SQL; give the URLs of the recording and of the reading role."""
    sql = grants(url, recording=roles[0], reading_role=roles[1])
    assert sql.splitlines()[0] == "BEGIN;"
    assert sql.splitlines()[-1] == "COMMIT;"
    run(url, *sql.splitlines()[1:-1])
    owner = make_url(url)
    yield tuple(  # type: ignore[misc] - of two
        owner.set(username=role, password="wren").render_as_string(hide_password=False)  # noqa: S106 - of a role of this test
        for role in roles
    )
    quoted = ", ".join(f'"{role.replace(chr(34), chr(34) * 2)}"' for role in roles)
    run(url, f"DROP OWNED BY {quoted}")


@pytest.fixture
def department(empty_database_url: str, roles: tuple[str, str]) -> Iterator[tuple[str, str]]:
    build(empty_database_url)
    yield from granted(empty_database_url, roles)


@pytest.fixture
def empty(database_url: str, roles: tuple[str, str]) -> Iterator[tuple[str, str]]:
    yield from granted(database_url, roles)


def test_who_records_can_work_all_day(
    department: tuple[str, str],
    tmp_path: Path,
    monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
) -> None:
    program = Program(department[0], tmp_path)
    for words in (
        ("today",),
        ("today", THIGH),
        ("confirm", THIGH, *PAIR),
        ("record", THIGH, *PAIR),
        ("review", THIGH),
        ("ledger", "verify"),
    ):
        came = program.here(monkeypatch, capsys, *words)
        assert (came.code, came.err) == (0, ""), (words, came.err)
    came = program.here(monkeypatch, capsys, "database", "health")
    assert "does not own the tables" in " ".join(came.out.split())


@pytest.mark.parametrize(("statement", "reason"), FORBIDDEN, ids=[one[0] for one in FORBIDDEN])
def test_who_records_cannot_change_what_is_recorded(
    empty: tuple[str, str], statement: str, reason: str
) -> None:
    with pytest.raises(StoreError, match=reason):
        run(empty[0], statement)


def test_who_reads_can_look_at_everything_and_record_nothing(
    department: tuple[str, str],
    tmp_path: Path,
    monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
) -> None:
    program = Program(department[1], tmp_path)
    for words in (("today", THIGH), ("review", THIGH), ("ledger", "verify")):
        came = program.here(monkeypatch, capsys, *words)
        assert (came.code, came.err) == (0, ""), (words, came.err)
    came = program.here(monkeypatch, capsys, "record", THIGH, *PAIR, "--position", "A")
    assert (came.code, came.out, len(came.err.splitlines())) == (6, "", 1)
    assert "does not let this role do this (permission denied for table" in came.fault
    assert "who reads cannot record" in came.fault
    assert "wren" not in came.fault


def test_a_service_file_names_server_and_role(
    empty: tuple[str, str], tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    url = make_url(empty[1])
    service = tmp_path / "services.conf"
    told = {"host": url.query["host"], "dbname": url.database, "user": url.username}
    lines = "\n".join(f"{name}={value}" for name, value in told.items())
    service.write_text(f"[featherlog]\n{lines}\n", encoding="utf-8")
    monkeypatch.setenv("PGSERVICEFILE", str(service))
    monkeypatch.setenv("PGPASSWORD", str(url.password))
    with reading(open_engine("postgresql://?service=featherlog")) as connection:
        assert connection.execute(text("SELECT current_user")).scalar() == url.username


def test_writers_of_one_role_wait_for_each_other(empty: tuple[str, str]) -> None:
    """The lock that makes numbers consecutive needs no right to change the ledger."""

    def write(number: int) -> None:
        with writing(open_engine(empty[0])) as connection:
            last = head(connection)
            connection.execute(text("SELECT pg_sleep(0.01)"))
            append(connection, scenario.staff(f"Finch {number}"))
            assert (last.number if last else 0) + 1 == head(connection).number  # type: ignore[union-attr] - just written

    with ThreadPoolExecutor(8) as pool:
        list(pool.map(write, range(16)))
    with reading(open_engine(empty[1])) as connection:
        assert [entry.number for entry in entries(connection)] == list(range(1, 17))


def test_rights_of_before_are_taken_away(
    empty: tuple[str, str], database_url: str, roles: tuple[str, str]
) -> None:
    name = f'"{roles[0].replace(chr(34), chr(34) * 2)}"'
    run(database_url, f"GRANT ALL ON ALL TABLES IN SCHEMA public TO {name}")
    run(database_url, "GRANT TRUNCATE ON course TO PUBLIC")
    sql = grants(database_url, recording=roles[0], reading_role=None)
    assert roles[1] not in sql
    run(database_url, *sql.splitlines()[1:-1])
    for statement in ("DELETE FROM ledger_entry", "TRUNCATE course CASCADE"):
        with pytest.raises(StoreError, match="permission denied"):
            run(empty[0], statement)


@pytest.mark.parametrize("role", ["", "public", "none", "a\nb", "é" * 32])
def test_what_is_no_name_of_a_role(database_url: str, role: str) -> None:
    with pytest.raises(InputError, match=r"^--recording is .*1 to 63 bytes on one line"):
        grants(database_url, recording=role, reading_role=None)
    with pytest.raises(InputError, match=r"^--reading is "):
        grants(database_url, recording="featherlog_daily", reading_role=role)


def test_one_role_for_both(database_url: str) -> None:
    with pytest.raises(InputError, match="name two roles"):
        grants(database_url, recording="finch", reading_role="finch")


def test_the_owner_is_no_daily_role(database_url: str) -> None:
    owner = str(make_url(database_url).username)
    with pytest.raises(RefusedError, match="owns the tables or may act as their owner"):
        grants(database_url, recording=owner, reading_role=None)
