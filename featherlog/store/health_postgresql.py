"""Health of a PostgreSQL database: version, encryption, settings, role, triggers, checksums."""

from __future__ import annotations

from typing import TYPE_CHECKING

from featherlog.views.health import FAIL, OK, WARN, HealthLine

if TYPE_CHECKING:
    from sqlalchemy import Connection

_SETTINGS = ("fsync", "full_page_writes", "synchronous_commit")
_TRIGGERS = 4
_ENABLED = (
    "SELECT count(*) FROM pg_trigger JOIN pg_class ON pg_class.oid = tgrelid "
    "WHERE relname IN ('ledger_entry', 'store_property') AND NOT tgisinternal "
    "AND tgenabled IN ('O', 'A') AND (tgname LIKE '%_no_change' OR tgname LIKE '%_no_truncate')"
)
_OWNER = (
    "SELECT rolsuper OR pg_has_role(current_user, relowner, 'MEMBER') "
    "FROM pg_class, pg_roles WHERE pg_class.oid = 'ledger_entry'::regclass "
    "AND rolname = current_user"
)
_ENCRYPTED = "SELECT ssl FROM pg_stat_ssl WHERE pid = pg_backend_pid()"


def _version(connection: Connection) -> HealthLine:
    import psycopg  # noqa: PLC0415 - an optional dependency

    found = f"PostgreSQL {_show(connection, 'server_version')}, through psycopg"
    return HealthLine("database", OK, f"{found} {psycopg.__version__}")


def _encryption(connection: Connection) -> HealthLine:
    if connection.exec_driver_sql(_ENCRYPTED).scalar():
        return HealthLine("encryption", OK, "the connection is encrypted (TLS)")
    if connection.exec_driver_sql("SELECT inet_server_addr()").scalar() is None:
        return HealthLine("encryption", OK, "a socket of this computer; nothing crosses a network")
    found = "names and identifiers cross the network in the clear"
    return HealthLine("encryption", WARN, found, "add ?sslmode=verify-full to the URL")


def _settings(connection: Connection) -> HealthLine:
    found = {name: _show(connection, name) for name in _SETTINGS}
    text = ", ".join(f"{name} {value}" for name, value in found.items())
    off = [name for name, value in found.items() if value == "off"]
    if off:
        todo = f"a power failure can lose records: switch on {', '.join(off)} in postgresql.conf"
        return HealthLine("settings", FAIL, text, todo)
    return HealthLine("settings", OK, text)


def _role(connection: Connection) -> HealthLine:
    user = connection.exec_driver_sql("SELECT current_user").scalar()
    if connection.exec_driver_sql(_OWNER).scalar():
        found = f"{user} owns the tables, and so could switch the append-only triggers off"
        return HealthLine(
            "role", WARN, found, "work as the recording role; see `featherlog database grants`"
        )
    return HealthLine("role", OK, f"{user} does not own the tables")


def _guards(connection: Connection) -> HealthLine:
    count = connection.exec_driver_sql(_ENABLED.replace("%", "%%")).scalar()
    found = f"{count} of {_TRIGGERS} triggers in force"
    if count != _TRIGGERS:
        todo = "somebody took away what keeps the ledger append-only; call the administrator"
        return HealthLine("append-only", FAIL, found, todo)
    return HealthLine("append-only", OK, found)


def _integrity(connection: Connection) -> HealthLine:
    if _show(connection, "data_checksums") == "on":
        return HealthLine("integrity", OK, "the server checks its pages (data checksums)")
    todo = "run pg_checksums --enable while the server is stopped"
    return HealthLine("integrity", WARN, "the server does not check its pages", todo)


def _show(connection: Connection, setting: str) -> str:
    return str(connection.exec_driver_sql(f"SHOW {setting}").scalar())


CHECKS = (
    ("database", _version),
    ("encryption", _encryption),
    ("settings", _settings),
    ("role", _role),
    ("append-only", _guards),
    ("integrity", _integrity),
)
"""What is looked at in PostgreSQL alone."""
