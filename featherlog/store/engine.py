"""Opening the database, and the two ways to use it: reading and writing.

SQLite and PostgreSQL behave alike here: a reader sees one moment, a writer is alone from its first
statement on, an error leaves nothing behind, and every failure is one sentence without a password.
"""

from __future__ import annotations

import os
from contextlib import contextmanager
from pathlib import Path
from typing import TYPE_CHECKING, Any

import sqlalchemy
from sqlalchemy import URL, Engine, NullPool, event, make_url
from sqlalchemy.exc import ArgumentError, DBAPIError

from featherlog.errors import StoreError
from featherlog.store.schema import check_schema

if TYPE_CHECKING:
    from collections.abc import Iterator

    from sqlalchemy import Connection

BUSY_SECONDS = 30
CONNECT_SECONDS = 10

_BEGIN = "featherlog_begin"
_READ = ("PRAGMA query_only = ON", "BEGIN")
_WRITE = ("BEGIN IMMEDIATE",)
# Rebuilding a table under enforced foreign keys deletes or refuses rows that point to it.
_MIGRATE = ("PRAGMA foreign_keys = OFF", "BEGIN IMMEDIATE")

# One arbitrary number, shared by every featherlog that migrates the same PostgreSQL database.
_MIGRATION_LOCK = 7_145_300_214

# PostgreSQL's code for a privilege that is missing.
_NOT_ALLOWED = "42501"


def default_url() -> str:
    """Return the database to use when none is named.

    It is ``FEATHERLOG_DATABASE_URL``, or else the file ``featherlog.db`` in the user's data folder.
    """
    named = os.environ.get("FEATHERLOG_DATABASE_URL")
    if named:
        return resolve_url(named)
    from platformdirs import user_data_path  # noqa: PLC0415 - not needed where a URL is given

    return _file_url(user_data_path("featherlog", appauthor=False) / "featherlog.db")


def resolve_url(text: str | None) -> str:
    """Return the URL for what a person typed: a URL, the path of a SQLite file, or nothing."""
    if not text:
        return default_url()
    return text if "://" in text else _file_url(Path(text).expanduser().absolute())


def sqlite_file(url: str) -> Path | None:
    """Return the file behind a SQLite URL; None for another database.

    Raises:
        StoreError: the URL is not one, or names no file.
    """
    parsed = _parsed(url)
    if parsed.get_backend_name() != "sqlite":
        return None
    if not parsed.database or parsed.database == ":memory:":
        raise StoreError("A SQLite database needs a file: sqlite:////path/to/featherlog.db.")
    return Path(parsed.database)


def open_engine(url: str) -> Engine:
    """Return an engine for an existing database; it connects only when used.

    Args:
        url: ``sqlite:///path`` or ``postgresql://user@host/name``.

    Raises:
        StoreError: the URL is not one, its driver is not installed, or the file does not exist.
    """
    file = sqlite_file(url)
    if file is None:
        return _postgresql(_parsed(url))
    if not file.is_file():
        raise StoreError(
            f"There is no database at {file}; make one with `featherlog database create`."
        )
    return _sqlite(_parsed(url))


@contextmanager
def reading(engine: Engine) -> Iterator[Connection]:
    """Give a connection that sees one moment of the database and can change nothing.

    Raises:
        StoreError: the database cannot be reached or used, or its schema is another.
    """
    options: dict[str, Any] = {_BEGIN: _READ}
    if _is_postgresql(engine):
        options |= {"isolation_level": "REPEATABLE READ", "postgresql_readonly": True}
    with _transaction(engine, options) as connection:
        check_schema(connection)
        yield connection


@contextmanager
def writing(engine: Engine) -> Iterator[Connection]:
    """Give the one connection that may write now; commit at the end, roll back on an error.

    Raises:
        StoreError: the database cannot be reached or used, stays busy, or its schema is another.
    """
    with _transaction(engine, {_BEGIN: _WRITE}) as connection:
        check_schema(connection)
        if _is_postgresql(engine):
            # As long as on SQLite; without it a writer would wait without end.
            connection.exec_driver_sql(
                f"SET LOCAL lock_timeout = {max(1, int(BUSY_SECONDS * 1000))}"
            )
            # Readers pass this lock, other writers wait: the last number stays the last. It needs
            # UPDATE on its table, which on the ledger nobody but its owner shall have.
            connection.exec_driver_sql("LOCK TABLE policy IN EXCLUSIVE MODE")
        yield connection


