"""The therapist's screens: one fraction, and the list of a day, at 80 columns."""

from __future__ import annotations

from typing import TYPE_CHECKING

from featherlog import words
from featherlog.cli.output import rule, table, wrapped

if TYPE_CHECKING:
    from collections.abc import Iterator

    from featherlog.views.common import Heading
    from featherlog.views.day import BeamView, DayView, DueList, FieldView, JawView, JunctionView


def day_text(view: DayView) -> str:
    """Return the screen of one fraction."""
    return "\n".join(_day(view))


def heading_lines(heading: Heading) -> Iterator[str]:
    """Yield the lines that say who and what a screen is about."""
    if heading.demo:
        yield f"*** {words.DEMO_NOTICE} ***"
    identifiers = ", ".join(f"{name} {value}" for name, value in heading.identifiers)
    yield wrapped(f"{heading.course}  {heading.patient_name}  ({identifiers})")
    yield wrapped(
        f"{heading.site}; plan {heading.plan_label}; "
        f"{words.patient_position(heading.patient_position)}; machine {heading.machine}"
    )
    yield f"revision {heading.revision}, {heading.state}"
    yield rule("=")


def _day(view: DayView) -> Iterator[str]:
    yield from heading_lines(view.heading)
    if view.status == "stop":
        yield from _stop(view)
    elif view.status == "complete":
        yield f"COMPLETE: all {view.fractions} prescribed fractions are delivered."
        yield "Nothing to treat."
    else:
        yield from _settings(view)
    yield from _departures(view)
    yield from (wrapped(f"RAISED RISK: {risk}.") for risk in view.raised_risk)
    yield rule()
    yield f"sheet code {view.page_code}   ledger {view.ledger_head}   {view.printed_at}"
    yield wrapped(view.caution)


def _stop(view: DayView) -> Iterator[str]:
    yield wrapped(view.call)
    for reason in view.stop_reasons:
        yield wrapped(f"Reason: {reason}.")


def _settings(view: DayView) -> Iterator[str]:
    shift = {"yes": "YES", "no": "NO", "first": "FIRST FRACTION"}[view.shift]
    yield (
        f"FRACTION {view.fraction} of {view.fractions}     POSITION {view.position}     "
        f"SHIFT TODAY: {shift}"
    )
    if view.steps > 1:
        yield f"STEP {view.step} of {view.steps} of this fraction: each at its own position"
    yield wrapped(f"Due {view.projected_date}. {view.shift_words}")
    if view.part_delivered:
        what = f"fraction {view.fraction}" if view.steps == 1 else f"step {view.step}"
        yield wrapped(
            f"PART DELIVERED: finish {what} at position {view.position}; the position is locked."
        )
    for junction in view.junctions:
        yield from _junction(junction)
    yield wrapped(f"Table positions are {view.table_reference}.")
    for field in view.fields:
        yield rule()
        yield from _field(field)
    yield rule()
    if view.next_shift:
        shift_next = view.next_shift
        yield (
            f"Next shift: fraction {shift_next.fraction}, to position {shift_next.position}, "
            f"projected {shift_next.projected_date}."
        )
    else:
        yield "No further shift after this fraction."


def _junction(junction: JunctionView) -> Iterator[str]:
    yield wrapped(f"{junction.words} (offset from A: {words.signed(junction.offset_cm)} cm)")
    for gap in junction.gaps:
        yield (
            f"  expected gap on the {gap.side} skin {words.signed(gap.expected_cm, 2)} "
            f"± {words.figure(gap.tolerance_cm)} cm   measured ______"
        )


def _field(field: FieldView) -> Iterator[str]:
    yield f"{field.field.upper()}   (moved by its {field.moved_by})"
    yield from (wrapped(order, "  ") for order in field.orders)
    yield from (wrapped(f"({note})", "  ") for note in field.notes)
    if field.target:
        yield wrapped(field.target.words, "  ")
    for beam in field.beams:
        yield from _beam(beam)


