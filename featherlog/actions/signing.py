"""Who signs: named, allowed to, and shown to be that person by their passphrase.

Passphrases are looked at before the write transaction begins, for opening a key takes long on
purpose and nobody else could write meanwhile. The staff list is then compared once more.
"""

from __future__ import annotations

from contextlib import contextmanager
from dataclasses import dataclass, replace
from functools import partial
from time import sleep
from typing import TYPE_CHECKING

import msgspec

from featherlog.actions.desk import Desk, Signer, at_desk, writing_desk
from featherlog.errors import NotFoundError, RefusedError
from featherlog.policy import MAY, Act, needs_two
from featherlog.signing.keys import PrivateKey, WrappedKey, new_key, sign, unwrap
from featherlog.signing.passphrases import PRACTICE, STRONG, wait_s
from featherlog.store import ledger, queries
from featherlog.store.entry import Draft, Kind, Signatory

if TYPE_CHECKING:
    from collections.abc import Iterator

    from featherlog.store.rows import StaffKeyRow, StaffRow


@dataclass(frozen=True, slots=True)
class Unlocked:
    """People whose keys are open, for one act."""

    act: Act
    roles: tuple[str, ...]
    signers: tuple[Signer, ...]
    people: tuple[tuple[StaffRow, StaffKeyRow], ...]
    signatories: tuple[Signatory, ...]


@contextmanager
def signing_desk(
    database: str | None, act: Act, by: Signer, verified_by: Signer | None = None
) -> Iterator[Desk]:
    """Give a desk that writes in the name of one person, or of two: all it does is one transaction.

    Raises:
        NotFoundError: somebody named is not on the staff list.
        RefusedError: their role does not allow it, both are one person, the policy asks for a
            second, or a passphrase is wrong, which is then on record.
    """
    with desk_of(database, unlock(database, act, by, verified_by)) as desk:
        yield desk


def unlock(
    database: str | None,
    act: Act,
    by: Signer,
    verified_by: Signer | None = None,
    roles: tuple[str, ...] | None = None,
) -> Unlocked:
    """Open the keys of those who act, after looking whether they may; errors as ``signing_desk``.

    ``roles`` are those allowed, where they are not the act's own.
    """
    signers = (by,) if verified_by is None else (by, verified_by)
    roles = roles or MAY[act]
    with at_desk(database) as desk:
        people = _people(desk, act, roles, signers)
    signatories = tuple(
        _opened(database, act, signer, *person)
        for signer, person in zip(signers, people, strict=True)
    )
    return Unlocked(act, roles, signers, people, signatories)


@contextmanager
def desk_of(database: str | None, unlocked: Unlocked) -> Iterator[Desk]:
    """Give a desk that writes in the name of people whose keys are open."""
    with writing_desk(database) as desk:
        if _people(desk, unlocked.act, unlocked.roles, unlocked.signers) != unlocked.people:
            raise RefusedError("the staff list changed at this moment; try again")
        yield replace(desk, signatories=unlocked.signatories)


def signatory(name: str, role: str, private: PrivateKey) -> Signatory:
    """Return somebody who signs with an open key."""
    return Signatory(name, role, private.public, partial(sign, private))


def new_signatory(database: str | None, owner: Signer, role: str) -> tuple[WrappedKey, Signatory]:
    """Make a person's new key from a passphrase they choose, and return it open as well."""
    with at_desk(database) as desk:
        cost = PRACTICE if desk.demo else STRONG
    passphrase = owner.passphrase()
    key = new_key(passphrase, cost)
    private = unwrap(key, passphrase)
    if private is None:
        raise RuntimeError("a key that was just locked does not open")
    return key, signatory(owner.name, role, private)


def known_person(desk: Desk, name: str) -> StaffRow:
    """Return somebody who is on the staff list now.

    Raises NotFoundError for a stranger, RefusedError for somebody who has left.
    """
    person = queries.person(desk.connection, name)
    if person is None:
        raise NotFoundError(
            f"nobody called {name!r} is on the staff list; see `featherlog staff list`"
        )
    if person.left_entry is not None:
        raise RefusedError(f"{name} has left the department and can no longer sign")
    return person


def _people(
    desk: Desk, act: Act, roles: tuple[str, ...], signers: tuple[Signer, ...]
) -> tuple[tuple[StaffRow, StaffKeyRow], ...]:
    first, *second = signers
    people = [_person(desk, first.name, act, roles)]
    people += [_person(desk, one.name, f"verify that ({act})", roles) for one in second]
    if second and first.name == second[0].name:
        raise RefusedError(f"{first.name} cannot {act} and verify it; a second person must verify")
    if not second and needs_two(desk.policy, act):
        raise RefusedError(
            f"two people must sign to {act}, as the department's policy says; name the second with "
            "--with"
        )
    return tuple(people)


def _person(
    desk: Desk, name: str, act: str, roles: tuple[str, ...]
) -> tuple[StaffRow, StaffKeyRow]:
    person = known_person(desk, name)
    if person.role not in roles:
        raise RefusedError(
            f"{name} has the role {person.role} and may not {act}; allowed: {' or '.join(roles)}"
        )
    key = queries.present_key(desk.connection, name)
    if key is None:
        raise RefusedError(
            f"{name} has no key to sign with yet; an administrator gives one with "
            "`featherlog staff replace-key`"
        )
    return person, key


def _opened(
    database: str | None, act: Act, signer: Signer, person: StaffRow, key: StaffKeyRow
) -> Signatory:
    passphrase = signer.passphrase()
    with at_desk(database) as desk:
        failures = queries.failed_signings(desk.connection, signer.name)
    sleep(wait_s(failures))
    private = unwrap(msgspec.json.decode(key.wrapped, type=WrappedKey), passphrase)
    if private is None:
        _note_failure(database, act, person)
        raise RefusedError(
            f"that is not the passphrase of {person.name}: nothing was signed, and the attempt is "
            f"on record; the next answer takes {wait_s(failures + 1)} s longer, and another person "
            "can sign meanwhile"
        )
    return signatory(person.name, person.role, private)


def _note_failure(database: str | None, act: Act, person: StaffRow) -> None:
    with writing_desk(database) as desk:
        draft = Draft(
            course=None,
            kind=Kind.SIGNING_FAILED,
            who=person.name,
            role=person.role,
            meaning="Somebody gave this name and a passphrase that is not its own",
            at=desk.stamp,
            content={"name": person.name, "act": str(act)},
        )
        ledger.append(desk.connection, draft)
