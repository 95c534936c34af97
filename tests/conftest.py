"""Databases for the tests: SQLite, and PostgreSQL from a server of our own or one that is named.

``database_url`` is a ready database, ``empty_database_url`` one without tables; a test that takes
either runs once on each kind. ``FEATHERLOG_TEST_POSTGRESQL_URL`` names a server whose user may
create databases. Without it, one is started from the installed binaries for the time of the run.
"""

from __future__ import annotations

import os
import pwd
import shutil
import subprocess
import tempfile
import uuid
from contextlib import contextmanager
from dataclasses import dataclass
from functools import partial
from pathlib import Path
from typing import TYPE_CHECKING, Any

import pytest
from sqlalchemy import make_url

from featherlog.store.engine import resolve_url
from featherlog.store.migrate import create

if TYPE_CHECKING:
    from collections.abc import Callable, Iterator

    from sqlalchemy import URL

MISSING = "no PostgreSQL server binaries; get them with: apt-get install postgresql"


@pytest.fixture(scope="session")
def postgresql_server() -> Iterator[URL]:
    """Give the URL of a server on which databases may be made."""
    named = os.environ.get("FEATHERLOG_TEST_POSTGRESQL_URL")
    if named:
        yield make_url(named)
        return
    binaries = _server_binaries()
    if binaries is None:
        required = os.environ.get("FEATHERLOG_REQUIRE_POSTGRESQL") == "1"
        (pytest.fail if required else pytest.skip)(MISSING)
    with _throwaway_server(binaries) as server:
        yield server.url


@pytest.fixture
def own_postgresql() -> Iterator[OwnServer]:
    """Give a server that a test may restart, with nobody else on it."""
    binaries = _server_binaries()
    if binaries is None:
        pytest.skip(MISSING)
    with _throwaway_server(binaries) as server:
        yield server


@pytest.fixture(scope="session")
def postgresql_template(postgresql_server: URL) -> Iterator[str]:
    """Give the name of a ready database, from which others are copied."""
    name = _make_database(postgresql_server)
    create(_url_of(postgresql_server, name), demo=False)
    yield name
    _drop_database(postgresql_server, name)


@pytest.fixture(scope="session")
def sqlite_template(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Give a ready database file, from which others are copied."""
    file = tmp_path_factory.mktemp("template") / "featherlog.db"
    create(resolve_url(str(file)), demo=False)
    return file


@pytest.fixture(params=["sqlite", "postgresql"])
def backend(request: pytest.FixtureRequest) -> str:
    """Name the kind of database this run of a test is on."""
    return str(request.param)


@pytest.fixture
def empty_database_url(
    backend: str, tmp_path: Path, request: pytest.FixtureRequest
) -> Iterator[str]:
    """Give a database without tables; the SQLite file does not exist yet."""
    if backend == "sqlite":
        yield resolve_url(str(tmp_path / "featherlog.db"))
        return
    yield from _lent_database(request.getfixturevalue("postgresql_server"), "template0")


@pytest.fixture
def database_url(backend: str, tmp_path: Path, request: pytest.FixtureRequest) -> Iterator[str]:
    """Give a ready database, not for practice, with nothing in its ledger."""
    if backend == "sqlite":
        template = request.getfixturevalue("sqlite_template")
        yield resolve_url(str(shutil.copy(template, tmp_path)))
        return
    template = request.getfixturevalue("postgresql_template")
    yield from _lent_database(request.getfixturevalue("postgresql_server"), template)


def _lent_database(server: URL, template: str) -> Iterator[str]:
    name = _make_database(server, template)
    yield _url_of(server, name)
    _drop_database(server, name)


def _make_database(server: URL, template: str = "template0") -> str:
    name = f"featherlog_test_{uuid.uuid4().hex}"
    _administer(server, f'CREATE DATABASE "{name}" TEMPLATE "{template}"')
    return name


def _drop_database(server: URL, name: str) -> None:
    _administer(server, f'DROP DATABASE "{name}" WITH (FORCE)')


def _administer(server: URL, statement: str) -> None:
    psycopg = pytest.importorskip("psycopg")
    conninfo = server.set(drivername="postgresql").render_as_string(hide_password=False)
    with psycopg.connect(conninfo, autocommit=True) as connection:
        connection.execute(statement)


def _url_of(server: URL, name: str) -> str:
    return server.set(database=name).render_as_string(hide_password=False)


def _server_binaries() -> Path | None:
    debian = sorted(Path("/usr/lib/postgresql").glob("*/bin/initdb"))
    found = debian[-1] if debian else shutil.which("initdb")
    return Path(found).resolve().parent if found else None


@dataclass(frozen=True)
class OwnServer:
    """A server of ours: its URL, and a way to end it hard and start it again."""

    url: URL
    restart: Callable[[], None]

    def database(self) -> str:
        """Make a database without tables and return its URL."""
        return _url_of(self.url, _make_database(self.url))


@contextmanager
def _throwaway_server(binaries: Path) -> Iterator[OwnServer]:
    # The path of a socket has to be short, and the server's user has to reach it.
    folder = Path(tempfile.mkdtemp(prefix="featherlog-pg-", dir="/tmp"))
    run = _as_server_user(folder)
    try:
        run(binaries / "initdb", "-D", folder / "data", "-U", "featherlog", *_INITDB)
        options = f"-c listen_addresses='' -k {folder} -c fsync=off -c full_page_writes=off"
        control = (binaries / "pg_ctl", "-D", folder / "data")
        run(*control, "-w", "-s", "-o", options, "-l", folder / "log", "start")
        restart = partial(run, *control, "-w", "-s", "-m", "immediate", "restart")
        try:
            yield OwnServer(make_url(f"postgresql://featherlog@/postgres?host={folder}"), restart)
        finally:
            run(*control, "-w", "-s", "-m", "immediate", "stop")
    finally:
        shutil.rmtree(folder)


_INITDB = ("-A", "trust", "--locale=C", "--encoding=UTF8", "--no-sync")


def _as_server_user(folder: Path) -> Callable[..., None]:
    """Return a way to run commands as a user the server accepts, for it refuses root."""
    who: dict[str, Any] = {}
    if os.geteuid() == 0:
        user = _server_user()
        os.chown(folder, user.pw_uid, user.pw_gid)
        who = {"user": user.pw_uid, "group": user.pw_gid, "extra_groups": []}

    def run(*command: object) -> None:
        # The server inherits the output streams and would hold a pipe open.
        subprocess.run(
            [str(word) for word in command],
            check=True,
            cwd=folder,
            stdin=subprocess.DEVNULL,
            stdout=subprocess.DEVNULL,
            **who,
        )

    return run


def _server_user() -> pwd.struct_passwd:
    try:
        return pwd.getpwnam("postgres")
    except KeyError:
        return pwd.getpwnam("nobody")
