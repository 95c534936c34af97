"""The staff list: who may sign what, with which key, and what to do when a passphrase is lost."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import msgspec

from featherlog import words
from featherlog.actions.desk import Desk, at_desk, writing_desk
from featherlog.actions.signing import desk_of, known_person, new_signatory, unlock
from featherlog.actions.typed import required
from featherlog.errors import InputError, RefusedError
from featherlog.policy import Act
from featherlog.store import queries
from featherlog.store.entry import Kind

if TYPE_CHECKING:
    from featherlog.actions.desk import Signer


@dataclass(frozen=True, slots=True)
class StaffLine:
    """One person in the list; ``key`` is the public half of their present key, empty without one.

    ``key_entry`` and ``left_entry`` are the ledger entries that made it known and that say they
    left.
    """

    name: str
    role: str
    entry: int
    key: str
    key_entry: int | None
    left_entry: int | None


def add_staff(database: str | None, *, newcomer: Signer, role: str, by: Signer) -> None:
    """Put a person on the staff list, with a key that a passphrase of their own opens.

    The first person must be an administrator and adds themselves; after that an administrator adds
    everyone else. Both sign.

    Raises:
        InputError: the role is not one, the name is empty or taken, the passphrase too short.
        RefusedError: whoever adds is not an administrator.
    """
    if role not in words.ROLES:
        raise InputError(f"--role is {role!r}, but must be one of {', '.join(words.ROLES)}")
    name = required("NAME", newcomer.name, "who it is")
    newcomer = replace(newcomer, name=name)
    with at_desk(database) as desk:
        first = _is_first(desk, name, role, by.name)
    unlocked = None if first else unlock(database, Act.ADD_STAFF, by)
    key, owner = new_signatory(database, newcomer, role)
    with desk_of(database, unlocked) if unlocked else writing_desk(database) as desk:
        # Once more: somebody else may have been added since.
        _is_first(desk, name, role, by.name)
        desk.append(
            Kind.STAFF_ADDED,
            {"name": name, "role": role, "key": msgspec.to_builtins(key)},
            meaning=f"I put {name} on the staff list as {role}",
            also=(owner,),
        )


def replace_key(database: str | None, *, owner: Signer, reason: str, by: Signer) -> None:
    """Give a person a new key, which a new passphrase opens; the reason stays on record.

    Their own doing while they know the old passphrase, else an administrator's. The old key stays
    good for what it signed. In a database from before there were keys, an administrator's own key
    comes first.

    Raises:
        InputError: no reason, or the passphrase is too short.
        NotFoundError: there is no such person.
        RefusedError: whoever does it is neither an administrator nor the key's owner.
    """
    reason = required("--reason", reason, "why the key is replaced")
    with at_desk(database) as desk:
        person = known_person(desk, owner.name)
        first = _is_first_key(desk, person.role, owner.name, by.name)
    own = owner.name == by.name
    roles = words.ROLES if own else None
    unlocked = None if first else unlock(database, Act.REPLACE_KEY, by, roles=roles)
    key, signatory = new_signatory(database, owner, person.role)
    with desk_of(database, unlocked) if unlocked else writing_desk(database) as desk:
        if known_person(desk, owner.name) != person:
            raise RefusedError("the staff list changed at this moment; try again")
        _is_first_key(desk, person.role, owner.name, by.name)
        desk.append(
            Kind.KEY_REPLACED,
            {"name": owner.name, "key": msgspec.to_builtins(key), "reason": reason},
            meaning=f"I replace the key of {owner.name}",
            also=(signatory,),
        )


def remove_staff(database: str | None, *, name: str, reason: str, by: Signer) -> None:
    """Say that a person has left: they can no longer sign, and what they signed stays.

    Raises:
        InputError: no reason.
        NotFoundError: there is no such person.
        RefusedError: whoever does it is not an administrator, or it is the last one who goes.
    """
    reason = required("--reason", reason, "why the person leaves the list")
    with desk_of(database, unlock(database, Act.REMOVE_STAFF, by)) as desk:
        person = known_person(desk, name)
        if person.role == words.ADMINISTRATOR and len(_administrators(desk)) == 1:
            raise RefusedError(f"{name} is the last administrator; add another one first")
        desk.append(
            Kind.STAFF_LEFT,
            {"name": name, "reason": reason},
            meaning=f"I take {name} off the staff list",
        )


def restore_administrator(
    database: str | None, *, owner: Signer, reason: str, by: Signer, verified_by: Signer
) -> None:
    """Make a person administrator with a new key, where no administrator can sign any more.

    Two other people of different roles sign, and the new administrator with them.

    Raises:
        InputError: no reason, no name, or the passphrase is too short.
        RefusedError: the two have one role, or one of them would become administrator.
    """
    reason = required("--reason", reason, "why the administrator is restored")
    name = required("NAME", owner.name, "who it is")
    owner = replace(owner, name=name)
    if name in (by.name, verified_by.name):
        raise RefusedError(f"{name} cannot restore themselves; two others must sign")
    with at_desk(database) as desk:
        _spelled_as_listed(desk, name)
        roles = [known_person(desk, signer.name).role for signer in (by, verified_by)]
    if by.name != verified_by.name and roles[0] == roles[1]:
        raise RefusedError(
            f"{by.name} and {verified_by.name} are both {roles[0]}; two people of different roles "
            "must sign"
        )
    unlocked = unlock(database, Act.RESTORE_ADMINISTRATOR, by, verified_by)
    key, signatory = new_signatory(database, owner, words.ADMINISTRATOR)
    with desk_of(database, unlocked) as desk:
        _spelled_as_listed(desk, name)
        desk.append(
            Kind.ADMINISTRATOR_RESTORED,
            {
                "name": name,
                "role": words.ADMINISTRATOR,
                "key": msgspec.to_builtins(key),
                "reason": reason,
            },
            meaning=f"We make {name} administrator, for no administrator can sign",
            also=(signatory,),
        )


def list_staff(database: str | None) -> tuple[StaffLine, ...]:
    """Return everyone who is or was on the staff list, by name."""
    with at_desk(database) as desk:
        keys = {
            key.name: key for key in queries.staff_keys(desk.connection) if key.to_entry is None
        }
        return tuple(
            StaffLine(
                name=row.name,
                role=row.role,
                entry=row.entry,
                key=keys[row.name].public if row.name in keys else "",
                key_entry=keys[row.name].from_entry if row.name in keys else None,
                left_entry=row.left_entry,
            )
            for row in queries.staff(desk.connection)
        )


def _is_first(desk: Desk, name: str, role: str, by: str) -> bool:
    """Tell whether the list is empty, having looked whether this person may be added now."""
    _spelled_as_listed(desk, name)
    listed = queries.person(desk.connection, name)
    if listed is not None and listed.left_entry is None:
        raise InputError(f"{name!r} is on the staff list already")
    if queries.staff(desk.connection):
        return False
    if role != words.ADMINISTRATOR or by != name:
        raise RefusedError(
            "the staff list is empty: its first person is an administrator who adds themselves "
            "(--role administrator, --by with their own name)"
        )
    return True


def _is_first_key(desk: Desk, role: str, name: str, by: str) -> bool:
    if queries.staff_keys(desk.connection):
        return False
    if role != words.ADMINISTRATOR or by != name:
        raise RefusedError(
            "nobody has a key yet: an administrator gives themselves the first one (NAME and --by "
            "with their own name)"
        )
    return True


def _spelled_as_listed(desk: Desk, name: str) -> None:
    # One person under two spellings could perform and verify alone.
    for row in queries.staff(desk.connection):
        if _alike(row.name) == _alike(name) and row.name != name:
            raise InputError(f"{row.name!r} is on the staff list already")


def _alike(name: str) -> list[str]:
    return name.casefold().split()


def _administrators(desk: Desk) -> list[str]:
    return [
        row.name
        for row in queries.staff(desk.connection)
        if row.role == words.ADMINISTRATOR and row.left_entry is None
    ]
