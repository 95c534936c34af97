"""What roles of PostgreSQL may do: work with the ledger every day without being able to change it.

The owner of the tables makes and upgrades them. The recording role reads everything, adds to the
ledger and keeps the projections; it can neither change the ledger nor touch its triggers. The
reading role only reads.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

from sqlalchemy import func, select, text

from featherlog.errors import InputError, RefusedError
from featherlog.store.tables import PROJECTIONS, ledger_entry

if TYPE_CHECKING:
    from collections.abc import Iterator

    from sqlalchemy import Connection

# PostgreSQL cuts longer names off, and takes these two for everybody and nobody even when quoted.
_LONGEST_BYTES = 63
_NOBODY = ("public", "none")

_MIGHT_OWN = text(
    "SELECT rolname FROM pg_roles, pg_class WHERE pg_class.oid = 'ledger_entry'::regclass "
    "AND rolname = :role AND (rolsuper OR pg_has_role(pg_roles.oid, relowner, 'MEMBER'))"
)


def grants(connection: Connection, recording: str, reading: str | None = None) -> str:
    """Return the SQL that the owner runs to give two roles what they need, and nothing else.

    Run again, it takes away what they had too much, and gives what an upgrade added.

    Args:
        connection: from ``reading``, on the database that the SQL is for.
        recording: the role of those who record.
        reading: the role of those who only read; None for no such role.

    Raises:
        RefusedError: the database has no roles, or a role could act as the owner of the tables.
        InputError: a name cannot be a role's, or both are the same.
    """
    if connection.dialect.name != "postgresql":
        raise RefusedError(
            "Only PostgreSQL has roles; who can use a SQLite file is a matter of its file mode."
        )
    if recording == reading:
        raise InputError(f"--recording and --reading are both {recording!r}; name two roles")
    for option, role in (("--recording", recording), ("--reading", reading)):
        if role is not None:
            _check(connection, option, role)
    return "\n".join(_statements(connection, recording, reading))


def _check(connection: Connection, option: str, role: str) -> None:
    if not role.isprintable() or not 0 < len(role.encode()) <= _LONGEST_BYTES or role in _NOBODY:
        raise InputError(
            f"{option} is {role!r}, but must be a role's name: 1 to {_LONGEST_BYTES} bytes on one "
            f"line, and neither {' nor '.join(_NOBODY)}"
        )
    if connection.execute(_MIGHT_OWN, {"role": role}).first() is not None:
        raise RefusedError(
            f"The role {role!r} owns the tables or may act as their owner, so that no grant could "
            f"keep it from changing the ledger; name another for {option}."
        )


def _statements(connection: Connection, recording: str, reading: str | None) -> Iterator[str]:
    quoted = connection.dialect.identifier_preparer.quote_identifier
    here = connection.execute(select(func.current_database(), func.current_schema())).one()
    database, schema = map(quoted, here)
    yield "BEGIN;"
    yield f"REVOKE CREATE ON SCHEMA {schema} FROM PUBLIC;"
    yield f"REVOKE ALL ON ALL TABLES IN SCHEMA {schema} FROM PUBLIC;"
    for role in (quoted(name) for name in (recording, reading) if name is not None):
        yield f"GRANT CONNECT ON DATABASE {database} TO {role};"
        yield f"REVOKE ALL ON SCHEMA {schema} FROM {role};"
        yield f"GRANT USAGE ON SCHEMA {schema} TO {role};"
        yield f"REVOKE ALL ON ALL TABLES IN SCHEMA {schema} FROM {role};"
        yield f"GRANT SELECT ON ALL TABLES IN SCHEMA {schema} TO {role};"
    projections = ", ".join(f"{schema}.{quoted(table.name)}" for table in PROJECTIONS)
    yield f"GRANT INSERT ON {schema}.{quoted(ledger_entry.name)} TO {quoted(recording)};"
    yield f"GRANT INSERT, UPDATE, DELETE ON {projections} TO {quoted(recording)};"
    yield "COMMIT;"
