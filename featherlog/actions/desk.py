"""Where every action begins: the database, the time, and who is acting."""

from __future__ import annotations

import os
from contextlib import contextmanager
from contextvars import ContextVar
from dataclasses import dataclass
from datetime import datetime
from typing import TYPE_CHECKING, Any

from featherlog.errors import InputError, NotFoundError, RefusedError
from featherlog.store import ledger, queries
from featherlog.store.engine import open_engine, reading, resolve_url, writing
from featherlog.store.entry import Draft, Entry

if TYPE_CHECKING:
    from collections.abc import Iterator

    from sqlalchemy import Connection

CLOCK = "FEATHERLOG_CLOCK"
_practice_time: ContextVar[datetime | None] = ContextVar("practice_time", default=None)


@dataclass(frozen=True, slots=True)
class Desk:
    """One transaction: its connection, the time it happens and whether it is for practice."""

    connection: Connection
    now: datetime
    demo: bool

    @property
    def stamp(self) -> str:
        """Return the time with its offset, to the second (ISO 8601)."""
        return self.now.isoformat(timespec="seconds")

    def role_of(self, name: str, act: str, *allowed: str) -> str:
        """Return a person's role, refusing strangers and roles that may not do this act.

        Raises:
            NotFoundError: nobody of that name is on the staff list.
            RefusedError: their role does not allow the act.
        """
        role = queries.staff_role(self.connection, name)
        if role is None:
            raise NotFoundError(
                f"nobody called {name!r} is on the staff list; see `featherlog staff list`"
            )
        if role not in allowed:
            raise RefusedError(
                f"{name} has the role {role} and may not {act}; allowed: {' or '.join(allowed)}"
            )
        return role

    def append(
        self,
        kind: str,
        content: dict[str, Any],
        *,
        who: str,
        role: str,
        meaning: str,
        course: str | None = None,
    ) -> Entry:
        """Write one ledger entry, with its projections, in this transaction."""
        draft = Draft(course, kind, who, role, meaning, self.stamp, content)
        return ledger.append(self.connection, draft)


@contextmanager
def at_desk(database: str | None) -> Iterator[Desk]:
    """Give a desk that only reads."""
    with reading(open_engine(resolve_url(database))) as connection:
        yield _desk(connection)


@contextmanager
def signing_desk(database: str | None) -> Iterator[Desk]:
    """Give a desk that writes: everything it does is one transaction."""
    with writing(open_engine(resolve_url(database))) as connection:
        yield _desk(connection)


@contextmanager
def practice_time(moment: datetime) -> Iterator[None]:
    """Let everything inside happen at a fixed moment; only a practice database takes it."""
    token = _practice_time.set(moment)
    try:
        yield
    finally:
        _practice_time.reset(token)


def _desk(connection: Connection) -> Desk:
    demo = queries.properties(connection).get("demo") == "yes"
    return Desk(connection, _now(demo=demo), demo)


def _now(*, demo: bool) -> datetime:
    fixed = _practice_time.get() or _clock()
    if fixed is None:
        return datetime.now().astimezone()
    if not demo:
        raise InputError(f"{CLOCK} is set, but only a practice database takes a fixed clock")
    return fixed


def _clock() -> datetime | None:
    text = os.environ.get(CLOCK)
    if not text:
        return None
    try:
        moment = datetime.fromisoformat(text)
    except ValueError:
        moment = None
    if moment is None or moment.tzinfo is None:
        raise InputError(
            f"{CLOCK} is {text!r}, but must be a time with its offset, such as "
            "2026-03-02T09:00:00+01:00"
        )
    return moment
