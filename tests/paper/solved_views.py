"""Solved designs as the dossier shows them: a craniospinal course and a pair of opposed fields."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

from spine_course import HFS, beam, course, field, held, junction, machine, spine

from featherlog.junction.design import EarlierCourse, EdgesBy, Side
from featherlog.junction.hand_check import hand_checks
from featherlog.junction.machine import Steps
from featherlog.sequence.planning import plan_course
from featherlog.views.solution import BlockLine, Signature, SolutionView
from featherlog.words import CAUTION

if TYPE_CHECKING:
    from featherlog.junction.design import Course
    from featherlog.views.common import Heading
    from featherlog.views.dose import DoseView

HASH = "7f3a9c02d4e1b865" + "0123456789abcdef" * 3
SIGNED = (
    Signature("prepared", "Hazel Wren", "2031-03-01 10:12 +01:00"),
    Signature("checked", "Ash Plover", "2031-03-02 15:40 +01:00"),
    Signature("approved", "", ""),
)


def craniospinal() -> Course:
    return spine(lower_follows="J2")


def opposed_pair() -> Course:
    """Give two fields of opposed beams over a deep match, at three positions."""
    fields = tuple(
        field(
            name,
            beam(f"AP {name}", 0, (10.0, 0.0, z)),
            beam(f"PA {name}", 180, (10.0, 0.0, z)),
        )
        for name, z in (("upper", 14.0), ("lower", -15.0))
    )
    meeting = junction(
        "thigh",
        (10.0, -5.0, 0.0),
        5.0,
        entrance=Side.ANTERIOR,
        thickness_cm=10.0,
        lateral_limits_cm=(3.0, 17.0),
        critical_depth_cm=4.0,
    )
    borders = (held(10.0, 0.0, 26.0), held(10.0, 0.0, -27.0))
    return course(HFS, fields, (meeting,), borders, offsets_cm=(0.0, -1.0, -2.0))


def by_leaves(design: Course) -> Course:
    upper, *others = design.fields
    beams = tuple(replace(each, edges_by=EdgesBy.LEAVES) for each in upper.beams)
    return replace(design, fields=(replace(upper, beams=beams), *others))


def with_earlier(design: Course) -> Course:
    upper, *others = design.fields
    earlier = EarlierCourse("PELVIS-29", 45.0, 25, 14.0)
    return replace(design, fields=(replace(upper, earlier=earlier), *others))


def solved(design: Course, dose: DoseView, heading: Heading | None = None) -> SolutionView:
    """Return a design solved in steps of a millimetre, with short hand-written blocks."""
    known = machine(steps=Steps(jaw_cm=0.1, table_cm=0.1, angle_deg=0.1))
    plan = plan_course(design, known)
    return SolutionView(
        heading=heading,
        content_hash=HASH if heading else "",
        signatures=SIGNED if heading else (),
        returned_reason="",
        course=design,
        machine=known.name,
        positions=plan.positions,
        blocks=(
            BlockLine(1, 5, "A", "2031-03-03", "2031-03-07"),
            BlockLine(6, 10, "B", "2031-03-10", "2031-03-14"),
            BlockLine(11, 15, "C", "2031-03-17", "2031-03-21"),
            BlockLine(16, 20, "A", "2031-03-24", "2031-03-28"),
        ),
        shares=(("A", 10.0), ("B", 5.0), ("C", 5.0)),
        more_even=(BlockLine(1, 4, "A", "2031-03-03", "2031-03-06"),),
        shift_fractions=(6, 11, 16),
        warnings=plan.warnings,
        hand_checks=hand_checks(design, plan.positions),
        dose=dose,
        printed_at="2031-03-02 16:00 +01:00",
        caution=CAUTION,
    )
