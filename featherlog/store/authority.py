"""Who has to sign an entry of each kind, told from the entries before it alone.

``People`` is folded over the ledger from its first entry. It knows what the program knew when each
entry was written: who was on the staff list in which role, with which key, under which policy.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any

import msgspec

from featherlog.policy import DEFAULT_POLICY, MAY, Act, Policy, needs_two
from featherlog.store.entry import Kind
from featherlog.words import ADMINISTRATOR

if TYPE_CHECKING:
    from collections.abc import Iterator

    from featherlog.store.entry import Entry, Signature

ACTS: dict[str, Act] = {
    Kind.STAFF_ADDED: Act.ADD_STAFF,
    Kind.KEY_REPLACED: Act.REPLACE_KEY,
    Kind.STAFF_LEFT: Act.REMOVE_STAFF,
    Kind.ADMINISTRATOR_RESTORED: Act.RESTORE_ADMINISTRATOR,
    Kind.POLICY_SET: Act.SET_POLICY,
    Kind.MACHINE_ADDED: Act.ADD_MACHINE,
    Kind.DESIGN_PREPARED: Act.PREPARE,
    Kind.DESIGN_CHECKED: Act.CHECK,
    Kind.DESIGN_APPROVED: Act.APPROVE,
    Kind.DESIGN_RETURNED: Act.RETURN,
    Kind.FRACTION_CONFIRMED: Act.CONFIRM,
    Kind.FRACTION_RECORDED: Act.RECORD,
    Kind.DEPARTURE_EXPLAINED: Act.EXPLAIN,
    Kind.RECORD_CORRECTED: Act.CORRECT,
    Kind.FRACTION_MISSED: Act.NOTE,
    Kind.COURSE_PAUSED: Act.PAUSE,
    Kind.COURSE_RELEASED: Act.RELEASE,
    Kind.COURSE_ENDED: Act.END,
    Kind.MACHINE_CHANGED: Act.CHANGE_MACHINE,
    Kind.TABLE_READ: Act.READ_TABLE,
    Kind.IMAGE_SHIFT: Act.NOTE,
    Kind.MARKS_REDRAWN: Act.NOTE,
    Kind.IMAGER_OUT: Act.NOTE,
    Kind.IMAGER_BACK: Act.NOTE,
    Kind.PHYSICS_PRESENT: Act.ATTEND,
    Kind.POSITION_CHECKED: Act.CHECK_POSITION,
    Kind.DEPARTURE_DECIDED: Act.DECIDE,
    Kind.REVIEW_SIGNED: Act.REVIEW,
}
"""What a person does when an entry of each kind is made."""

UNSIGNED = (Kind.SIGNING_FAILED,)
"""Kinds that nobody can sign."""

_WITH_NEW_KEY = (Kind.STAFF_ADDED, Kind.KEY_REPLACED, Kind.ADMINISTRATOR_RESTORED)
_TREATMENT = (Kind.FRACTION_CONFIRMED, Kind.FRACTION_RECORDED, Kind.RECORD_CORRECTED)


@dataclass(frozen=True, slots=True)
class _Person:
    role: str
    key: str | None


@dataclass(slots=True)
class People:
    """Who may sign after the entries seen so far."""

    policy: Policy = DEFAULT_POLICY
    keys_exist: bool = False
    _known: dict[str, _Person] = field(default_factory=dict)

    def fault(self, entry: Entry, signatures: tuple[Signature, ...]) -> str | None:
        """Return what is wrong with who signed an entry; None where nothing is."""
        if entry.kind in UNSIGNED or not (self.keys_exist or "key" in entry.content):
            return "it bears a signature, where none could be made" if signatures else None
        return next(self._faults(entry, signatures), None)

    def see(self, entry: Entry) -> None:
        """Take in what an entry changes, once it was found to be right."""
        content = entry.content
        if entry.kind == Kind.POLICY_SET:
            self.policy = msgspec.convert(content["policy"], Policy)
        if entry.kind == Kind.STAFF_LEFT:
            del self._known[content["name"]]
        if entry.kind in _WITH_NEW_KEY:
            name = content["name"]
            key = content["key"]["public"] if "key" in content else None
            self._known[name] = _Person(self._role_after(entry), key)
            self.keys_exist = self.keys_exist or key is not None

    def _faults(self, entry: Entry, signatures: tuple[Signature, ...]) -> Iterator[str]:
        if not signatures:
            yield "it is not signed"
            return
        # A new key vouches for itself, last, and for nobody else.
        owners = signatures[-1:] if entry.kind in _WITH_NEW_KEY else ()
        for signature in signatures[: len(signatures) - len(owners)]:
            yield from self._signatory_faults(signature)
        first = signatures[0]
        if (first.who, first.role) != (entry.who, entry.role):
            yield f"it is made by {entry.who} ({entry.role}), but signed by {first.who} first"
        if entry.kind in _WITH_NEW_KEY:
            yield from self._new_key_faults(entry, signatures)
        else:
            yield from self._act_faults(ACTS[entry.kind], signatures)
        if entry.kind in _TREATMENT:
            yield from _treatment_faults(entry.content, signatures)

    def _signatory_faults(self, signature: Signature) -> Iterator[str]:
        if self._known.get(signature.who) != _Person(signature.role, signature.key):
            yield f"{signature.who} had another key or role than it is signed with"

    def _act_faults(self, act: Act, signatures: tuple[Signature, ...]) -> Iterator[str]:
        for signature in signatures:
            if signature.role not in MAY[act]:
                yield f"{signature.who} has the role {signature.role} and may not {act}"
        yield from self._number_faults(act, signatures)

    def _number_faults(self, act: Act, signatures: tuple[Signature, ...]) -> Iterator[str]:
        if len({signature.who for signature in signatures}) < len(signatures):
            yield "one person signed twice"
        needed = 1 + needs_two(self.policy, act)
        if len(signatures) < needed:
            people = "two people" if needed > 1 else f"one person who is {' or '.join(MAY[act])}"
            yield f"{people} must sign to {act}"

    def _new_key_faults(self, entry: Entry, signatures: tuple[Signature, ...]) -> Iterator[str]:
        """The new key signs last, which shows that its owner can open it."""
        *others, owner = signatures
        content = entry.content
        expected = (content["name"], self._role_after(entry), content["key"]["public"])
        if (owner.who, owner.role, owner.key) != expected:
            yield f"the new key of {content['name']} did not sign it"
        if not self.keys_exist:
            if content["name"] != entry.who or self._role_after(entry) != ADMINISTRATOR:
                yield "the first key must be an administrator's own"
        elif entry.kind == Kind.ADMINISTRATOR_RESTORED:
            yield from self._restoring_faults(content["name"], others)
        elif not _own_replacement(entry, others):
            yield from self._act_faults(ACTS[entry.kind], tuple(others))

    def _restoring_faults(self, name: str, others: list[Signature]) -> Iterator[str]:
        yield from self._number_faults(Act.RESTORE_ADMINISTRATOR, tuple(others))
        if len({signature.role for signature in others}) < len(others):
            yield "the two who restore an administrator must have different roles"
        if name in {signature.who for signature in others}:
            yield f"{name} cannot restore themselves"

    def _role_after(self, entry: Entry) -> str:
        if "role" in entry.content:
            return str(entry.content["role"])
        return self._known[entry.content["name"]].role


def _own_replacement(entry: Entry, others: list[Signature]) -> bool:
    """Tell whether a person changed their own key, which they opened with the old passphrase."""
    name = entry.content["name"]
    return entry.kind == Kind.KEY_REPLACED and [one.who for one in others] == [name]


def _treatment_faults(content: dict[str, Any], signatures: tuple[Signature, ...]) -> Iterator[str]:
    signed = tuple(signature.who for signature in signatures)
    if signed != (content["performer"], content["verifier"]):
        yield "performer and verifier are not the two who signed it"
