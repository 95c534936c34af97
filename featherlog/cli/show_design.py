"""The physicist's screens: what a design comes to."""

from __future__ import annotations

from typing import TYPE_CHECKING

from featherlog import words
from featherlog.cli.output import WIDTH, rule, table, wrapped
from featherlog.cli.show_day import heading_lines
from featherlog.cli.show_dose import dose_lines
from featherlog.junction import phrases

if TYPE_CHECKING:
    from collections.abc import Iterator

    from featherlog.junction.plan import (
        BeamSetting,
        BorderSetting,
        JunctionSetting,
        PositionSettings,
    )
    from featherlog.views.solution import BlockLine, SolutionView


def solution_text(view: SolutionView) -> str:
    """Return the screen of a solved design."""
    return "\n".join(_solution(view))


def _solution(view: SolutionView) -> Iterator[str]:
    course = view.course
    if view.heading is not None:
        yield from heading_lines(view.heading)
    else:
        yield f"{course.key}  {course.site}  plan {course.plan_label}"
        yield f"{words.patient_position(course.patient_position)}; machine {view.machine}"
    yield from _signatures(view)
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
    yield from _hand_checks(view)
    yield rule("=")
    yield from dose_lines(view.dose)
    yield wrapped(view.caution)


def _signatures(view: SolutionView) -> Iterator[str]:
    for signature in view.signatures:
        if signature.name:
            yield f"{signature.act} by {signature.name}, {signature.at}"
    if view.returned_reason:
        yield wrapped(f"returned: {view.returned_reason}")
    if view.content_hash:
        yield f"content {view.content_hash[:16]}"


def _position(position: PositionSettings) -> Iterator[str]:
    yield f"POSITION {position.label}"
    yield "Jaws and SSD in cm, angles in degrees (IEC 61217); sup/inf name the end jaws"
    yield _beams(position)
    yield from _turned_beams(position)
    for field in position.fields:
        if field.earlier_course:
            yield f"{field.field}: of the earlier course {field.earlier_course}, never set"
        for move in words.table_move(field.table_from_a_cm):
            yield wrapped(f"{field.field}, from position A: {move}")
    for border in position.borders:
        yield from _border(border)
    for junction in position.junctions:
        yield from _junction(junction)


def _beams(position: PositionSettings) -> str:
    heads = ("beam", "X1", "X2", "Y1", "Y2", "sup/inf", "coll", "couch", "SSD", "MU")
    rows = [_beam_row(beam) for field in position.treated for beam in field.beams]
    lines = table(heads, rows, numeric="X1|X2|Y1|Y2|coll|couch|SSD|MU")
    if max(map(len, lines.splitlines())) <= WIDTH:
        return lines
    # Long names stand on lines of their own, or the columns would not fit the screen.
    names, values = [row[0] for row in rows], [("   ", *row[1:]) for row in rows]
    head, *below = table(("", *heads[1:]), values, numeric="|".join(heads[1:])).splitlines()
    return "\n".join([head, *(f"{name}\n{line}" for name, line in zip(names, below, strict=True))])


def _beam_row(beam: BeamSetting) -> tuple[str, ...]:
    leaves = " (leaves)" if beam.edges_by == "leaves" else ""
    return (
        beam.beam + leaves,
        *(words.signed(value) for value in beam.jaw_cm.values()),
        f"{beam.superior_jaw}/{beam.inferior_jaw}",
        words.signed(beam.collimator_deg),
        words.signed(beam.couch_deg),
        words.figure(beam.ssd_cm),
        words.meterset(beam.meterset_mu),
    )


def _turned_beams(position: PositionSettings) -> Iterator[str]:
    for beam in (beam for field in position.treated for beam in field.beams):
        if beam.exact_couch_deg or beam.exact_collimator_deg:
            beside = phrases.angles_beside_set(beam)
            yield wrapped(
                f"{beam.beam}, before rounding: collimator "
                f"{words.signed(beam.exact_collimator_deg, 4, 4)}, couch "
                f"{words.signed(beam.exact_couch_deg, 4, 4)} degrees"
                f"{f'; {beside}' if beside else ''}"
            )


