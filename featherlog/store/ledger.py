"""The ledger: appended to, read and verified, never changed.

Each entry holds the hash of the one before, and the signatures of the people who made it. The chain
shows an entry that was changed, removed from the middle or put in; ``verify`` looks at signatures
as well. Neither can show that the tail was cut off, nor that all of it was written anew with other
keys. For that the head is printed on every paper, outside the database.
"""

from __future__ import annotations

import json
from dataclasses import replace
from typing import TYPE_CHECKING, Any

from sqlalchemy import insert, select

from featherlog.store import projection
from featherlog.store.entry import (
    FIRST_HASH,
    Draft,
    Entry,
    Signatory,
    canonical,
    hash_of,
    sign_all,
)
from featherlog.store.tables import ledger_entry

if TYPE_CHECKING:
    from collections.abc import Iterator

    from sqlalchemy import Connection, Row

# Entries read at once: enough to be quick, few enough for any ledger to fit in memory.
_AT_A_TIME = 1000

__all__ = [
    "Draft",
    "Entry",
    "append",
    "chain_fault",
    "entries",
    "first_fault",
    "head",
    "rebuild",
    "row_of",
]


def append(connection: Connection, draft: Draft, signatories: tuple[Signatory, ...] = ()) -> Entry:
    """Write ``draft`` as the next entry, and its projections, in the caller's transaction.

    Args:
        connection: from ``writing``, whose lock makes numbers consecutive.
        draft: what happened.
        signatories: everyone who signs it, whoever makes the entry first. Their names go into the
            content, so that no signature can be taken away unseen.

    Returns:
        The entry as written.

    Raises:
        IntegrityError: the entry does not fit what the ledger says so far.
    """
    last = head(connection)
    names = {"signed_by": [one.who for one in signatories]} if signatories else {}
    text = canonical(draft.content | names)
    unsigned = Entry(
        number=last.number + 1 if last else 1,
        course=draft.course,
        kind=str(draft.kind),
        who=draft.who,
        role=draft.role,
        meaning=draft.meaning,
        at=draft.at,
        # Read back, so that what is projected now is what a rebuild will project.
        content=json.loads(text),
        text=text,
        previous_hash=last.hash if last else FIRST_HASH,
        hash="",
    )
    entry_hash = hash_of(unsigned)
    entry = replace(unsigned, hash=entry_hash, signatures=sign_all(entry_hash, signatories))
    connection.execute(insert(ledger_entry).values(row_of(entry)))
    projection.apply(connection, entry)
    return entry


def entries(connection: Connection, course: str | None = None) -> Iterator[Entry]:
    """Yield the entries in order: all, or those of one course; few are in memory at a time."""
    query = select(ledger_entry).order_by(ledger_entry.c.number)
    if course is not None:
        query = query.where(ledger_entry.c.course == course)
    options = {"yield_per": _AT_A_TIME}
    with connection.execute(query, execution_options=options) as streamed:
        yield from map(_entry, streamed)


def head(connection: Connection) -> Entry | None:
    """Return the last entry; None while the ledger is empty."""
    query = select(ledger_entry).order_by(ledger_entry.c.number.desc()).limit(1)
    row = connection.execute(query).one_or_none()
    return _entry(row) if row is not None else None


def first_fault(connection: Connection) -> str | None:
    """Return a sentence on the first entry that does not fit the chain; None when all fit."""
    previous_hash = FIRST_HASH
    for number, entry in enumerate(entries(connection), start=1):
        fault = chain_fault(entry, number, previous_hash)
        if fault is not None:
            return fault
        previous_hash = entry.hash
    return None


def rebuild(connection: Connection) -> None:
    """Empty the projections and make them again from the ledger."""
    projection.empty(connection)
    for entry in entries(connection):
        projection.apply(connection, entry)


def chain_fault(entry: Entry, number: int, previous_hash: str) -> str | None:
    """Return a sentence where an entry does not follow the one before; None where it does."""
    if entry.number != number:
        return f"Ledger entry {number} is missing: entry {entry.number} stands in its place."
    name = f"Ledger entry {number} ({entry.kind}, {entry.at})"
    if entry.previous_hash != previous_hash:
        return f"{name} does not follow the entry before it: the hash it names is another."
    if entry.hash != hash_of(entry):
        return f"{name} was changed after it was written: its hash does not fit what it says."
    return None


def row_of(entry: Entry) -> dict[str, Any]:
    """Return an entry as the row that is stored."""
    return {
        column.name: entry.text if column.name == "content" else getattr(entry, column.name)
        for column in ledger_entry.c
    }


def _entry(row: Row[Any]) -> Entry:
    values = row._asdict()
    text = values.pop("content")
    return Entry(**values, content=_parsed(text), text=text)


def _parsed(text: str) -> dict[str, Any]:
    # A content that was tampered with may not be JSON; the hash then tells, not the parser.
    try:
        content = json.loads(text)
    except ValueError:
        return {}
    return content if isinstance(content, dict) else {}
