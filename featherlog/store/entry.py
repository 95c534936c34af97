"""What the ledger is made of: drafts, entries, their kinds, and the text their hash is taken of."""

from __future__ import annotations

from dataclasses import asdict, dataclass
from enum import StrEnum
from hashlib import sha256
from typing import Any

import rfc8785

FIRST_HASH = "0" * 64
"""What the first entry names as the hash before it."""


class Kind(StrEnum):
    """What an entry tells of."""

    STAFF_ADDED = "staff added"
    MACHINE_ADDED = "machine added"
    DESIGN_PREPARED = "design prepared"
    DESIGN_CHECKED = "design checked"
    DESIGN_APPROVED = "design approved"
    DESIGN_RETURNED = "design returned"
    FRACTION_CONFIRMED = "fraction confirmed"
    FRACTION_RECORDED = "fraction recorded"
    DEPARTURE_EXPLAINED = "departure explained"


@dataclass(frozen=True, slots=True)
class Draft:
    """What an action wants to say.

    ``course`` is None for entries about the department. ``meaning`` is what the signature stands
    for, ``at`` the time with offset (ISO 8601), ``content`` plain builtins.
    """

    course: str | None
    kind: str
    who: str
    role: str
    meaning: str
    at: str
    content: dict[str, Any]


@dataclass(frozen=True, slots=True)
class Entry:
    """One line of the ledger; ``text`` is the content as canonical JSON, as it is stored."""

    number: int
    course: str | None
    kind: str
    who: str
    role: str
    meaning: str
    at: str
    content: dict[str, Any]
    text: str
    previous_hash: str
    hash: str


def canonical(value: object) -> str:
    """Return ``value`` as canonical JSON (RFC 8785): one text for one meaning."""
    return rfc8785.dumps(value).decode()  # type: ignore[arg-type]  # any builtins are tried


def fingerprint(value: object) -> str:
    """Return the SHA-256 of the canonical JSON of ``value``, 64 hexadecimal digits."""
    return sha256(canonical(value).encode()).hexdigest()


def content_hash(design: object, plan: object, machine: object) -> str:
    """Return the hash that identifies what a revision says: its design, plan and machine."""
    return fingerprint({"design": design, "plan": plan, "machine": machine})


def hash_of(entry: Entry) -> str:
    """Return the hash that ``entry`` should bear: over every field but the hash itself."""
    fields = asdict(entry) | {"content": entry.text}
    del fields["text"], fields["hash"]
    return fingerprint(fields)
