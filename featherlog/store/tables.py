"""The tables: one ledger that is only ever appended to, and projections made from it.

The ledger and ``store_property`` are the truth. Every other table is a projection, written in the
transaction that appends its entry, and can be emptied and made again from the ledger. Nothing
cascades: a clinical row never goes because another one went.
"""

from __future__ import annotations

from sqlalchemy import (
    Boolean,
    CheckConstraint,
    Column,
    Double,
    ForeignKey,
    Index,
    Integer,
    MetaData,
    Table,
    Text,
    UniqueConstraint,
    false,
)

metadata = MetaData(
    naming_convention={
        "ix": "ix_%(table_name)s_%(column_0_N_name)s",
        "uq": "uq_%(table_name)s_%(column_0_N_name)s",
        "ck": "ck_%(table_name)s_%(constraint_name)s",
        "fk": "fk_%(table_name)s_%(column_0_N_name)s",
        "pk": "pk_%(table_name)s",
    }
)


def _text(name: str) -> Column[str]:
    return Column(name, Text, nullable=False)


def _integer(name: str) -> Column[int]:
    return Column(name, Integer, nullable=False)


def _number(name: str) -> Column[float]:
    return Column(name, Double, nullable=False)


def _entry(name: str = "entry", *, key: bool = False) -> Column[int]:
    number = ForeignKey("ledger_entry.number")
    return Column(name, number, primary_key=key, autoincrement=False, nullable=False)


def _course(*, key: bool = False, index: bool = False) -> Column[str]:
    return Column("course", ForeignKey("course.key"), primary_key=key, nullable=False, index=index)


def _one_of(column: str, *allowed: str) -> CheckConstraint:
    values = ", ".join(f"'{value}'" for value in allowed)
    return CheckConstraint(f"{column} IN ({values})", name=column)


ledger_entry = Table(
    "ledger_entry",
    metadata,
    # Numbered by us: a sequence of the database leaves holes where a transaction rolled back.
    Column("number", Integer, primary_key=True, autoincrement=False),
    Column("course", Text, index=True),
    _text("kind"),
    _text("who"),
    _text("role"),
    _text("meaning"),
    _text("at"),
    _text("content"),
    _text("previous_hash"),
    _text("hash"),
    Column("signatures", Text, nullable=False, server_default="[]"),
    UniqueConstraint("hash"),
    CheckConstraint("number >= 1", name="number"),
    CheckConstraint("kind <> ''", name="kind"),
    CheckConstraint("who <> ''", name="who"),
    CheckConstraint("length(previous_hash) = 64", name="previous_hash"),
    CheckConstraint("length(hash) = 64", name="hash"),
)

store_property = Table(
    "store_property",
    metadata,
    Column("name", Text, primary_key=True),
    _text("value"),
)

staff = Table(
    "staff",
    metadata,
    Column("name", Text, primary_key=True),
    _text("role"),
    _entry(),
    Column("left_entry", ForeignKey("ledger_entry.number")),
)

# A key is good for the entries from the one that made it known to the one that ended it.
staff_key = Table(
    "staff_key",
    metadata,
    Column("public", Text, primary_key=True),
    Column("name", Text, ForeignKey("staff.name"), nullable=False, index=True),
    _text("wrapped"),
    _entry("from_entry"),
    Column("to_entry", ForeignKey("ledger_entry.number")),
)

# Wrong passphrases since the person last signed.
failed_signing = Table("failed_signing", metadata, _entry(key=True), _text("name"))

policy = Table(
    "policy",
    metadata,
    Column("version", Integer, primary_key=True, autoincrement=False),
    _text("content"),
    _entry(),
)

machine = Table(
    "machine",
    metadata,
    Column("name", Text, primary_key=True),
    _text("content"),
    _entry(),
)

course = Table(
    "course",
    metadata,
    Column("key", Text, primary_key=True),
    _text("patient_name"),
    _text("site"),
    _text("machine"),
    _text("state"),
    _integer("revision"),
    Column("approved_revision", Integer),
    _integer("fractions"),
    Column("next_fraction", Integer),
    Column("next_position", Text),
    Column("next_date", Text),
    Column("part_delivered", Boolean, nullable=False),
    _integer("fractions_complete"),
    _integer("open_departures"),
    _text("state_hash"),
    _entry(),
    Column("paused_reason", Text),
    Column("ended_reason", Text),
    _one_of("state", "prepared", "checked", "approved", "returned", "complete"),
    CheckConstraint("fractions >= 1", name="fractions"),
    CheckConstraint("fractions_complete >= 0", name="fractions_complete"),
    Index(None, "state", "next_date"),
)

revision = Table(
    "revision",
    metadata,
    _course(key=True),
    Column("number", Integer, primary_key=True, autoincrement=False),
    _text("code"),
    _text("state"),
    _text("design"),
    _text("plan"),
    _text("machine"),
    _text("prepared_by"),
    Column("checked_by", Text),
    Column("approved_by", Text),
    Column("returned_reason", Text),
    _text("prepared_at"),
    Column("checked_at", Text),
    Column("approved_at", Text),
    _text("content_hash"),
    _entry(),
    _one_of("state", "prepared", "checked", "approved", "returned", "superseded"),
    CheckConstraint("number >= 1", name="number"),
    CheckConstraint("length(content_hash) = 64", name="content_hash"),
)

delivery = Table(
    "delivery",
    metadata,
    _entry(key=True),
    _course(index=True),
    _integer("fraction"),
    Column("field", Text, primary_key=True),
    Column("beam", Text, primary_key=True),
    _text("position"),
    _number("meterset_mu"),
    _number("planned_mu"),
    _text("performer"),
    _text("verifier"),
    _text("at"),
    Column("late", Boolean, nullable=False, server_default=false()),
    CheckConstraint("fraction >= 1", name="fraction"),
    CheckConstraint("meterset_mu >= 0", name="meterset_mu"),
)

observation = Table(
    "observation",
    metadata,
    _entry(key=True),
    _course(index=True),
    _integer("fraction"),
    Column("junction", Text, primary_key=True),
    Column("side", Text, primary_key=True),
    _number("gap_cm"),
)

confirmation = Table(
    "confirmation",
    metadata,
    _entry(key=True),
    _course(index=True),
    _integer("fraction"),
    _text("position"),
    _text("state_hash"),
    _text("performer"),
    _text("verifier"),
    _text("at"),
)

departure = Table(
    "departure",
    metadata,
    _course(key=True),
    Column("number", Integer, primary_key=True, autoincrement=False),
    _integer("fraction"),
    _text("kind"),
    _text("grade"),
    _text("detail"),
    _text("reason"),
    _text("status"),
    _entry(),
    Column("explained_entry", ForeignKey("ledger_entry.number")),
    Column("decision", Text),
    Column("decided_entry", ForeignKey("ledger_entry.number")),
    _one_of("status", "open", "explained", "decided", "corrected"),
)

event = Table(
    "event",
    metadata,
    _entry(key=True),
    _course(index=True),
    Column("fraction", Integer),
    _text("kind"),
    _text("who"),
    _text("at"),
    _text("content"),
)

PROJECTIONS: tuple[Table, ...] = tuple(
    table
    for table in reversed(metadata.sorted_tables)
    if table is not ledger_entry and table is not store_property
)
"""Every projection, each before the tables it refers to, so that they empty in this order."""