@contextmanager
def migrating(engine: Engine) -> Iterator[Connection]:
    """Give a connection that may change the schema, whatever the schema is now.

    Raises:
        StoreError: the database cannot be used, or rows would be left that refer to nothing.
    """
    with _transaction(engine, {_BEGIN: _MIGRATE}) as connection:
        if _is_postgresql(engine):
            connection.exec_driver_sql(f"SELECT pg_advisory_xact_lock({_MIGRATION_LOCK})")
        yield connection
        if not _is_postgresql(engine):
            _check_foreign_keys(connection)


@contextmanager
def _transaction(engine: Engine, options: dict[str, Any]) -> Iterator[Connection]:
    try:
        with engine.execution_options(**options).begin() as connection:
            yield connection
    except DBAPIError as error:
        raise StoreError(_sentence(engine.url, error)) from error
    except UnicodeDecodeError as error:
        raise StoreError(
            f"The database {masked(engine.url)} is damaged: it holds text that is not UTF-8."
        ) from error


def _sqlite(url: URL) -> Engine:
    # Without a pool each connection ends with its transaction, and so do its pragmas.
    engine = sqlalchemy.create_engine(
        url,
        poolclass=NullPool,
        connect_args={"isolation_level": None, "timeout": BUSY_SECONDS},
    )
    event.listen(engine, "connect", _set_up_sqlite)
    event.listen(engine, "begin", _begin_sqlite)
    return engine


def _set_up_sqlite(connection: Any, _record: object) -> None:  # noqa: ANN401 - the driver's own
    # A rollback journal serves network disks as well, which a write-ahead log does not, and EXTRA
    # makes it lasting there; it costs under 1 ms for each of a few commits an hour.
    for pragma in (
        "foreign_keys = ON",
        "recursive_triggers = ON",  # else INSERT OR REPLACE gets past the append-only triggers
        "journal_mode = DELETE",
        "synchronous = EXTRA",
    ):
        connection.execute(f"PRAGMA {pragma}")


def _begin_sqlite(connection: Connection) -> None:
    for statement in connection.get_execution_options().get(_BEGIN, _WRITE):
        connection.exec_driver_sql(statement)


def _postgresql(url: URL) -> Engine:
    try:
        return sqlalchemy.create_engine(
            url.set(drivername="postgresql+psycopg"),
            poolclass=NullPool,
            connect_args={"connect_timeout": CONNECT_SECONDS},
        )
    except ModuleNotFoundError as missing:
        raise StoreError(
            "PostgreSQL needs its driver: pip install 'featherlog[postgresql]'."
        ) from missing


def _check_foreign_keys(connection: Connection) -> None:
    row = connection.exec_driver_sql("PRAGMA foreign_key_check").first()
    if row is not None:
        raise StoreError(f"The migration was undone: a row of {row[0]} would refer to no {row[2]}.")


def _parsed(url: str) -> URL:
    # The text is not repeated in the message, for it may hold a password.
    try:
        parsed = make_url(url)
    except (ArgumentError, ValueError):
        raise StoreError(
            "The database URL cannot be read; allowed: sqlite:///path and "
            "postgresql://user@host:port/name."
        ) from None
    if parsed.get_backend_name() not in ("sqlite", "postgresql"):
        raise StoreError(
            f"The database {parsed.get_backend_name()!r} is not known; allowed: sqlite, postgresql."
        )
    return parsed


def masked(url: URL) -> str:
    """Return ``url`` as text without its password, wherever that stands."""
    query = {key: "***" if "password" in key else value for key, value in url.query.items()}
    return url.set(query=query).render_as_string(hide_password=True)


def _sentence(url: URL, error: DBAPIError) -> str:
    # The driver's first line says what; those after it may quote values of a row.
    lines = str(error.orig).strip().splitlines()
    reason = lines[0] if lines else "no reason given"
    if getattr(error.orig, "sqlstate", None) == _NOT_ALLOWED:
        return (
            f"The database {masked(url)} does not let this role do this ({reason}); who reads "
            "cannot record, and only the owner changes tables: see `featherlog database grants`."
        )
    return f"The database {masked(url)} cannot do this: {reason}."


def _file_url(path: Path) -> str:
    return URL.create("sqlite", database=str(path)).render_as_string()


def _is_postgresql(engine: Engine) -> bool:
    return engine.dialect.name == "postgresql"
