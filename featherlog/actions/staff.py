"""The staff list: who may sign what."""

from __future__ import annotations

from typing import TYPE_CHECKING

from featherlog import words
from featherlog.actions.desk import at_desk, signing_desk
from featherlog.actions.typed import required
from featherlog.errors import InputError, RefusedError
from featherlog.store import queries
from featherlog.store.entry import Kind

if TYPE_CHECKING:
    from featherlog.store.rows import StaffRow


def add_staff(database: str | None, *, name: str, role: str, by: str) -> None:
    """Put a person on the staff list.

    The first person must be an administrator and adds themselves; after that an administrator adds
    everyone else.

    Raises:
        InputError: the role is not one, the name is empty or taken.
        RefusedError: whoever adds is not an administrator.
    """
    if role not in words.ROLES:
        raise InputError(f"--role is {role!r}, but must be one of {', '.join(words.ROLES)}")
    name = required("NAME", name, "who it is")
    with signing_desk(database) as desk:
        known = queries.staff(desk.connection)
        # One person under two spellings could perform and verify alone.
        if taken := [p.name for p in known if _alike(p.name) == _alike(name)]:
            raise InputError(f"{taken[0]!r} is on the staff list already")
        if known:
            own_role = desk.role_of(by, "add staff", words.ADMINISTRATOR)
        elif role != words.ADMINISTRATOR or by != name:
            raise RefusedError(
                "the staff list is empty: its first person is an administrator who adds themselves "
                "(--role administrator, --by with their own name)"
            )
        else:
            own_role = role
        desk.append(
            Kind.STAFF_ADDED,
            {"name": name, "role": role},
            who=by,
            role=own_role,
            meaning=f"I put {name} on the staff list as {role}",
        )


def _alike(name: str) -> list[str]:
    return name.casefold().split()


def list_staff(database: str | None) -> tuple[StaffRow, ...]:
    """Return everyone on the staff list, by name."""
    with at_desk(database) as desk:
        return queries.staff(desk.connection)
