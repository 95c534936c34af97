"""Creating, upgrading and downgrading a database with alembic, which is imported only here.

One chain of revisions serves SQLite and PostgreSQL. Each step runs in one transaction of its own;
a SQLite file is copied beside itself first.
"""

from __future__ import annotations

from datetime import UTC, datetime
from pathlib import Path
from typing import TYPE_CHECKING

from sqlalchemy import func, insert, inspect, select

from featherlog.errors import InputError, RefusedError
from featherlog.store.copying import copy_file, make_private
from featherlog.store.engine import migrating, open_engine, sqlite_file
from featherlog.store.schema import REVISIONS, schema_revision
from featherlog.store.tables import ledger_entry, store_property

if TYPE_CHECKING:
    from alembic.config import Config
    from sqlalchemy import Connection

_PACKAGE = Path(__file__).resolve().parents[1]


def script_location() -> Path:
    """Return the folder of the migrations: the checkout's, or the one inside the wheel.

    An editable install copies the folder when it is made, and that copy goes stale.
    """
    checkout = _PACKAGE.parent
    if (checkout / "pyproject.toml").is_file() and (checkout / "migrations" / "env.py").is_file():
        return checkout / "migrations"
    return _PACKAGE / "migrations"


def create(url: str, *, demo: bool) -> None:
    """Make the tables in a new SQLite file or an empty PostgreSQL database.

    Args:
        url: where.
        demo: whether it is for practice only, which nothing changes afterwards.

    Raises:
        RefusedError: the database already has tables.
        StoreError: it cannot be reached or made.
    """
    file = sqlite_file(url)
    made = file is not None and make_private(file)
    try:
        with migrating(open_engine(url)) as connection:
            _refuse_tables(connection)
            _migrate(connection, "upgrade", REVISIONS[-1])
            value = "yes" if demo else "no"
            connection.execute(insert(store_property).values(name="demo", value=value))
    except BaseException:
        if file is not None and made:
            file.unlink()
        raise


def upgrade(url: str) -> Path | None:
    """Bring a database to the schema of this program.

    Returns:
        The backup made before, for SQLite; None where there was nothing to do or no file.

    Raises:
        StoreError: it cannot be reached, or is not a featherlog database.
    """
    return _step(url, "upgrade", REVISIONS[-1])


def downgrade(url: str, revision: str, *, lose_records: bool = False) -> Path | None:
    """Bring a database back to an older schema; ``base`` drops every table.

    Args:
        url: which database.
        revision: where to.
        lose_records: go on even though the ledger has entries.

    Raises:
        InputError: the revision is not known.
        RefusedError: the ledger has entries, and they would be lost.
        StoreError: it cannot be reached, or is not a featherlog database.
    """
    known = ("base", *REVISIONS)
    if revision not in known:
        raise InputError(f"The revision {revision!r} is not known; allowed: {', '.join(known)}.")
    return _step(url, "downgrade", revision, lose_records=lose_records)


def _step(url: str, direction: str, to: str, *, lose_records: bool = True) -> Path | None:
    with migrating(open_engine(url)) as connection:
        version = schema_revision(connection)
        if (version or "base") == to:
            return None
        if not lose_records and _has_entries(connection):
            raise RefusedError(
                "The ledger has entries, which a downgrade would lose; restore a backup instead."
            )
        # Nothing has been written yet, and nobody else can write while this connection is open.
        backup = _back_up(url, version or "base")
        _migrate(connection, direction, to)
    return backup


def _migrate(connection: Connection, direction: str, to: str) -> None:
    from alembic import command  # noqa: PLC0415 - alembic costs 0.4 s and only migrations need it

    run = command.upgrade if direction == "upgrade" else command.downgrade
    run(_config(connection), to)


def _config(connection: Connection) -> Config:
    from alembic.config import Config  # noqa: PLC0415 - as above

    config = Config()
    # A percent sign in a path would be read as an interpolation.
    config.set_main_option("script_location", str(script_location()).replace("%", "%%"))
    config.attributes["connection"] = connection
    return config


def _refuse_tables(connection: Connection) -> None:
    if inspect(connection).get_table_names():
        raise RefusedError("The database already has tables; name a new file or an empty database.")


def _has_entries(connection: Connection) -> bool:
    if not inspect(connection).has_table(ledger_entry.name):
        return False
    return connection.execute(select(func.count()).select_from(ledger_entry)).scalar_one() > 0


def _back_up(url: str, version: str) -> Path | None:
    file = sqlite_file(url)
    if file is None:
        return None
    stamp = datetime.now(UTC).strftime("%Y%m%dT%H%M%S%fZ")
    backup = file.with_name(f"{file.name}.{version}.{stamp}.backup")
    copy_file(file, backup)
    return backup
