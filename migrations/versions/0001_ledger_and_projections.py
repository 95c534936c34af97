"""The ledger, the properties of the database, and the projections.

Revision 0001 follows nothing. The ledger and the properties refuse to be changed or deleted, by
triggers; on SQLite these also stop REPLACE, because every connection of the program sets
``recursive_triggers``.
"""

from __future__ import annotations

import sqlalchemy as sa
from alembic import op

revision = "0001"
down_revision = None
branch_labels = None
depends_on = None

_APPEND_ONLY = ("ledger_entry", "store_property")


def upgrade() -> None:
    _create_truth()
    _create_department()
    _create_designs()
    _create_treatment()
    _create_departures()
    if op.get_bind().dialect.name == "postgresql":
        _guard_postgresql()
    else:
        _guard_sqlite()


def downgrade() -> None:
    for table in ("departure", "confirmation", "observation", "delivery", "revision", "course"):
        op.drop_table(table)
    for table in ("machine", "staff", "store_property", "ledger_entry"):
        op.drop_table(table)
    if op.get_bind().dialect.name == "postgresql":
        op.execute("DROP FUNCTION featherlog_append_only()")


def _create_truth() -> None:
    op.create_table(
        "ledger_entry",
        sa.Column("number", sa.Integer, autoincrement=False, nullable=False),
        sa.Column("course", sa.Text),
        _text("kind"),
        _text("who"),
        _text("role"),
        _text("meaning"),
        _text("at"),
        _text("content"),
        _text("previous_hash"),
        _text("hash"),
        _primary_key("ledger_entry", "number"),
        sa.UniqueConstraint("hash", name=op.f("uq_ledger_entry_hash")),
        _check("ledger_entry", "number", "number >= 1"),
        _check("ledger_entry", "kind", "kind <> ''"),
        _check("ledger_entry", "who", "who <> ''"),
        _check("ledger_entry", "previous_hash", "length(previous_hash) = 64"),
        _check("ledger_entry", "hash", "length(hash) = 64"),
    )
    op.create_index(op.f("ix_ledger_entry_course"), "ledger_entry", ["course"])
    op.create_table(
        "store_property",
        _text("name"),
        _text("value"),
        _primary_key("store_property", "name"),
    )


def _create_department() -> None:
    op.create_table(
        "staff",
        _text("name"),
        _text("role"),
        _integer("entry"),
        _primary_key("staff", "name"),
        _to_entry("staff"),
    )
    op.create_table(
        "machine",
        _text("name"),
        _text("content"),
        _integer("entry"),
        _primary_key("machine", "name"),
        _to_entry("machine"),
    )


def _create_designs() -> None:
    op.create_table(
        "course",
        _text("key"),
        _text("patient_name"),
        _text("site"),
        _text("machine"),
        _text("state"),
        _integer("revision"),
        sa.Column("approved_revision", sa.Integer),
        _integer("fractions"),
        sa.Column("next_fraction", sa.Integer),
        sa.Column("next_position", sa.Text),
        sa.Column("next_date", sa.Text),
        sa.Column("part_delivered", sa.Boolean, nullable=False),
        _integer("fractions_complete"),
        _integer("open_departures"),
        _text("state_hash"),
        _integer("entry"),
        _primary_key("course", "key"),
        _to_entry("course"),
        _check(
            "course",
            "state",
            "state IN ('prepared', 'checked', 'approved', 'returned', 'complete')",
        ),
        _check("course", "fractions", "fractions >= 1"),
        _check("course", "fractions_complete", "fractions_complete >= 0"),
    )
    op.create_table(
        "revision",
        _text("course"),
        _integer("number"),
        _text("code"),
        _text("state"),
        _text("design"),
        _text("plan"),
        _text("machine"),
        _text("prepared_by"),
        sa.Column("checked_by", sa.Text),
        sa.Column("approved_by", sa.Text),
        sa.Column("returned_reason", sa.Text),
        _text("prepared_at"),
        sa.Column("checked_at", sa.Text),
        sa.Column("approved_at", sa.Text),
        _text("content_hash"),
        _integer("entry"),
        _primary_key("revision", "course", "number"),
        _to_course("revision"),
        _to_entry("revision"),
        _check(
            "revision",
            "state",
            "state IN ('prepared', 'checked', 'approved', 'returned', 'superseded')",
        ),
        _check("revision", "number", "number >= 1"),
        _check("revision", "content_hash", "length(content_hash) = 64"),
    )