def _beam(beam: BeamView) -> Iterator[str]:
    collimator = _angle("collimator", beam.collimator_deg, beam.previous_collimator_deg)
    couch = _angle("couch", beam.couch_deg, beam.previous_couch_deg)
    yield wrapped(
        f"{beam.beam}: {beam.energy}  gantry {words.figure(beam.gantry_deg)}  {collimator}  "
        f"{couch}  SSD {words.figure(beam.ssd_cm)}",
        "  ",
    )
    due = f"    deliver {words.meterset(beam.to_deliver_mu)} MU"
    if beam.delivered_mu:
        due += (
            f" (the rest of {words.meterset(beam.planned_mu)}; "
            f"{words.meterset(beam.delivered_mu)} delivered)"
        )
    yield due
    if beam.console:
        shown = "  ".join(words.console_value(name, value) for name, value in beam.console)
        yield wrapped(f"on the console: {shown}", "    ")
    yield from (f"    {_jaw(jaw)}" for jaw in beam.jaws)


def _angle(name: str, degrees: float, previous: float | None) -> str:
    if previous is None or previous == degrees:
        return f"{name} {words.signed(degrees)}"
    return f"{name} {words.signed(previous)} → {words.signed(degrees)} CHANGED"


def _jaw(jaw: JawView) -> str:
    where = f"{jaw.jaw} {jaw.edge:<8}"
    if jaw.edges_by == "leaves":
        return f"{where} {words.signed(jaw.cm)} cm   leaf edge: from the plan, not set by hand"
    if not jaw.words or jaw.previous_cm is None:
        return f"{where} {words.signed(jaw.cm)} cm"
    change = f"{words.signed(jaw.previous_cm)} → {words.signed(jaw.cm)} cm"
    return f"{where} {change}   CHANGED: {jaw.words}"


def _departures(view: DayView) -> Iterator[str]:
    if view.open_departures:
        yield rule()
    for line in view.open_departures:
        yield wrapped(
            f"OPEN DEPARTURE {line.number} (fraction {line.fraction}, {line.kind}, {line.grade}): "
            f"{line.detail}"
        )


def sheet_words(view: DayView) -> str:
    """Return what a sheet is for, or why it holds no settings."""
    if view.status == "stop":
        return words.STOP_AND_CALL
    if view.status == "complete":
        return f"all {view.fractions} prescribed fractions are complete"
    return f"fraction {view.fraction}, position {view.position}, code {view.page_code}"


def confirmed_text(view: DayView) -> str:
    """Return what the people at the console see once a fraction is confirmed."""
    lines = [
        f"{view.heading.course}: CONFIRMED fraction {view.fraction} of {view.fractions}",
        f"POSITION {view.position}",
        *(junction.words for junction in view.junctions),
        *(wrapped(f"{field.field}: {move}") for field in view.fields for move in field.orders),
        *(wrapped(f"{one.field}: {one.target.words}") for one in view.fields if one.target),
        "After the beam: featherlog record " + view.heading.course,
    ]
    return "\n".join(lines)


def due_text(view: DueList) -> str:
    """Return the screen of a day's list."""
    lines = [f"*** {words.DEMO_NOTICE} ***"] if view.demo else []
    where = f" on {view.machine}" if view.machine else ""
    lines.append(f"Courses due on {view.date}{where}")
    if not view.lines:
        return "\n".join([*lines, "None.", wrapped(view.caution)])
    shift = {"yes": "YES", "no": "no", "first": "first"}
    lines.append(
        table(
            ("course", "patient", "machine", "fraction", "position", "shift", "due"),
            [
                (
                    line.course,
                    line.patient_name,
                    line.machine,
                    f"{line.fraction} of {line.fractions}",
                    line.position,
                    shift[line.shift],
                    line.due,
                )
                for line in view.lines
            ],
        )
    )
    lines += [wrapped(f"{line.course}: {line.attention}") for line in view.lines if line.attention]
    return "\n".join([*lines, wrapped(view.caution)])
