"""A small department whose every entry is signed, told straight to the ledger."""

from __future__ import annotations

from dataclasses import dataclass, field, replace
from functools import partial
from typing import TYPE_CHECKING, Any

import msgspec
import store_scenario as scenario

from featherlog.signing.keys import WrappedKey, new_key, sign, unwrap
from featherlog.signing.passphrases import PRACTICE
from featherlog.store.engine import open_engine, writing
from featherlog.store.entry import Draft, Entry, Kind, Signatory
from featherlog.store.ledger import append

if TYPE_CHECKING:
    from collections.abc import Iterable

PASSPHRASE = "every bird sings alike"  # noqa: S105 - of nobody
HERON, FINCH, WREN = "Hazel Heron", "Rowan Finch", "Linden Wren"
CRANE, PLOVER, TEAL = "Aspen Crane", "Ash Plover", "Maple Teal"
ROLES = {
    HERON: "administrator",
    FINCH: "physicist",
    WREN: "physicist",
    CRANE: "physician",
    PLOVER: "therapist",
    TEAL: "therapist",
}


@dataclass(frozen=True)
class Person:
    """Somebody with a key, open."""

    name: str
    role: str
    key: WrappedKey = field(default_factory=lambda: new_key(PASSPHRASE, PRACTICE))

    @property
    def pen(self) -> Signatory:
        private = unwrap(self.key, PASSPHRASE)
        assert private is not None
        return Signatory(self.name, self.role, private.public, partial(sign, private))

    @property
    def content(self) -> dict[str, Any]:
        return {"name": self.name, "key": msgspec.to_builtins(self.key)}


@dataclass(frozen=True)
class Told:
    """A draft and those who sign it."""

    draft: Draft
    signers: tuple[Person, ...]


def told(draft: Draft, *signers: Person) -> Told:
    """Let an entry be made by the first who signs it."""
    first = signers[0]
    treats = draft.kind in (Kind.FRACTION_CONFIRMED, Kind.FRACTION_RECORDED)
    people = {"performer": first.name, "verifier": signers[-1].name} if treats else {}
    content = draft.content | people
    return Told(replace(draft, who=first.name, role=first.role, content=content), signers)


def everyone() -> dict[str, Person]:
    return {name: Person(name, role) for name, role in ROLES.items()}


def joins(newcomer: Person, *others: Person) -> Told:
    content = newcomer.content | {"role": newcomer.role}
    return told(scenario.draft(Kind.STAFF_ADDED, content, course=None), *others, newcomer)


def opening(people: dict[str, Person]) -> list[Told]:
    """Put everyone on the staff list, the administrator first."""
    first, *others = people.values()
    return [joins(first), *(joins(one, first) for one in others)]


def course(people: dict[str, Person]) -> list[Told]:
    """Tell a course from its design to the reason for a departure."""
    finch, wren, crane, plover, teal = (people[name] for name in (FINCH, WREN, CRANE, PLOVER, TEAL))
    return [
        told(scenario.prepared(), finch),
        told(scenario.checked(), wren),
        told(scenario.approved(), crane, wren),
        told(scenario.confirmed(), plover, teal),
        told(scenario.recorded(reasons=("",)), plover, teal),
        told(scenario.explained(), finch),
    ]


def tell(url: str, story: Iterable[Told]) -> list[Entry]:
    with writing(open_engine(url)) as connection:
        return [
            append(connection, one.draft, tuple(person.pen for person in one.signers))
            for one in story
        ]
