"""The check before the beam. It may refuse, and then says why and whom to call."""

from __future__ import annotations

from typing import TYPE_CHECKING

from featherlog.actions.desk import at_desk
from featherlog.actions.read_back import ReadBack, measured, planned_values, read_back_reasons
from featherlog.actions.refusals import course_reasons, refusal
from featherlog.actions.signing import signing_desk
from featherlog.actions.stored import Stored, load
from featherlog.actions.today import day_view
from featherlog.errors import RefusedError
from featherlog.policy import Act
from featherlog.store.entry import Kind

if TYPE_CHECKING:
    from typing import Any

    from featherlog.actions.desk import Desk, Signer
    from featherlog.views.day import DayView

__all__ = ["ReadBack", "confirm", "measured"]


def confirm(
    database: str | None, key: str, *, by: Signer, verified_by: Signer, read_back: ReadBack
) -> DayView:
    """Confirm the next fraction: two people, the right position, the current sheet.

    Raises:
        RefusedError: a reason to stop, and whom to call.
        InputError: a gap or a reading names nothing that the course has.
    """
    with at_desk(database) as desk:
        _checked(desk, key, read_back)  # before anybody has typed a passphrase for nothing
    with signing_desk(database, Act.CONFIRM, by, verified_by) as desk:
        stored, view = _checked(desk, key, read_back)
        desk.append(
            Kind.FRACTION_CONFIRMED,
            {
                "fraction": view.fraction,
                "position": view.position,
                "state_hash": stored.row.state_hash,
                "performer": by.name,
                "verifier": verified_by.name,
                **_observed(stored, view, read_back),
            },
            course=key,
            meaning=f"We confirm position {view.position} for fraction {view.fraction}",
        )
    return view


def _checked(desk: Desk, key: str, read_back: ReadBack) -> tuple[Stored, DayView]:
    stored = load(desk, key)
    view = day_view(desk, stored)
    reasons = list(course_reasons(desk, stored, view))
    if view.fields and not stored.row.ended_reason:  # something is left to treat
        reasons += read_back_reasons(stored, view, desk.policy, read_back)
    if reasons:
        raise RefusedError(refusal(reasons, desk.policy.contacts))
    return stored, view


def _observed(stored: Stored, view: DayView, read_back: ReadBack) -> dict[str, Any]:
    """Return what was read back, each reading beside what was planned."""
    planned = planned_values(view, stored.machine.tolerances)
    return {
        "readings": [
            {"name": name, "read_cm": value, "planned_cm": planned[name].cm}
            for name, value in read_back.readings_cm.items()
        ],
        "gaps": [
            {"junction": name, "side": side, "gap_cm": gap}
            for (name, side), gap in measured(stored, read_back.gaps_cm).items()
        ],
    }
