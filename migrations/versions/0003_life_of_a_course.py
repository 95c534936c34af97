"""Events in the life of a course, decisions on departures, late records, pauses and early ends.

Revision 0003 follows 0002. Only projections change; the ledger and its triggers are not touched.
"""

from __future__ import annotations

import sqlalchemy as sa
from alembic import op

revision = "0003"
down_revision = "0002"
branch_labels = None
depends_on = None

_BEFORE = ("open", "explained")
_NOW = ("open", "explained", "decided", "corrected")


def upgrade() -> None:
    op.create_table(
        "event",
        sa.Column("entry", sa.Integer, autoincrement=False, nullable=False),
        sa.Column("course", sa.Text, nullable=False),
        sa.Column("fraction", sa.Integer),
        sa.Column("kind", sa.Text, nullable=False),
        sa.Column("who", sa.Text, nullable=False),
        sa.Column("at", sa.Text, nullable=False),
        sa.Column("content", sa.Text, nullable=False),
        sa.PrimaryKeyConstraint("entry", name=op.f("pk_event")),
        sa.ForeignKeyConstraint(["entry"], ["ledger_entry.number"], name=op.f("fk_event_entry")),
        sa.ForeignKeyConstraint(["course"], ["course.key"], name=op.f("fk_event_course")),
    )
    op.create_index(op.f("ix_event_course"), "event", ["course"])
    op.add_column("course", sa.Column("paused_reason", sa.Text))
    op.add_column("course", sa.Column("ended_reason", sa.Text))
    op.create_index(op.f("ix_course_state_next_date"), "course", ["state", "next_date"])
    op.add_column(
        "delivery", sa.Column("late", sa.Boolean, nullable=False, server_default=sa.false())
    )
    with op.batch_alter_table("departure") as departure:
        departure.add_column(sa.Column("decision", sa.Text))
        departure.add_column(sa.Column("decided_entry", sa.Integer))
        departure.create_foreign_key(
            op.f("fk_departure_decided_entry"), "ledger_entry", ["decided_entry"], ["number"]
        )
        departure.drop_constraint(op.f("ck_departure_status"), type_="check")
        departure.create_check_constraint(op.f("ck_departure_status"), _one_of(_NOW))
    _count_open("'open', 'explained'")


def downgrade() -> None:
    _count_open("'open'")
    with op.batch_alter_table("departure") as departure:
        departure.drop_constraint(op.f("ck_departure_status"), type_="check")
        departure.create_check_constraint(op.f("ck_departure_status"), _one_of(_BEFORE))
        departure.drop_constraint(op.f("fk_departure_decided_entry"), type_="foreignkey")
        departure.drop_column("decided_entry")
        departure.drop_column("decision")
    op.drop_column("delivery", "late")
    op.drop_index(op.f("ix_course_state_next_date"), "course")
    op.drop_column("course", "ended_reason")
    op.drop_column("course", "paused_reason")
    op.drop_table("event")


def _count_open(states: str) -> None:
    # A reason alone closed a departure before; now it stays open until somebody decides on it.
    op.execute(
        "UPDATE course SET open_departures = (SELECT count(*) FROM departure "  # noqa: S608 - our own words
        f"WHERE departure.course = course.key AND departure.status IN ({states}))"
    )


def _one_of(allowed: tuple[str, ...]) -> str:
    return f"status IN ({', '.join(repr(value) for value in allowed)})"
