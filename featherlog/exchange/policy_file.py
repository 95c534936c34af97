"""Reading a policy file: what a department decided, ``featherlog policy 1``."""

from __future__ import annotations

from typing import TYPE_CHECKING
from zoneinfo import ZoneInfo

from featherlog.exchange.kinds import Kind, choice, flag, number, several, text
from featherlog.exchange.toml_fields import Fault, Reading, Table
from featherlog.exchange.toml_text import read_text
from featherlog.policy import (
    STAFF_ACTS,
    Act,
    Contacts,
    Policy,
    ReadBackItem,
    ReportingThresholds,
)

if TYPE_CHECKING:
    from collections.abc import Iterator
    from pathlib import Path

FORMAT = "featherlog policy 1"

_CONTACT = text(120)
_PERCENT = number("percent", 0, 1000, low_open=True)


def read_policy(path: Path) -> Policy:
    """Read a policy file.

    Raises:
        NotFoundError: where there is no such file.
        InputError: naming every fault of the file, each with its line and what is allowed.
    """
    return parse_policy(read_text(path), path.name)


def parse_policy(written: str, name: str) -> Policy:
    """Read a policy from the text of a file called ``name``; errors as ``read_policy``."""
    reading = Reading(written, name)
    reading.require_format(FORMAT)
    policy = _policy(reading.root)
    reading.finish()
    reading.check(_rules(policy))
    return policy


def _policy(root: Table) -> Policy:
    contacts = root.table("contacts")
    return Policy(
        department=root.take("department", text()),
        time_zone=root.take("time_zone", _TIME_ZONE),
        contacts=Contacts(
            physicist=contacts.take("physicist", _CONTACT),
            physician=contacts.take("physician", _CONTACT),
        ),
        two_people=root.take("two_people", several(choice(Act))),
        minimum_interval_hours=root.take("minimum_interval_hours", number("hours", 0, 24)),
        read_back_on_shift_days=root.take(
            "read_back_on_shift_days", several(choice(ReadBackItem), at_least=1)
        ),
        reporting_thresholds=_thresholds(root.table_or_none("reporting_thresholds")),
        physics_presence_at_shifts=root.take("physics_presence_at_shifts", flag()),
    )


def _thresholds(table: Table | None) -> ReportingThresholds:
    if table is None:
        return ReportingThresholds(None, None, None)
    return ReportingThresholds(
        total_percent=table.take_or("total_percent", _PERCENT, None),
        fraction_percent=table.take_or("fraction_percent", _PERCENT, None),
        weekly_percent=table.take_or("weekly_percent", _PERCENT, None),
    )


def _known_zone(raw: object) -> str | None:
    if not isinstance(raw, str) or not raw:
        return None
    try:
        ZoneInfo(raw)
    except (ValueError, OSError, LookupError):
        return None
    return raw


_TIME_ZONE = Kind('the IANA name of a time zone, like "Europe/Berlin"', _known_zone, "UTC")


def _rules(policy: Policy) -> Iterator[Fault]:
    for act in policy.two_people:
        if act in STAFF_ACTS:
            yield ("two_people",), f'has "{act}", which has a rule of its own'
    if ReadBackItem.POSITION not in policy.read_back_on_shift_days:
        yield ("read_back_on_shift_days",), 'lacks "position", which is always read back'
