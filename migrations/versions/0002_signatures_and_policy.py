"""Signatures of every entry, the keys they are made with, and the department's policy.

Revision 0002 follows 0001. The ledger gains a column with a default and is not rebuilt, so the
triggers that keep it append-only stay as they are. Entries from before have no signatures.
"""

from __future__ import annotations

import sqlalchemy as sa
from alembic import op

revision = "0002"
down_revision = "0001"
branch_labels = None
depends_on = None


def upgrade() -> None:
    op.add_column(
        "ledger_entry", sa.Column("signatures", sa.Text, nullable=False, server_default="[]")
    )
    with op.batch_alter_table("staff") as staff:
        staff.add_column(sa.Column("left_entry", sa.Integer))
        staff.create_foreign_key(
            op.f("fk_staff_left_entry"), "ledger_entry", ["left_entry"], ["number"]
        )
    _create_keys()
    op.create_table(
        "policy",
        sa.Column("version", sa.Integer, autoincrement=False, nullable=False),
        sa.Column("content", sa.Text, nullable=False),
        sa.Column("entry", sa.Integer, nullable=False),
        sa.PrimaryKeyConstraint("version", name=op.f("pk_policy")),
        _to_entry("policy"),
    )


def downgrade() -> None:
    for table in ("policy", "failed_signing", "staff_key"):
        op.drop_table(table)
    with op.batch_alter_table("staff") as staff:
        staff.drop_constraint(op.f("fk_staff_left_entry"), type_="foreignkey")
        staff.drop_column("left_entry")
    op.drop_column("ledger_entry", "signatures")


def _create_keys() -> None:
    op.create_table(
        "staff_key",
        sa.Column("public", sa.Text, nullable=False),
        sa.Column("name", sa.Text, nullable=False),
        sa.Column("wrapped", sa.Text, nullable=False),
        sa.Column("from_entry", sa.Integer, nullable=False),
        sa.Column("to_entry", sa.Integer),
        sa.PrimaryKeyConstraint("public", name=op.f("pk_staff_key")),
        sa.ForeignKeyConstraint(["name"], ["staff.name"], name=op.f("fk_staff_key_name")),
        _to_entry("staff_key", "from_entry"),
        _to_entry("staff_key", "to_entry"),
    )
    op.create_index(op.f("ix_staff_key_name"), "staff_key", ["name"])
    op.create_table(
        "failed_signing",
        sa.Column("entry", sa.Integer, autoincrement=False, nullable=False),
        sa.Column("name", sa.Text, nullable=False),
        sa.PrimaryKeyConstraint("entry", name=op.f("pk_failed_signing")),
        _to_entry("failed_signing"),
    )


def _to_entry(table: str, column: str = "entry") -> sa.ForeignKeyConstraint:
    return sa.ForeignKeyConstraint(
        [column], ["ledger_entry.number"], name=op.f(f"fk_{table}_{column}")
    )
