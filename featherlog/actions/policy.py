"""The department's policy: set by version, in force until the next."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import msgspec

from featherlog.actions.desk import at_desk
from featherlog.actions.signing import signing_desk
from featherlog.actions.typed import printable_everywhere
from featherlog.exchange.policy_file import read_policy
from featherlog.policy import Act, Policy
from featherlog.store import queries
from featherlog.store.entry import Kind

if TYPE_CHECKING:
    from pathlib import Path

    from featherlog.actions.desk import Signer


@dataclass(frozen=True, slots=True)
class PolicyView:
    """The policy in force; version 0 is the built-in one, before a department set its own."""

    version: int
    entry: int | None
    policy: Policy


def set_policy(
    database: str | None, file: Path, *, by: Signer, verified_by: Signer | None = None
) -> int:
    """Put a policy file in force; return its version.

    Raises InputError for a faulty file and RefusedError unless the right people do it.
    """
    policy = read_policy(file)
    content = msgspec.to_builtins(policy)
    printable_everywhere(content)
    with signing_desk(database, Act.SET_POLICY, by, verified_by) as desk:
        row = queries.policy(desk.connection)
        version = row.version + 1 if row else 1
        desk.append(
            Kind.POLICY_SET,
            {"version": version, "policy": content},
            meaning=f"I set the department's policy, version {version}",
        )
    return version


def show_policy(database: str | None) -> PolicyView:
    """Return the policy in force."""
    with at_desk(database) as desk:
        row = queries.policy(desk.connection)
        version, entry = (row.version, row.entry) if row else (0, None)
        return PolicyView(version, entry, desk.policy)
