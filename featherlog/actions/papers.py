"""The papers of a course: shift sheet, approval dossier and course review."""

from __future__ import annotations

from typing import TYPE_CHECKING

from featherlog.actions.day_view import NOWHERE, junction_views
from featherlog.actions.review import review
from featherlog.actions.solution import stored_solution
from featherlog.actions.today import today
from featherlog.paper.course_review import course_review
from featherlog.paper.dossier import dossier
from featherlog.paper.shift_sheet import shift_sheet

if TYPE_CHECKING:
    from featherlog.paper.style import PageSize
    from featherlog.views.day import DayView
    from featherlog.views.review import ReviewView
    from featherlog.views.solution import SolutionView


def sheet(database: str | None, key: str, *, page_size: PageSize = "A4") -> tuple[DayView, bytes]:
    """Return the next fraction's view and its shift sheet (PDF)."""
    view = today(database, key)
    return view, shift_sheet(view, page_size)


def dossier_pages(
    database: str | None, key: str, *, page_size: PageSize = "A4"
) -> tuple[SolutionView, bytes]:
    """Return the latest revision's solution and its approval dossier (PDF)."""
    view = stored_solution(database, key)
    sides = junction_views(view.course, view.positions[0], NOWHERE)
    return view, dossier(view, page_size, side_views=sides)


def review_page(
    database: str | None, key: str, *, page_size: PageSize = "A4"
) -> tuple[ReviewView, bytes]:
    """Return a course's review and its page (PDF)."""
    view = review(database, key)
    return view, course_review(view, page_size)
