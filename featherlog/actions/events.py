"""What else happened in a course: the list of it, and what of it counts today."""

from __future__ import annotations

import json
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from featherlog.actions.desk import at_desk
from featherlog.actions.entry_words import content_words
from featherlog.errors import NotFoundError
from featherlog.store import queries
from featherlog.store.entry import Kind

if TYPE_CHECKING:
    from collections.abc import Iterable
    from datetime import date

    from featherlog.store.rows import EventRow


@dataclass(frozen=True, slots=True)
class EventLine:
    """One event: in ``words``, and in ``content`` as its entry says it, without the signers."""

    entry: int
    at: str
    kind: str
    fraction: int | None
    signed_by: tuple[str, ...]
    words: str
    content: dict[str, Any]


def list_events(database: str | None, key: str) -> tuple[EventLine, ...]:
    """Return the events of a course in the order they were recorded.

    Raises NotFoundError where there is no such course.
    """
    with at_desk(database) as desk:
        if queries.course_row(desk.connection, key) is None:
            raise NotFoundError(f"there is no course {key!r}; see `featherlog course list`")
        return tuple(map(_line, queries.events(desk.connection, key)))


def imager_out(events: Iterable[EventRow]) -> EventRow | None:
    """Return the outage of the imager that still lasts; None where it works."""
    last = None
    for event in events:
        if event.kind in (Kind.IMAGER_OUT, Kind.IMAGER_BACK):
            last = event if event.kind == Kind.IMAGER_OUT else None
    return last


def raised_risk(events: Iterable[EventRow]) -> tuple[str, ...]:
    """Return what makes a mistake more likely to go unseen at present."""
    outage = imager_out(events)
    if outage is None:
        return ()
    return (f"imager out since {outage.at} ({json.loads(outage.content)['reason']})",)


def physics_present(events: Iterable[EventRow], fraction: int, on: date) -> bool:
    """Tell whether a physicist attested on that day to be there for the fraction."""
    return any(
        event.kind == Kind.PHYSICS_PRESENT
        and event.fraction == fraction
        and event.at[:10] == on.isoformat()
        for event in events
    )


def _line(event: EventRow) -> EventLine:
    content = json.loads(event.content)
    signers = tuple(content.pop("signed_by", ()))
    said = content_words(event.kind, content)
    return EventLine(event.entry, event.at, event.kind, event.fraction, signers, said, content)
