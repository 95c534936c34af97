"""The ledger as people ask for it: its entries, its head, and whether all of it fits together."""

from __future__ import annotations

import re
from dataclasses import dataclass
from typing import TYPE_CHECKING

from featherlog.actions.desk import at_desk
from featherlog.errors import InputError, NotFoundError
from featherlog.store import ledger, queries
from featherlog.store.entry import signed_by

if TYPE_CHECKING:
    from collections.abc import Callable

    from featherlog.store.verify import Head, Verified


@dataclass(frozen=True, slots=True)
class EntryLine:
    """One entry in the list; ``signed_by`` is empty where it bears no signature."""

    entry: int
    course: str | None
    kind: str
    who: str
    role: str
    meaning: str
    at: str
    signed_by: tuple[str, ...]
    hash: str


def verify_ledger(
    database: str | None, head: str | None, progress: Callable[[int, int], None]
) -> Verified:
    """Look at every entry, signature and projection; ``head`` is one noted earlier.

    Raises InputError for a head that is not written NUMBER:HASH.
    """
    from featherlog.store.verify import verify  # noqa: PLC0415 - loads keys, which listing needs not

    earlier = _head(head) if head else None
    with at_desk(database) as desk:
        return verify(desk.connection, earlier, progress)


def ledger_head(database: str | None) -> str:
    """Return the number and whole hash of the last entry; empty where there is none."""
    with at_desk(database) as desk:
        last = ledger.head(desk.connection)
    return f"{last.number}:{last.hash}" if last else ""


def list_entries(database: str | None, course: str | None) -> tuple[EntryLine, ...]:
    """Return the entries of the whole ledger or of one course; NotFoundError without one."""
    with at_desk(database) as desk:
        if course is not None and queries.course_row(desk.connection, course) is None:
            raise NotFoundError(f"there is no course {course!r}; see `featherlog course list`")
        return tuple(
            EntryLine(
                entry.number,
                entry.course,
                entry.kind,
                entry.who,
                entry.role,
                entry.meaning,
                entry.at,
                signed_by(entry),
                entry.hash,
            )
            for entry in ledger.entries(desk.connection, course)
        )


def _head(text: str) -> Head:
    from featherlog.store.verify import Head  # noqa: PLC0415 - as above

    found = re.fullmatch(r"([1-9][0-9]{0,9}):([0-9a-f]{12,64})", text.strip().lower())
    if found is None:
        raise InputError(
            f"--head is {text!r}, but must be NUMBER:HASH with at least 12 digits of the hash, as "
            "a page or `featherlog ledger head` shows it"
        )
    return Head(int(found[1]), found[2])
