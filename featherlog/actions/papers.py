"""The papers of a course: the shift sheet and the course review."""

from __future__ import annotations

from typing import TYPE_CHECKING

from featherlog.actions.review import review
from featherlog.actions.today import today
from featherlog.paper.course_review import course_review
from featherlog.paper.shift_sheet import shift_sheet

if TYPE_CHECKING:
    from featherlog.paper.style import PageSize
    from featherlog.views.day import DayView
    from featherlog.views.review import ReviewView


def sheet(database: str | None, key: str, *, page_size: PageSize = "A4") -> tuple[DayView, bytes]:
    """Return the next fraction's view and its shift sheet (PDF)."""
    view = today(database, key)
    return view, shift_sheet(view, page_size)


def review_page(
    database: str | None, key: str, *, page_size: PageSize = "A4"
) -> tuple[ReviewView, bytes]:
    """Return a course's review and its page (PDF)."""
    view = review(database, key)
    return view, course_review(view, page_size)
