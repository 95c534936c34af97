"""What the roles of a PostgreSQL database may do."""

from __future__ import annotations

from featherlog.store import grants as store_grants
from featherlog.store.engine import open_engine, reading, resolve_url


def grants(database: str | None, *, recording: str, reading_role: str | None) -> str:
    """Return the SQL that gives roles their rights; ``store.grants`` says what is refused."""
    with reading(open_engine(resolve_url(database))) as connection:
        return store_grants.grants(connection, recording, reading_role)
