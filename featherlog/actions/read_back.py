"""What two people type as the console shows it, against what is planned for the fraction.

On a day without a shift nothing has to be read back. A value that is given is looked at on any day.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from featherlog import words
from featherlog.actions.refusals import Reason
from featherlog.errors import InputError
from featherlog.policy import ReadBackItem

if TYPE_CHECKING:
    from collections.abc import Iterator, Mapping

    from featherlog.actions.stored import Stored
    from featherlog.junction.machine import Tolerances
    from featherlog.policy import Policy
    from featherlog.views.day import DayView, FieldView

# Wider than any field: a figure beyond it is a slip, and the ledger keeps slips.
_WIDEST_CM = 40.0
_NOISE_CM = 1e-9


@dataclass(frozen=True, slots=True)
class ReadBack:
    """What two people read back before the beam.

    ``position`` is the label they read on the console, required on a shift day; ``page`` the code
    of the sheet in hand; ``gaps_cm`` measured gaps by junction or "junction:side" (+ gap);
    ``readings_cm`` jaws by "beam:jaw" and table values by "field:axis", IEC 61217 signs.
    """

    position: str | None
    page: str | None
    gaps_cm: Mapping[str, float]
    readings_cm: Mapping[str, float] = field(default_factory=dict)


@dataclass(frozen=True, slots=True)
class Planned:
    """A jaw or table value of the fraction (cm, IEC 61217), and whether it differs from before."""

    cm: float
    tolerance_cm: float
    changes: bool


def planned_values(view: DayView, tolerances: Tolerances) -> dict[str, Planned]:
    """Return every jaw and table value that can be read back, by its name."""
    found: dict[str, Planned] = {}
    for one in view.fields:
        found |= _jaws(one, tolerances.jaw_cm)
        found |= _table(one, tolerances.table_cm)
    return found


def measured(stored: Stored, gaps_cm: Mapping[str, float]) -> dict[tuple[str, str], float]:
    """Return measured gaps by (junction, skin side), each name checked against the design.

    A bare junction name means its entrance skin. Raises InputError for a name that is not there
    or given twice and for a gap wider than any field.
    """
    sides = {junction.name: junction.entrance.value for junction in stored.course.junctions}
    known = {
        (junction.junction, gap.side)
        for junction in stored.plan.positions[0].junctions
        for gap in junction.skin_gaps
    }
    found = {}
    for text, gap in gaps_cm.items():
        name, _, side = text.partition(":")
        place = (name, side or sides.get(name, ""))
        if place not in known:
            allowed = ", ".join(f"{junction}:{skin}" for junction, skin in sorted(known))
            raise InputError(f"--gap {text!r} names no gap of this course; allowed: {allowed}")
        if not abs(gap) <= _WIDEST_CM:
            raise InputError(
                f"--gap {text}={gap:g} is outside {-_WIDEST_CM:g} to {_WIDEST_CM:g} cm"
            )
        if place in found:
            raise InputError(f"--gap gives the {place[1]} gap of {name!r} twice")
        found[place] = gap
    return found


def read_back_reasons(
    stored: Stored, view: DayView, policy: Policy, read: ReadBack
) -> Iterator[Reason]:
    """Yield what is missing from a read-back, or differs from what is planned.

    Raises InputError for a value that the course does not have.
    """
    yield from _page(view, read.page)
    yield from _position(view, read.position)
    planned = planned_values(view, stored.machine.tolerances)
    gaps = measured(stored, read.gaps_cm)
    if view.shift == "yes":
        asked = policy.read_back_on_shift_days
        if ReadBackItem.SETTING in asked:
            yield from _setting_missing(view, planned, read.readings_cm)
        if ReadBackItem.GAP in asked:
            yield from _gap_missing(view, gaps)
    yield from _readings(planned, read.readings_cm)
    yield from _gaps(view, gaps)


def _page(view: DayView, page: str | None) -> Iterator[Reason]:
    if page is not None and page.strip().upper() != view.page_code:
        yield Reason(
            f"the sheet {page} is not for fraction {view.fraction} as the course stands now; print "
            f"a new one ({view.page_code})"
        )


def _position(view: DayView, read: str | None) -> Iterator[Reason]:
    if read is None:
        if view.shift == "yes" or view.part_delivered:
            why = "this is a shift day" if view.shift == "yes" else "the remainder is locked"
            yield Reason(
                f"{why}: read the position back from the console with --position (planned "
                f"{view.position})"
            )
    elif read != view.position:
        yield Reason(
            f"position {read} was read back, but fraction {view.fraction} is at {view.position}"
        )


def _setting_missing(
    view: DayView, planned: Mapping[str, Planned], read_cm: Mapping[str, float]
) -> Iterator[Reason]:
    changing = [name for name, value in planned.items() if value.changes]
    if changing and not set(changing) & set(read_cm):
        yield Reason(
            "this is a shift day: read back a jaw or table value that changes, with --reading "
            f"NAME=CM ({', '.join(changing)})"
        )
    elif not changing and any(one.since_last.words for one in view.fields):
        yield Reason(
            "only the table moves, and there is no read-out of it to compare a value with "
            "(`featherlog table read`)"
        )


def _gap_missing(view: DayView, gaps: Mapping[tuple[str, str], float]) -> Iterator[Reason]:
    have = {junction for junction, _ in gaps}
    for one in view.junctions:
        if one.gaps and one.junction not in have:
            yield Reason(
                f"this is a shift day: measure the gap at {one.junction} and give it with --gap"
            )


def _readings(planned: Mapping[str, Planned], read_cm: Mapping[str, float]) -> Iterator[Reason]:
    for name, value in read_cm.items():
        if name not in planned:
            raise InputError(
                f"--reading {name!r} names no value of this fraction; allowed: "
                f"{', '.join(sorted(planned))}"
            )
        due = planned[name]
        if abs(value - due.cm) > due.tolerance_cm + _NOISE_CM:
            yield Reason(
                f"{name} was read back as {words.signed(value)} cm, expected "
                f"{words.signed(due.cm)} ± {words.figure(due.tolerance_cm)} cm"
            )


def _gaps(view: DayView, gaps: Mapping[tuple[str, str], float]) -> Iterator[Reason]:
    expected = {(j.junction, g.side): g for j in view.junctions for g in j.gaps}
    for place, gap in gaps.items():
        plan = expected[place]
        if abs(gap - plan.expected_cm) > plan.tolerance_cm + _NOISE_CM:
            yield Reason(
                f"the gap on the {plan.side} skin at {place[0]} was read back as "
                f"{words.signed(gap, 2)} cm, expected {words.signed(plan.expected_cm, 2)} ± "
                f"{words.figure(plan.tolerance_cm, 2)} cm"
            )


def _jaws(one: FieldView, tolerance_cm: float) -> dict[str, Planned]:
    """Return a field's jaws; leaves belong to the plan and no jaw value shows where they stand."""
    return {
        f"{beam.beam}:{jaw.jaw}": Planned(
            jaw.cm,
            tolerance_cm,
            changes=jaw.previous_cm is not None and abs(jaw.cm - jaw.previous_cm) > words.STILL_CM,
        )
        for beam in one.beams
        for jaw in beam.jaws
        if jaw.edges_by != "leaves"
    }


def _table(one: FieldView, tolerance_cm: float) -> dict[str, Planned]:
    """Return where the table must stand for a field; nothing while moves are relative only."""
    if one.target is None:
        return {}
    return {
        f"{one.field}:{axis}": Planned(
            getattr(one.target, f"{axis}_cm"),
            tolerance_cm,
            changes=abs(getattr(one.since_last, f"{axis}_cm")) > words.STILL_CM,
        )
        for axis in ("lateral", "longitudinal", "vertical")
    }