def _border(border: BorderSetting) -> Iterator[str]:
    places = ", ".join(
        f"x {words.signed(x)}: z {words.signed(z, 2)}"
        for x, z in zip(border.x_cm, border.z_cm, strict=True)
    )
    short = f"; {border.short_cm:.2f} cm stay uncovered" if border.short_cm > 0 else ""
    yield wrapped(f"{border.end} border at {places} cm{short}")


def _junction(junction: JunctionSetting) -> Iterator[str]:
    z = words.signed(junction.match_point_cm[2], 2)
    yield wrapped(
        f"junction {junction.junction}: offset {words.signed(junction.offset_cm)} cm, match point "
        f"{words.figure(junction.depth_below_skin_cm, 2)} cm deep, z {z} cm"
    )
    if junction.separation_cm:
        yield f"  planned separation {words.signed(junction.separation_cm, 2)} cm"
    for gap in junction.skin_gaps:
        yield wrapped(
            f"gap on the {gap.side} skin {words.signed(gap.expected_cm, 2)} cm (superior "
            f"{words.figure(gap.superior_part_cm, 2)}, inferior "
            f"{words.figure(gap.inferior_part_cm, 2)}; along the skin "
            f"{words.signed(gap.along_skin_cm, 2)})",
            "  ",
        )
    if junction.three_field_overlap_cm is not None:
        overlap = junction.three_field_overlap_cm
        yield f"  three-field overlap at the critical depth {words.figure(overlap, 3, 3)} cm"
    if junction.gap_without_overlap_cm is not None:
        without = words.signed(junction.gap_without_overlap_cm, 3, 3)
        yield f"  skin gap that removes it {without} cm"
    yield "  mismatch, worst beam pair and the worst of the other sign (+ gap, − overlap):"
    yield from (f"    {line}" for line in _mismatches(junction).splitlines())
    changes = [f"    {what}: {change}" for what, change in phrases.plays(junction)]
    yield from ["  changes of the mismatch as set, off by tolerance:", *changes] if changes else []


def _mismatches(junction: JunctionSetting) -> str:
    rows = [
        (
            place.place,
            words.signed(place.x_cm),
            words.signed(place.y_cm),
            phrases.mismatch(place.exact_cm),
            phrases.mismatch_as_set(place),
        )
        for place in junction.mismatches
    ]
    heads = ("place", "x cm", "y cm", "exact cm", "as set cm")
    return table(heads, rows, numeric="x cm|y cm|exact cm|as set cm")


def _sequence(view: SolutionView) -> Iterator[str]:
    yield "Sequence (dates are projections):"
    yield _blocks(view.blocks)
    shares = ", ".join(f"{label} {words.figure(count, 0)}" for label, count in view.shares)
    yield f"Shares: {shares} of {view.course.fractions} fractions"
    shifts = ", ".join(str(number) for number in view.shift_fractions) or "none"
    yield wrapped(f"Shift days: {len(view.shift_fractions)} (fractions {shifts})")
    if view.more_even:
        yield "More even with as many shift days:"
        yield _blocks(view.more_even)


def _blocks(lines: tuple[BlockLine, ...]) -> str:
    return table(
        ("fractions", "position", "first", "last"),
        [
            (
                f"{block.first_fraction}-{block.last_fraction}",
                block.position,
                block.first_date,
                block.last_date,
            )
            for block in lines
        ],
    )


def _hand_checks(view: SolutionView) -> Iterator[str]:
    yield "Hand check, before rounding: textbook formula beside the exact value"
    if not view.hand_checks:
        yield phrases.NO_FORMULA
    for check in view.hand_checks:
        yield wrapped(f"{check.position}: {check.subject}: {check.formula}")
        yield wrapped(
            f"{check.numbers} = {words.figure(check.by_formula, 4, 4)}; exact "
            f"{words.figure(check.exact, 4, 4)} {check.unit} ({check.source})",
            "    ",
        )
