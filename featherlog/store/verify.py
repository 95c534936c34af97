"""The whole ledger looked at again, and what the projections should be: the first fault is named.

For each entry, in order: its place and hash in the chain, its signatures, who signed it, what it
follows. Then the projections are made anew in a scratch database, and compared.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from sqlalchemy import func, insert, select

from featherlog.errors import IntegrityError
from featherlog.signing.keys import verify as holds
from featherlog.store import projection
from featherlog.store.authority import ACTS, UNSIGNED, People
from featherlog.store.comparing import differences, scratch_database
from featherlog.store.entry import FIRST_HASH, Kind, read_signatures, signed_by, text_to_sign
from featherlog.store.ledger import chain_fault, entries, row_of
from featherlog.store.order import Courses
from featherlog.store.tables import ledger_entry

if TYPE_CHECKING:
    from collections.abc import Callable

    from sqlalchemy import Connection

    from featherlog.store.entry import Entry, Signature

# Kinds whose projectors read the ledger again: these alone are copied beside the projections.
_READ_AGAIN = frozenset({Kind.DESIGN_PREPARED})
_REPORT_EVERY = 1000


@dataclass(frozen=True, slots=True)
class Verified:
    """What a walk over the whole ledger found; ``fault`` is empty where everything fits.

    ``fault_entry`` is the number of the first entry that does not fit, None where there is none or
    where entries are missing at the end. ``signatures`` counts those that hold, ``unsigned`` the
    entries without any: wrong passphrases, and everything from before the first key.
    """

    entries: int
    signatures: int
    unsigned: int
    head: str
    fault_entry: int | None
    fault: str


@dataclass(frozen=True, slots=True)
class Head:
    """A head noted earlier, from a page or an export: a number and how the hash began."""

    number: int
    hash_start: str


def verify(
    connection: Connection,
    earlier: Head | None = None,
    progress: Callable[[int, int], None] = lambda _done, _total: None,
) -> Verified:
    """Look at every entry and every projection.

    Args:
        connection: from ``reading``, so that all of it is seen at one moment.
        earlier: a head that must be part of this ledger; tells a tail that was cut off.
        progress: called now and then with the entries done and the entries there are.
    """
    with scratch_database() as anew:
        walk = _Walk(anew, earlier)
        total = connection.execute(select(func.count()).select_from(ledger_entry)).scalar_one()
        for number, entry in enumerate(entries(connection), start=1):
            fault = walk.fault(entry, number)
            if fault is not None:
                return walk.found(number, fault)
            if number % _REPORT_EVERY == 0:
                progress(number, total)
        cut = walk.cut_tail()
        if cut is not None:
            return walk.found(None, cut)
        return walk.found(*min(differences(connection, anew), default=(None, "")))


class _Walk:
    """What is known after the entries walked over so far."""

    def __init__(self, anew: Connection, earlier: Head | None) -> None:
        self._anew = anew
        self._earlier = earlier
        self._people, self._courses = People(), Courses()
        self._number, self._hash = 0, FIRST_HASH
        self._signatures, self._unsigned = 0, 0

    def fault(self, entry: Entry, number: int) -> str | None:
        """Return what does not fit at this entry, or take it in and return None."""
        fault = chain_fault(entry, number, self._hash)
        if fault is None:
            try:
                fault = self._content_fault(entry)
            except (KeyError, TypeError, ValueError, AttributeError) as error:
                fault = f"its content is not what its kind holds ({type(error).__name__}: {error})"
            if fault is not None:
                fault = f"Ledger entry {number} ({entry.kind}, {entry.at}) does not fit: {fault}."
        if fault is None:
            self._number, self._hash = entry.number, entry.hash
        return fault

    def found(self, number: int | None, fault: str) -> Verified:
        """Return what the walk came to."""
        head = f"{self._number}:{self._hash}" if self._number else ""
        return Verified(self._number, self._signatures, self._unsigned, head, number, fault)

    def cut_tail(self) -> str | None:
        """Return what is missing against the earlier head once all entries were seen."""
        if self._earlier is None or self._earlier.number <= self._number:
            return None
        return (
            f"The ledger ends at entry {self._number}, but the earlier head is of entry "
            f"{self._earlier.number}: entries were cut off its end."
        )

    def _content_fault(self, entry: Entry) -> str | None:
        if entry.kind not in ACTS and entry.kind not in UNSIGNED:
            return "this program does not know its kind"
        signatures = read_signatures(entry.signatures)
        if signatures is None:
            return "its signatures cannot be read"
        fault = (
            self._head_fault(entry)
            or _signature_fault(entry, signatures)
            or self._people.fault(entry, signatures)
            or self._courses.fault(entry)
        )
        if fault is None:
            self._people.see(entry)
            self._courses.see(entry)
            self._signatures += len(signatures)
            self._unsigned += not signatures
            fault = self._project(entry)
        return fault

    def _head_fault(self, entry: Entry) -> str | None:
        earlier = self._earlier
        if earlier is None or earlier.number != entry.number:
            return None
        if entry.hash.startswith(earlier.hash_start):
            return None
        return "its hash is not the earlier head's, so it or an entry before it was written anew"

    def _project(self, entry: Entry) -> str | None:
        if entry.kind in _READ_AGAIN:
            self._anew.execute(insert(ledger_entry).values(row_of(entry)))
        try:
            projection.apply(self._anew, entry)
        except IntegrityError as error:
            return str(error).rstrip(".")
        return None


def _signature_fault(entry: Entry, signatures: tuple[Signature, ...]) -> str | None:
    if tuple(signature.who for signature in signatures) != signed_by(entry):
        return "its signatures are not those of the people whom it names"
    text = text_to_sign(entry.hash)
    for signature in signatures:
        if not holds(signature.key, text, signature.signature):
            return f"the signature of {signature.who} does not hold"
    return None
