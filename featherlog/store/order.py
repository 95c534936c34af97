"""What may follow what: an approval only a check, a check only another person's design.

``Courses`` is folded over the ledger from its first entry, as ``People`` is.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from featherlog.store.entry import Kind, content_hash, signed_by

if TYPE_CHECKING:
    from collections.abc import Callable, Iterator

    from featherlog.store.entry import Entry

_WAITING = ("prepared", "checked")


@dataclass(slots=True)
class _Course:
    states: dict[int, str] = field(default_factory=dict)
    authors: dict[int, str] = field(default_factory=dict)
    records: set[int] = field(default_factory=set)
    departures: dict[int, str] = field(default_factory=dict)
    found_by: dict[int, list[int]] = field(default_factory=dict)
    paused: bool = False
    ended: bool = False


@dataclass(slots=True)
class Courses:
    """How far every course and the policy have come after the entries seen so far."""

    policy_version: int = 0
    _courses: dict[str, _Course] = field(default_factory=dict)

    def fault(self, entry: Entry) -> str | None:
        """Return why an entry cannot follow those before it; None where it can."""
        if entry.kind == Kind.POLICY_SET:
            expected = self.policy_version + 1
            found = entry.content["version"]
            return None if found == expected else f"it is policy {found}, but {expected} is due"
        faults = _FAULTS.get(entry.kind)
        if faults is None:
            return None
        course = self._courses.get(entry.course or "", _Course())
        return next(faults(course, entry), None)

    def see(self, entry: Entry) -> None:
        """Take in what an entry changes, once it was found to be right."""
        if entry.kind == Kind.POLICY_SET:
            self.policy_version = entry.content["version"]
        change = _CHANGES.get(entry.kind)
        if change is not None:
            change(self._courses.setdefault(entry.course or "", _Course()), entry)


def _prepared_faults(course: _Course, entry: Entry) -> Iterator[str]:
    content = entry.content
    expected = max(course.states, default=0) + 1
    if content["revision"] != expected:
        yield f"it is revision {content['revision']}, but {expected} is due"
    said = content_hash(content["design"], content["plan"], content["machine"])
    if said != content["content_hash"]:
        yield "its content hash is not that of its design, plan and machine"


def _checked_faults(course: _Course, entry: Entry) -> Iterator[str]:
    yield from _state_faults(course, entry, "prepared")
    yield from _author_faults(course, entry, "check")


def _approved_faults(course: _Course, entry: Entry) -> Iterator[str]:
    yield from _state_faults(course, entry, "checked")
    yield from _author_faults(course, entry, "approve")


def _returned_faults(course: _Course, entry: Entry) -> Iterator[str]:
    yield from _state_faults(course, entry, *_WAITING)


def _state_faults(course: _Course, entry: Entry, *allowed: str) -> Iterator[str]:
    number = entry.content["revision"]
    state = course.states.get(number, "not prepared")
    if state not in allowed:
        yield f"revision {number} is {state}, not {' or '.join(allowed)}"


def _author_faults(course: _Course, entry: Entry, what: str) -> Iterator[str]:
    author = course.authors.get(entry.content["revision"])
    if author in (entry.who, *signed_by(entry)):
        yield f"{author} prepared this revision and may not {what} it"


def _confirmed_faults(course: _Course, _entry: Entry) -> Iterator[str]:
    if "approved" not in course.states.values():
        yield "no revision of the course is approved"
    if course.paused or course.ended:
        yield f"the course {'is paused' if course.paused else 'has ended'}"


def _recorded_faults(course: _Course, _entry: Entry) -> Iterator[str]:
    if not course.states:
        yield "there is no design of the course"


def _corrected_faults(course: _Course, entry: Entry) -> Iterator[str]:
    if entry.content["corrects"] not in course.records:
        yield f"entry {entry.content['corrects']} is not a record that stands"


def _explained_faults(course: _Course, entry: Entry) -> Iterator[str]:
    yield from _departure_faults(course, entry, "open")


def _decided_faults(course: _Course, entry: Entry) -> Iterator[str]:
    yield from _departure_faults(course, entry, "open", "explained")


def _departure_faults(course: _Course, entry: Entry, *allowed: str) -> Iterator[str]:
    number = entry.content["departure"]
    if course.departures.get(number) not in allowed:
        yield f"departure {number} is not {' or '.join(allowed)}"


def _released_faults(course: _Course, _entry: Entry) -> Iterator[str]:
    if not course.paused:
        yield "the course is not paused"


def _see_prepared(course: _Course, entry: Entry) -> None:
    course.states[entry.content["revision"]] = "prepared"
    course.authors[entry.content["revision"]] = entry.who


def _see_checked(course: _Course, entry: Entry) -> None:
    course.states[entry.content["revision"]] = "checked"


def _see_approved(course: _Course, entry: Entry) -> None:
    number = entry.content["revision"]
    for earlier, state in course.states.items():
        if state == "approved" or (earlier < number and state in _WAITING):
            course.states[earlier] = "superseded"
    course.states[number] = "approved"


def _see_returned(course: _Course, entry: Entry) -> None:
    course.states[entry.content["revision"]] = "returned"


def _see_recorded(course: _Course, entry: Entry) -> None:
    course.records.add(entry.number)
    for found in entry.content["departures"]:
        number = len(course.departures) + 1
        course.departures[number] = "explained" if found["reason"] else "open"
        course.found_by.setdefault(entry.number, []).append(number)


def _see_corrected(course: _Course, entry: Entry) -> None:
    replaced = entry.content["corrects"]
    course.records.remove(replaced)
    for number in course.found_by.get(replaced, ()):
        course.departures[number] = "corrected"
    _see_recorded(course, entry)


def _see_explained(course: _Course, entry: Entry) -> None:
    course.departures[entry.content["departure"]] = "explained"


def _see_decided(course: _Course, entry: Entry) -> None:
    course.departures[entry.content["departure"]] = "decided"


def _see_paused(course: _Course, _entry: Entry) -> None:
    course.paused = True


def _see_released(course: _Course, _entry: Entry) -> None:
    course.paused = False


def _see_ended(course: _Course, _entry: Entry) -> None:
    course.ended = True


_FAULTS: dict[str, Callable[[_Course, Entry], Iterator[str]]] = {
    Kind.DESIGN_PREPARED: _prepared_faults,
    Kind.DESIGN_CHECKED: _checked_faults,
    Kind.DESIGN_APPROVED: _approved_faults,
    Kind.DESIGN_RETURNED: _returned_faults,
    Kind.FRACTION_CONFIRMED: _confirmed_faults,
    Kind.FRACTION_RECORDED: _recorded_faults,
    Kind.DEPARTURE_EXPLAINED: _explained_faults,
    Kind.RECORD_CORRECTED: _corrected_faults,
    Kind.DEPARTURE_DECIDED: _decided_faults,
    Kind.COURSE_RELEASED: _released_faults,
}

_CHANGES: dict[str, Callable[[_Course, Entry], None]] = {
    Kind.DESIGN_PREPARED: _see_prepared,
    Kind.DESIGN_CHECKED: _see_checked,
    Kind.DESIGN_APPROVED: _see_approved,
    Kind.DESIGN_RETURNED: _see_returned,
    Kind.FRACTION_RECORDED: _see_recorded,
    Kind.DEPARTURE_EXPLAINED: _see_explained,
    Kind.RECORD_CORRECTED: _see_corrected,
    Kind.DEPARTURE_DECIDED: _see_decided,
    Kind.COURSE_PAUSED: _see_paused,
    Kind.COURSE_RELEASED: _see_released,
    Kind.COURSE_ENDED: _see_ended,
}
