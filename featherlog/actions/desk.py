"""Where every action begins: the database, the time, the policy, and who is acting."""

from __future__ import annotations

import os
from contextlib import contextmanager
from contextvars import ContextVar
from dataclasses import dataclass, field
from datetime import datetime
from typing import TYPE_CHECKING, Any
from zoneinfo import ZoneInfo

import msgspec

from featherlog.errors import InputError
from featherlog.policy import DEFAULT_POLICY, Policy
from featherlog.store import ledger, queries
from featherlog.store.engine import open_engine, reading, resolve_url, writing
from featherlog.store.entry import Draft, Entry, Signatory

if TYPE_CHECKING:
    from collections.abc import Callable, Iterator

    from sqlalchemy import Connection

CLOCK = "FEATHERLOG_CLOCK"
_practice_time: ContextVar[datetime | None] = ContextVar("practice_time", default=None)


@dataclass(frozen=True, slots=True)
class Signer:
    """A person who is to sign; their passphrase is asked for only once it is needed."""

    name: str
    passphrase: Callable[[], str] = field(repr=False)


@dataclass(frozen=True, slots=True)
class Desk:
    """One transaction: its connection, its time, whether it is for practice, the policy in force.

    ``signatories`` sign every entry that is written here, whoever acts first.
    """

    connection: Connection
    now: datetime
    demo: bool
    policy: Policy
    signatories: tuple[Signatory, ...] = ()

    @property
    def stamp(self) -> str:
        """Return the time with its offset, to the second (ISO 8601)."""
        return self.now.isoformat(timespec="seconds")

    def append(
        self,
        kind: str,
        content: dict[str, Any],
        *,
        meaning: str,
        course: str | None = None,
        also: tuple[Signatory, ...] = (),
    ) -> Entry:
        """Write one signed ledger entry, with its projections, in this transaction.

        ``also`` sign after the desk's own signatories.
        """
        signatories = (*self.signatories, *also)
        first = signatories[0]
        draft = Draft(course, kind, first.who, first.role, meaning, self.stamp, content)
        return ledger.append(self.connection, draft, signatories)


@contextmanager
def at_desk(database: str | None) -> Iterator[Desk]:
    """Give a desk that only reads."""
    with reading(open_engine(resolve_url(database))) as connection:
        yield _desk(connection)


@contextmanager
def writing_desk(database: str | None) -> Iterator[Desk]:
    """Give a desk that writes, with nobody at it yet: all it does is one transaction."""
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
    policy = policy_in_force(connection)
    return Desk(connection, _now(policy.time_zone, demo=demo), demo, policy)


def policy_in_force(connection: Connection) -> Policy:
    """Return the department's policy; the built-in one until it has set its own."""
    row = queries.policy(connection)
    return msgspec.json.decode(row.content, type=Policy) if row else DEFAULT_POLICY


def _now(time_zone: str, *, demo: bool) -> datetime:
    zone = ZoneInfo(time_zone) if time_zone else None
    fixed = _practice_time.get() or _clock()
    if fixed is None:
        return datetime.now().astimezone(zone)
    if not demo:
        raise InputError(f"{CLOCK} is set, but only a practice database takes a fixed clock")
    return fixed.astimezone(zone) if zone else fixed


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
