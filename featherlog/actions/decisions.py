"""What people sign about a course as a whole: decisions, checks of new positions, reviews."""

from __future__ import annotations

from typing import TYPE_CHECKING

from featherlog.actions.signing import signing_desk
from featherlog.actions.stored import load
from featherlog.actions.typed import required
from featherlog.errors import InputError, NotFoundError, RefusedError
from featherlog.policy import Act
from featherlog.store import ledger, queries
from featherlog.store.entry import Kind

if TYPE_CHECKING:
    from featherlog.actions.desk import Signer
    from featherlog.views.review import WeekView


def decide(
    database: str | None,
    key: str,
    number: int,
    *,
    decision: str,
    by: Signer,
    verified_by: Signer | None = None,
) -> None:
    """Close a departure whose reason is known with a decision.

    Raises:
        InputError: no decision is given.
        NotFoundError: there is no such undecided departure.
        RefusedError: nobody has given its reason yet.
    """
    decision = required("--decision", decision, "what was decided and why")
    with signing_desk(database, Act.DECIDE, by, verified_by) as desk:
        load(desk, key)
        rows = queries.departures(desk.connection, key)
        status = next((row.status for row in rows if row.number == number), "")
        if status not in ("open", "explained"):
            raise NotFoundError(f"course {key} has no undecided departure {number}")
        if status == "open":
            raise RefusedError(
                f"departure {number} of {key} has no reason yet; give it first with `featherlog "
                f"explain {key} {number} --reason ... --by ...`"
            )
        desk.append(
            Kind.DEPARTURE_DECIDED,
            {"departure": number, "decision": decision},
            course=key,
            meaning="I decide on this departure",
        )


def check_position(
    database: str | None, key: str, label: str, *, by: Signer, verified_by: Signer | None = None
) -> None:
    """Sign that a physicist has checked a position that the course is or will be shifted to.

    Raises InputError for a position that the course does not have.
    """
    with signing_desk(database, Act.CHECK_POSITION, by, verified_by) as desk:
        labels = [position.label for position in load(desk, key).plan.positions]
        if label not in labels:
            raise InputError(
                f"there is no position {label!r} in this course; it has {', '.join(labels)}"
            )
        desk.append(
            Kind.POSITION_CHECKED,
            {"position": label},
            course=key,
            meaning=f"I checked position {label} as a new set of fields",
        )


def sign_review(
    database: str | None,
    key: str,
    week: WeekView,
    *,
    by: Signer,
    verified_by: Signer | None = None,
) -> None:
    """Sign the review that was shown.

    Raises RefusedError where the course has gone on since: the signature is for what was seen.
    """
    with signing_desk(database, Act.REVIEW, by, verified_by) as desk:
        load(desk, key)
        last = max(entry.number for entry in ledger.entries(desk.connection, key))
        if last != week.reviewed_to:
            raise RefusedError(
                f"course {key} has gone on to entry {last} since this review was shown (entry "
                f"{week.reviewed_to}); look at it again"
            )
        desk.append(
            Kind.REVIEW_SIGNED,
            {"reviewed_to": week.reviewed_to, "outstanding": list(week.outstanding)},
            course=key,
            meaning=f"I reviewed this course up to ledger entry {week.reviewed_to}",
        )
