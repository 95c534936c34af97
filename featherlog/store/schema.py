"""Which schema this program knows, and the quick check that a database has it."""

from __future__ import annotations

import re
from typing import TYPE_CHECKING

from sqlalchemy import inspect, text

from featherlog.errors import StoreError

if TYPE_CHECKING:
    from sqlalchemy import Connection

REVISIONS = ("0001", "0002", "0003")
"""Every schema revision, oldest first; the last is the one this program works with."""

_FOREIGN = (
    "This is not a featherlog database; name another, or make one with "
    "`featherlog database create`."
)


def schema_revision(connection: Connection) -> str | None:
    """Return the known revision a database is at; None before the first.

    Raises:
        StoreError: the database is newer than this program, or not featherlog's.
    """
    if not inspect(connection).has_table("alembic_version"):
        raise StoreError(_FOREIGN)
    query = text("SELECT version_num FROM alembic_version")
    version: str | None = connection.execute(query).scalar()
    if version is None or version in REVISIONS:
        return version
    # Other programs number their revisions in a table of this name too, but not in four digits.
    if not re.fullmatch(r"\d{4}", version):
        raise StoreError(_FOREIGN)
    raise StoreError(
        f"The database ({version}) is newer than this program ({REVISIONS[-1]}); "
        "install a newer featherlog."
    )


def check_schema(connection: Connection) -> None:
    """Pass where the schema is the one this program works with.

    Raises:
        StoreError: it is older, newer, or not featherlog's.
    """
    version = schema_revision(connection)
    if version != REVISIONS[-1]:
        raise StoreError(
            f"The database is older ({version or 'empty'}) than this program ({REVISIONS[-1]}); "
            "run `featherlog database upgrade`."
        )
