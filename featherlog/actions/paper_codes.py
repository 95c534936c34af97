"""Whether a printed page still shows a course as it stands, found from the ledger alone.

A page's code is made from the revision, the fraction due and the entry that last changed the
course. All three are folded anew over each course's entries, so that nothing has to be kept for it.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from featherlog.actions.day_view import page_code
from featherlog.actions.desk import at_desk
from featherlog.errors import InputError, NotFoundError
from featherlog.store import ledger, queries
from featherlog.store.entry import Kind

if TYPE_CHECKING:
    from collections.abc import Iterable

    from featherlog.store.entry import Entry

VALID, SUPERSEDED, UNKNOWN = "valid", "superseded", "unknown"

LEAVES_PAGES_VALID = frozenset(
    {
        Kind.FRACTION_CONFIRMED,
        Kind.IMAGE_SHIFT,
        Kind.PHYSICS_PRESENT,
        Kind.POSITION_CHECKED,
        Kind.REVIEW_SIGNED,
    }
)
"""Entries of a course after which its printed pages are as good as before."""

_LETTERS = frozenset("ABCDEFGHIJKLMNOPQRSTUVWXYZ234567")
_LENGTH = 8
# Figures that no code holds are letters misread.
_MISREAD = str.maketrans("018", "OIB")


@dataclass(frozen=True, slots=True)
class PageCheck:
    """What became of a printed page.

    ``status`` is valid, superseded or unknown. ``course``, ``fraction`` (None where none was due)
    and ``entry`` say what the page shows: the course as it stood after that entry, made at ``at``.
    ``superseded_by`` is the entry since which it is out of date, with its kind, maker and time.
    """

    code: str
    status: str
    course: str = ""
    fraction: int | None = None
    entry: int | None = None
    at: str = ""
    superseded_by: int | None = None
    superseded_kind: str = ""
    superseded_who: str = ""
    superseded_at: str = ""

    @property
    def words(self) -> str:
        """Return what became of the page in one sentence."""
        if self.status == UNKNOWN:
            return f"no page of this database has the code {self.code}; do not use it"
        due = "no fraction due" if self.fraction is None else f"fraction {self.fraction}"
        page = f"{self.code} is {self.status}: a page of course {self.course}, {due}"
        if self.status == VALID:
            return f"{page}, as the course stands since entry {self.entry} ({self.at})"
        return (
            f"{page}, out of date since {self.superseded_at} by entry {self.superseded_by} "
            f"({self.superseded_kind}, {self.superseded_who}); print a new one"
        )


@dataclass(frozen=True, slots=True)
class _Standing:
    """What the pages of a course are made from."""

    revision_code: str = ""
    fraction: int | None = 1


def check_page(database: str | None, code: str, course: str | None = None) -> PageCheck:
    """Return what became of the page with a code, of any course or of the one that is named.

    Raises InputError for a code that no page bears, NotFoundError where there is no such course.
    """
    wanted = _read(code)
    with at_desk(database) as desk:
        if course is not None and queries.course_row(desk.connection, course) is None:
            raise NotFoundError(f"there is no course {course!r}; see `featherlog course list`")
        return find_page(wanted, ledger.entries(desk.connection, course))


def find_page(code: str, entries: Iterable[Entry]) -> PageCheck:
    """Return what became of the page with a code after these entries, which are in order."""
    found = PageCheck(code, UNKNOWN)
    standing: dict[str, _Standing] = {}
    for entry in entries:
        key = entry.course
        if key is None or entry.kind in LEAVES_PAGES_VALID:
            continue
        if key == found.course:
            return _superseded(found, entry)
        now = standing[key] = _after(standing.get(key, _Standing()), entry)
        # A course that was ended has no fraction due, whatever was left of it.
        for fraction in (now.fraction, None):
            if page_code(now.revision_code, fraction, entry.hash) == code:
                found = PageCheck(code, VALID, key, fraction, entry.number, entry.at)
    return found


def _superseded(found: PageCheck, entry: Entry) -> PageCheck:
    return replace(
        found,
        status=SUPERSEDED,
        superseded_by=entry.number,
        superseded_kind=entry.kind,
        superseded_who=entry.who,
        superseded_at=entry.at,
    )


def _after(before: _Standing, entry: Entry) -> _Standing:
    content = entry.content
    match entry.kind:
        case Kind.DESIGN_APPROVED:
            return _Standing(content["code"], content["next_fraction"])
        case Kind.FRACTION_RECORDED | Kind.RECORD_CORRECTED:
            return replace(before, fraction=content["after"]["next_fraction"])
    return before


def _read(code: str) -> str:
    plain = code.strip().upper().replace("-", "").translate(_MISREAD)
    if len(plain) != _LENGTH or not set(plain) <= _LETTERS:
        raise InputError(
            f"the page's code is {code!r}, but a code has eight letters and figures, such as "
            "K7Q2-M3ZD"
        )
    return f"{plain[:4]}-{plain[4:]}"
