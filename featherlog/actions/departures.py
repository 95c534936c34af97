"""Departures of a course, and the reasons given for them."""

from __future__ import annotations

from typing import TYPE_CHECKING

from featherlog.actions.desk import Signer, at_desk
from featherlog.actions.signing import signing_desk
from featherlog.actions.stored import departure_lines, load
from featherlog.actions.typed import required
from featherlog.errors import NotFoundError
from featherlog.policy import Act
from featherlog.store import queries
from featherlog.store.entry import Kind

if TYPE_CHECKING:
    from featherlog.views.common import DepartureLine


def list_departures(database: str | None, key: str) -> tuple[DepartureLine, ...]:
    """Return every departure of a course, by number; NotFoundError where there is no course."""
    with at_desk(database) as desk:
        load(desk, key)
        return departure_lines(queries.departures(desk.connection, key))


def explain(
    database: str | None,
    key: str,
    number: int,
    *,
    by: Signer,
    reason: str,
    verified_by: Signer | None = None,
) -> None:
    """Give the reason for an open departure.

    Raises InputError without a reason, NotFoundError where there is no such open departure.
    """
    reason = required("--reason", reason, "why the departure happened")
    with signing_desk(database, Act.EXPLAIN, by, verified_by) as desk:
        load(desk, key)
        rows = queries.departures(desk.connection, key)
        if not any(row.number == number and row.status == "open" for row in rows):
            raise NotFoundError(f"course {key} has no open departure {number}")
        desk.append(
            Kind.DEPARTURE_EXPLAINED,
            {"departure": number, "reason": reason},
            course=key,
            meaning="I give the reason for this departure",
        )
