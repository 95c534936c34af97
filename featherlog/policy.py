"""What people do here, which roles may do it, and what a department may decide about it."""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum

from featherlog.words import ADMINISTRATOR, PHYSICIAN, PHYSICIST, ROLES, THERAPIST


class Act(StrEnum):
    """One thing a person signs, in the words of every message about it."""

    ADD_STAFF = "add staff"
    REPLACE_KEY = "replace a key"
    REMOVE_STAFF = "take a person off the staff list"
    RESTORE_ADMINISTRATOR = "restore an administrator"
    SET_POLICY = "set the policy"
    ADD_MACHINE = "add a machine"
    PREPARE = "prepare a design"
    CHECK = "check a design"
    APPROVE = "approve a design"
    RETURN = "return a design"
    CONFIRM = "confirm a fraction"
    RECORD = "record a fraction"
    EXPLAIN = "explain a departure"
    CORRECT = "correct a record"
    NOTE = "note an event"
    PAUSE = "pause a course"
    RELEASE = "release a pause"
    END = "end a course"
    CHANGE_MACHINE = "change the machine"
    READ_TABLE = "read the table"
    ATTEND = "attest physics presence"
    CHECK_POSITION = "check a new position"
    DECIDE = "decide on a departure"
    REVIEW = "sign a review"


_TREATING = (THERAPIST, PHYSICIST, PHYSICIAN)

MAY: dict[Act, tuple[str, ...]] = {
    Act.ADD_STAFF: (ADMINISTRATOR,),
    Act.REPLACE_KEY: (ADMINISTRATOR,),
    Act.REMOVE_STAFF: (ADMINISTRATOR,),
    Act.RESTORE_ADMINISTRATOR: ROLES,
    Act.SET_POLICY: (PHYSICIST, ADMINISTRATOR),
    Act.ADD_MACHINE: (PHYSICIST,),
    Act.PREPARE: (PHYSICIST,),
    Act.CHECK: (PHYSICIST,),
    Act.APPROVE: (PHYSICIST, PHYSICIAN),
    Act.RETURN: (PHYSICIST, PHYSICIAN),
    Act.CONFIRM: _TREATING,
    Act.RECORD: _TREATING,
    Act.EXPLAIN: _TREATING,
    Act.CORRECT: _TREATING,
    Act.NOTE: _TREATING,
    Act.PAUSE: _TREATING,
    Act.RELEASE: (PHYSICIST, PHYSICIAN),
    Act.END: (PHYSICIAN,),
    Act.CHANGE_MACHINE: (PHYSICIST,),
    Act.READ_TABLE: _TREATING,
    Act.ATTEND: (PHYSICIST,),
    Act.CHECK_POSITION: (PHYSICIST,),
    Act.DECIDE: (PHYSICIST, PHYSICIAN),
    Act.REVIEW: _TREATING,
}
"""The roles that may do each act. Everyone may replace their own key while they can open it."""

ALWAYS_TWO = (
    Act.CONFIRM,
    Act.RECORD,
    Act.CORRECT,
    Act.READ_TABLE,
    Act.RESTORE_ADMINISTRATOR,
)
"""Acts that no policy leaves to one person."""

STAFF_ACTS = (Act.ADD_STAFF, Act.REPLACE_KEY, Act.REMOVE_STAFF, Act.RESTORE_ADMINISTRATOR)
"""Acts whose signers no policy decides about: each has a rule of its own."""


class ReadBackItem(StrEnum):
    """What people type as the console shows it."""

    POSITION = "position"
    SETTING = "jaw or table value"
    GAP = "gap"


@dataclass(frozen=True, slots=True)
class Contacts:
    """Whom a refusal says to call: text to print, a name or a telephone number."""

    physicist: str
    physician: str


@dataclass(frozen=True, slots=True)
class ReportingThresholds:
    """From where on a departure is flagged for a person's decision; None flags nothing.

    All in percent: of the prescribed total, of one fraction, of one week's dose.
    """

    total_percent: float | None
    fraction_percent: float | None
    weekly_percent: float | None


@dataclass(frozen=True, slots=True)
class Policy:
    """What a department decided, in force until the next version.

    ``time_zone`` is an IANA name; empty means the computer's own. ``two_people`` are the acts that
    take two signatures beside those that always do. ``minimum_interval_hours`` lies between two
    fractions on one day. ``read_back_on_shift_days`` must be typed before the beam when the
    position changed.
    """

    department: str
    time_zone: str
    contacts: Contacts
    two_people: tuple[Act, ...]
    minimum_interval_hours: float
    read_back_on_shift_days: tuple[ReadBackItem, ...]
    reporting_thresholds: ReportingThresholds
    physics_presence_at_shifts: bool


# Ledgers are verified against this: where a later program has another default, it must keep this
# one for the entries written before a department set its own.
DEFAULT_POLICY = Policy(
    department="",
    time_zone="",
    contacts=Contacts(physicist="", physician=""),
    two_people=(Act.APPROVE,),
    minimum_interval_hours=6.0,
    read_back_on_shift_days=(ReadBackItem.POSITION,),
    reporting_thresholds=ReportingThresholds(None, None, None),
    physics_presence_at_shifts=False,
)
"""In force until a department sets its own."""


def needs_two(policy: Policy, act: Act) -> bool:
    """Tell whether an act takes two signatures."""
    return act in ALWAYS_TWO or act in policy.two_people
