"""What the ledger is made of: drafts, entries, their kinds, hashes and signatures."""

from __future__ import annotations

import json
from dataclasses import dataclass
from enum import StrEnum
from hashlib import sha256
from typing import TYPE_CHECKING, Any

import rfc8785

if TYPE_CHECKING:
    from collections.abc import Callable

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
    KEY_REPLACED = "key replaced"
    STAFF_LEFT = "staff left"
    ADMINISTRATOR_RESTORED = "administrator restored"
    SIGNING_FAILED = "signing failed"
    POLICY_SET = "policy set"
    RECORD_CORRECTED = "record corrected"
    FRACTION_MISSED = "fraction missed"
    COURSE_PAUSED = "course paused"
    COURSE_RELEASED = "course released"
    COURSE_ENDED = "course ended"
    MACHINE_CHANGED = "machine changed"
    TABLE_READ = "table read"
    IMAGE_SHIFT = "image shift"
    MARKS_REDRAWN = "marks redrawn"
    IMAGER_OUT = "imager out"
    IMAGER_BACK = "imager back"
    PHYSICS_PRESENT = "physics present"
    POSITION_CHECKED = "position checked"
    DEPARTURE_DECIDED = "departure decided"
    REVIEW_SIGNED = "review signed"


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
    signatures: str = "[]"


@dataclass(frozen=True, slots=True)
class Signature:
    """Who signed an entry in which role, with the public half of which key (base64)."""

    who: str
    role: str
    key: str
    signature: str


@dataclass(frozen=True, slots=True)
class Signatory:
    """A person who is about to sign: ``sign`` gives the signature of a text, base64."""

    who: str
    role: str
    key: str
    sign: Callable[[str], str]


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
    """Return the hash that ``entry`` should bear: over every field but hash and signatures."""
    fields = {name: getattr(entry, name) for name in _HASHED} | {"content": entry.text}
    try:
        return sha256(_flat(fields).encode()).hexdigest()
    except (TypeError, UnicodeError):
        return ""  # a damaged value that is no text has no hash, and so fits none


_HASHED = ("number", "course", "kind", "who", "role", "meaning", "at", "previous_hash")


def _flat(value: object) -> str:
    """Return ``canonical`` text, quicker: for texts and whole numbers alone, as a walk needs it."""
    return json.dumps(value, ensure_ascii=False, separators=(",", ":"), sort_keys=True)


def text_to_sign(entry_hash: str) -> str:
    """Return what a signature is made over: it can be taken for nothing but a ledger entry's."""
    return f"featherlog ledger entry 1\n{entry_hash}"


def sign_all(entry_hash: str, signatories: tuple[Signatory, ...]) -> str:
    """Return the signatures of everyone who signs, as they are stored: canonical JSON."""
    text = text_to_sign(entry_hash)
    return canonical(
        [
            {"who": one.who, "role": one.role, "key": one.key, "signature": one.sign(text)}
            for one in signatories
        ]
    )


def read_signatures(text: str) -> tuple[Signature, ...] | None:
    """Return stored signatures; None where the text is not as ``sign_all`` writes it."""
    try:
        found = json.loads(text)
        signatures = tuple(Signature(**one) for one in found)
    except (ValueError, TypeError):
        return None
    return signatures if isinstance(found, list) and _flat(found) == text else None


def signed_by(entry: Entry) -> tuple[str, ...]:
    """Return the people whose signatures the entry says it bears; its hash covers them."""
    return tuple(entry.content.get("signed_by", ()))