def _create_treatment() -> None:
    op.create_table(
        "delivery",
        _integer("entry"),
        _text("course"),
        _integer("fraction"),
        _text("field"),
        _text("beam"),
        _text("position"),
        sa.Column("meterset_mu", sa.Double, nullable=False),
        sa.Column("planned_mu", sa.Double, nullable=False),
        _text("performer"),
        _text("verifier"),
        _text("at"),
        _primary_key("delivery", "entry", "field", "beam"),
        _to_course("delivery"),
        _to_entry("delivery"),
        _check("delivery", "fraction", "fraction >= 1"),
        _check("delivery", "meterset_mu", "meterset_mu >= 0"),
    )
    op.create_table(
        "observation",
        _integer("entry"),
        _text("course"),
        _integer("fraction"),
        _text("junction"),
        _text("side"),
        sa.Column("gap_cm", sa.Double, nullable=False),
        _primary_key("observation", "entry", "junction", "side"),
        _to_course("observation"),
        _to_entry("observation"),
    )
    op.create_table(
        "confirmation",
        _integer("entry"),
        _text("course"),
        _integer("fraction"),
        _text("position"),
        _text("state_hash"),
        _text("performer"),
        _text("verifier"),
        _text("at"),
        _primary_key("confirmation", "entry"),
        _to_course("confirmation"),
        _to_entry("confirmation"),
    )
    for table in ("delivery", "observation", "confirmation"):
        op.create_index(op.f(f"ix_{table}_course"), table, ["course"])


def _create_departures() -> None:
    op.create_table(
        "departure",
        _text("course"),
        _integer("number"),
        _integer("fraction"),
        _text("kind"),
        _text("grade"),
        _text("detail"),
        _text("reason"),
        _text("status"),
        _integer("entry"),
        sa.Column("explained_entry", sa.Integer),
        _primary_key("departure", "course", "number"),
        _to_course("departure"),
        _to_entry("departure"),
        _to_entry("departure", "explained_entry"),
        _check("departure", "status", "status IN ('open', 'explained')"),
    )


def _guard_sqlite() -> None:
    for table in _APPEND_ONLY:
        for verb in ("UPDATE", "DELETE"):
            op.execute(
                f"CREATE TRIGGER {table}_no_{verb.lower()} BEFORE {verb} ON {table} "
                f"BEGIN SELECT RAISE(ABORT, '{table} is append-only'); END"
            )


def _guard_postgresql() -> None:
    op.execute(
        "CREATE FUNCTION featherlog_append_only() RETURNS trigger LANGUAGE plpgsql AS "
        "$$ BEGIN RAISE EXCEPTION '% is append-only', TG_TABLE_NAME; END $$"
    )
    for table in _APPEND_ONLY:
        op.execute(
            f"CREATE TRIGGER {table}_no_change BEFORE UPDATE OR DELETE ON {table} "
            "FOR EACH ROW EXECUTE FUNCTION featherlog_append_only()"
        )
        # TRUNCATE fires no row trigger.
        op.execute(
            f"CREATE TRIGGER {table}_no_truncate BEFORE TRUNCATE ON {table} "
            "FOR EACH STATEMENT EXECUTE FUNCTION featherlog_append_only()"
        )


def _text(name: str) -> sa.Column[str]:
    return sa.Column(name, sa.Text, nullable=False)


def _integer(name: str) -> sa.Column[int]:
    return sa.Column(name, sa.Integer, autoincrement=False, nullable=False)


def _primary_key(table: str, *columns: str) -> sa.PrimaryKeyConstraint:
    return sa.PrimaryKeyConstraint(*columns, name=op.f(f"pk_{table}"))


def _to_entry(table: str, column: str = "entry") -> sa.ForeignKeyConstraint:
    return sa.ForeignKeyConstraint(
        [column], ["ledger_entry.number"], name=op.f(f"fk_{table}_{column}")
    )


def _to_course(table: str) -> sa.ForeignKeyConstraint:
    return sa.ForeignKeyConstraint(["course"], ["course.key"], name=op.f(f"fk_{table}_course"))


def _check(table: str, name: str, rule: str) -> sa.CheckConstraint:
    return sa.CheckConstraint(rule, name=op.f(f"ck_{table}_{name}"))
