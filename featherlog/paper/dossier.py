"""The approval dossier: everything a design comes to, for those who check and approve it."""

from __future__ import annotations

from dataclasses import replace
from functools import partial
from typing import TYPE_CHECKING

from featherlog.dose.result import PLANNED, UNFEATHERED
from featherlog.paper.dose_profiles import match_profiles
from featherlog.paper.dossier_approval import approval, code_of, warning_box
from featherlog.paper.dossier_checks import hand_check_table
from featherlog.paper.dossier_design import design
from featherlog.paper.dossier_sequence import sequence
from featherlog.paper.dossier_settings import position_block
from featherlog.paper.dossier_sides import side_pictures
from featherlog.paper.layout import Furniture, build_pdf, section, space
from featherlog.views.common import Heading

if TYPE_CHECKING:
    from collections.abc import Sequence

    from reportlab.platypus import Flowable

    from featherlog.paper.style import PageSize
    from featherlog.views.day import JunctionView
    from featherlog.views.dose import DoseLine, DoseView
    from featherlog.views.solution import SolutionView

_NOT_STORED = "solved only, not stored"
_PICTURE_PT = 150.0
_DESIGNED = (PLANNED, UNFEATHERED)


def dossier(
    view: SolutionView,
    page_size: PageSize = "A4",
    *,
    side_views: Sequence[JunctionView] = (),
) -> bytes:
    """Return the approval dossier of a design as a PDF of several pages.

    What is signed and what is warned of comes first, then the design, the settings of every
    position, the sequence, the hand check and the dose. A design that was only solved says so where
    the signatures would stand. ``side_views`` are the junctions at position A, to be drawn from the
    side; without them there is no such drawing.

    Raises:
        InputError: A name holds a character that the font cannot print.
    """
    heading = view.heading or _heading(view)
    furniture = Furniture(
        title="Approval dossier",
        heading=heading,
        demo=heading.demo,
        notes=(view.caution, view.dose.caution),
        marks=(("Content", code_of(view)), ("Printed", view.printed_at)),
    )
    return build_pdf(furniture, partial(_story, view, side_views), page_size)


def _heading(view: SolutionView) -> Heading:
    course = view.course
    return Heading(
        course=course.key,
        patient_name=course.patient_name,
        identifiers=tuple(course.identifiers.items()),
        site=course.site,
        patient_position=course.patient_position.value,
        machine=view.machine,
        plan_label=course.plan_label,
        state=_NOT_STORED,
        revision="",
        demo=False,
    )


def _story(view: SolutionView, side_views: Sequence[JunctionView], width: float) -> list[Flowable]:
    body = [*approval(view, width), space(6), warning_box(view.warnings, width)]
    body += design(view.course, width)
    for position in view.positions:
        body += position_block(view.course, position, width)
    body += sequence(view, width)
    body += hand_check_table(view.hand_checks, width)
    body += side_pictures(side_views, view.course.patient_position.value, width)
    body += section("DOSE ALONG THE JUNCTIONS, WHOLE COURSE", keep_pt=_PICTURE_PT + 80)
    dose = _as_designed(view.dose)
    return [*body, *match_profiles(dose, width, all_depths=True, picture_pt=_PICTURE_PT)]


def _as_designed(dose: DoseView) -> DoseView:
    """Return the dose without what was delivered: the dossier is about the design alone."""
    return replace(
        dose,
        junctions=tuple(
            replace(junction, lines=tuple(map(_designed_line, junction.lines)))
            for junction in dose.junctions
        ),
    )


def _designed_line(line: DoseLine) -> DoseLine:
    return replace(line, curves=tuple(each for each in line.curves if each.name in _DESIGNED))
