"""The physicist's screens: what a design comes to."""

from __future__ import annotations

from typing import TYPE_CHECKING

from featherlog import words
from featherlog.cli.output import rule, table, wrapped
from featherlog.cli.show_dose import dose_lines

if TYPE_CHECKING:
    from collections.abc import Iterator

    from featherlog.junction.plan import JunctionSetting, PositionSettings
    from featherlog.views.solution import SolutionView


def solution_text(view: SolutionView) -> str:
    """Return the screen of a solved design."""
    return "\n".join(_solution(view))


def _solution(view: SolutionView) -> Iterator[str]:
    course = view.course
    yield f"{course.key}  {course.site}  plan {course.plan_label}"
    yield f"{words.patient_position(course.patient_position)}; machine {view.machine}"
    if course.note:
        yield wrapped(f"Note: {course.note}")
    for position in view.positions:
        yield rule("=")
        yield from _position(position)
    yield rule("=")
    yield from _sequence(view)
    yield rule("=")
    yield f"{len(view.warnings)} warning(s)" + (":" if view.warnings else "")
    yield from (wrapped(f"WARNING {warning}.") for warning in view.warnings)
    yield rule("=")
    yield from dose_lines(view.dose)
    yield wrapped(view.caution)


def _position(position: PositionSettings) -> Iterator[str]:
    yield f"POSITION {position.label}"
    rows = [
        (
            beam.beam,
            *(words.signed(value) for value in beam.jaw_cm.values()),
            f"{beam.superior_jaw}/{beam.inferior_jaw}",
            words.meterset(beam.meterset_mu),
        )
        for field in position.fields
        for beam in field.beams
    ]
    heads = ("beam", "X1 cm", "X2 cm", "Y1 cm", "Y2 cm", "sup/inf", "MU")
    yield table(heads, rows, numeric="X1 cm|X2 cm|Y1 cm|Y2 cm|MU")
    for field in position.fields:
        for move in words.table_move(field.table_from_a_cm):
            yield f"{field.field}, from position A: {move}"
    for junction in position.junctions:
        yield from _junction(junction)


def _junction(junction: JunctionSetting) -> Iterator[str]:
    z = words.signed(junction.match_point_cm[2], 2)
    yield (
        f"junction {junction.junction}: offset {words.signed(junction.offset_cm)} cm, match depth "
        f"{words.figure(junction.match_depth_cm, 2)} cm, z {z} cm"
    )
    for gap in junction.skin_gaps:
        yield (
            f"  gap on the {gap.side} skin {words.signed(gap.expected_cm, 2)} cm"
            f"  (superior {words.figure(gap.superior_part_cm, 2)}, inferior "
            f"{words.figure(gap.inferior_part_cm, 2)})"
        )
    if junction.three_field_overlap_cm is not None:
        overlap = junction.three_field_overlap_cm
        yield f"  three-field overlap at the critical depth {words.figure(overlap, 3, 3)} cm"
    if junction.gap_without_overlap_cm is not None:
        yield f"  skin gap that removes it {words.figure(junction.gap_without_overlap_cm, 3, 3)} cm"
    rows = [
        (
            place.place,
            words.signed(place.x_cm),
            words.signed(place.y_cm),
            words.signed(place.exact_cm, 3, 3),
            words.signed(place.rounded_cm, 3, 3),
        )
        for place in junction.mismatches
    ]
    yield "  mismatch, worst beam pair (+ gap, − overlap):"
    heads = ("place", "x cm", "y cm", "exact cm", "as set cm")
    lines = table(heads, rows, numeric="x cm|y cm|exact cm|as set cm").splitlines()
    yield from (f"    {line}" for line in lines)


def _sequence(view: SolutionView) -> Iterator[str]:
    yield "Sequence (dates are projections):"
    yield table(
        ("fractions", "position", "first", "last"),
        [
            (
                f"{block.first_fraction}-{block.last_fraction}",
                block.position,
                block.first_date,
                block.last_date,
            )
            for block in view.blocks
        ],
    )
    shares = ", ".join(f"{label} {count}" for label, count in view.shares)
    yield f"Shares: {shares} of {view.course.fractions} fractions"
    shifts = ", ".join(str(number) for number in view.shift_fractions) or "none"
    yield wrapped(f"Shift days: {len(view.shift_fractions)} (fractions {shifts})")
