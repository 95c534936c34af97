"""How long a full verify takes beside the least it could: hashes and signatures of the same bytes.

In the processor's time, so that others who use the computer change little; printed, never asserted.
What verify does besides: it reads the ledger, follows who may sign what, makes every table anew and
compares it.
"""

from __future__ import annotations

import time
from base64 import b64decode
from datetime import date, timedelta
from hashlib import sha256
from statistics import median
from typing import TYPE_CHECKING, TypeAlias

import pytest
from cryptography.hazmat.primitives.asymmetric.ed25519 import Ed25519PublicKey
from department import add_course, build, treated

from featherlog.store.engine import open_engine, reading
from featherlog.store.entry import canonical, read_signatures, text_to_sign
from featherlog.store.ledger import entries, row_of
from featherlog.store.verify import verify

if TYPE_CHECKING:
    from pathlib import Path

    from featherlog.store.entry import Entry

Bare: TypeAlias = tuple[bytes, bytes, list[tuple[bytes, bytes]]]
"""The bytes of an entry, the text that was signed, and keys with signatures."""
GOAL = 3
RUNS = 5


def weekdays(count: int) -> list[str]:
    days = (date(2026, 3, 2) + timedelta(days=n) for n in range(2 * count))
    return [day.isoformat() for day in days if day.weekday() < 5][:count]


def bare(entry: Entry) -> Bare:
    signatures = read_signatures(entry.signatures) or ()
    return (
        canonical(row_of(entry)).encode(),
        text_to_sign(entry.hash).encode(),
        [(b64decode(one.key), b64decode(one.signature)) for one in signatures],
    )


def least(ledger: list[Bare]) -> float:
    """Return the seconds for one hash of every entry and one check of every signature."""
    start = time.process_time()
    for raw, text, signatures in ledger:
        sha256(raw).hexdigest()
        for key, signature in signatures:
            Ed25519PublicKey.from_public_bytes(key).verify(signature, text)
    return time.process_time() - start


def full(database: str) -> float:
    """Return the seconds that a verify of everything takes."""
    with reading(open_engine(database)) as connection:
        start = time.process_time()
        assert verify(connection).fault == ""
        return time.process_time() - start


@pytest.mark.parametrize(
    ("courses", "fractions"),
    [(1, 11), pytest.param(30, 30, marks=pytest.mark.long)],
    ids=["short", "long"],
)
def test_verify_beside_hashes_and_signatures(courses: int, fractions: int, tmp_path: Path) -> None:
    database = f"sqlite:///{tmp_path}/featherlog.db"
    build(database)
    for number in range(courses):
        add_course(database, f"FH-4{number:03}", fractions)
        for day in weekdays(fractions):
            treated(database, f"FH-4{number:03}", day)
    with reading(open_engine(database)) as connection:
        ledger = [bare(entry) for entry in entries(connection)]
    full(database)  # loads what is loaded once
    pairs = [(full(database), least(ledger)) for _ in range(RUNS)]
    one, other = (median(pair[side] for pair in pairs) for side in (0, 1))
    size = sum(len(raw) for raw, *_ in ledger)
    print(  # noqa: T201 - a benchmark prints its figures
        f"\nverify of {len(ledger)} entries ({size / 1e6:.1f} MB) took {1000 * one:.0f} ms of the "
        f"processor, {len(ledger) / one:.0f} entries/s; sha256 and signatures of the same alone "
        f"{1000 * other:.0f} ms; ratio {one / other:.2f} (goal: at most {GOAL})"
    )
