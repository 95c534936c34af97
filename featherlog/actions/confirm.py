"""The check before the beam. It may refuse, and then says why and whom to call."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from featherlog import words
from featherlog.actions.desk import at_desk
from featherlog.actions.signing import signing_desk
from featherlog.actions.stored import Stored, load
from featherlog.actions.today import day_view, stop_reasons
from featherlog.errors import InputError, RefusedError
from featherlog.policy import Act
from featherlog.store.entry import Kind

if TYPE_CHECKING:
    from collections.abc import Iterator, Mapping

    from featherlog.actions.desk import Desk, Signer
    from featherlog.views.day import DayView

# Wider than any field: a figure beyond it is a slip, and the ledger keeps slips.
_WIDEST_CM = 40.0


@dataclass(frozen=True, slots=True)
class ReadBack:
    """What two people read back before the beam.

    ``position`` is the label they read on the console, required on a shift day; ``page`` the code
    of the sheet in hand; ``gaps_cm`` measured gaps by junction or "junction:side" (+ gap).
    """

    position: str | None
    page: str | None
    gaps_cm: Mapping[str, float]


def confirm(
    database: str | None, key: str, *, by: Signer, verified_by: Signer, read_back: ReadBack
) -> DayView:
    """Confirm the next fraction: two people, the right position, the current sheet.

    Raises:
        RefusedError: a reason to stop, and whom to call.
        InputError: a gap names no junction of the course.
    """
    with at_desk(database) as desk:
        _checked(desk, key, read_back)  # before anybody has typed a passphrase for nothing
    with signing_desk(database, Act.CONFIRM, by, verified_by) as desk:
        stored, view = _checked(desk, key, read_back)
        desk.append(
            Kind.FRACTION_CONFIRMED,
            {
                "fraction": view.fraction,
                "position": view.position,
                "state_hash": stored.row.state_hash,
                "performer": by.name,
                "verifier": verified_by.name,
                "gaps": [
                    {"junction": name, "side": side, "gap_cm": gap}
                    for (name, side), gap in measured(stored, read_back.gaps_cm).items()
                ],
            },
            course=key,
            meaning=f"We confirm position {view.position} for fraction {view.fraction}",
        )
    return view


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


def _checked(desk: Desk, key: str, read_back: ReadBack) -> tuple[Stored, DayView]:
    stored = load(desk, key)
    view = day_view(desk, stored)
    reasons = list(_reasons(desk, stored, view, read_back))
    if reasons:
        raise RefusedError(f"{'; '.join(reasons)}. {words.STOP_AND_CALL}")
    return stored, view


def _reasons(desk: Desk, stored: Stored, view: DayView, read_back: ReadBack) -> Iterator[str]:
    if view.status == "complete":
        yield f"all {view.fractions} prescribed fractions are complete"
        return
    yield from stop_reasons(stored)
    if read_back.page is not None and read_back.page.strip().upper() != view.page_code:
        yield (
            f"the sheet {read_back.page} is not for fraction {view.fraction} as the course stands "
            f"now; print a new one ({view.page_code})"
        )
    yield from _position_reasons(view, read_back.position)
    yield from _gap_reasons(stored, view, read_back.gaps_cm)
    yield from _day_reasons(desk, stored, view)


def _position_reasons(view: DayView, read: str | None) -> Iterator[str]:
    if read is None:
        if view.shift == "yes" or view.part_delivered:
            why = "this is a shift day" if view.shift == "yes" else "the remainder is locked"
            yield (
                f"{why}: read the position back from the console with --position (planned "
                f"{view.position})"
            )
    elif read != view.position:
        yield f"position {read} was read back, but fraction {view.fraction} is at {view.position}"


def _gap_reasons(stored: Stored, view: DayView, gaps_cm: Mapping[str, float]) -> Iterator[str]:
    expected = {(j.junction, g.side): g for j in view.junctions for g in j.gaps}
    for place, gap in measured(stored, gaps_cm).items():
        plan = expected[place]
        if abs(gap - plan.expected_cm) > plan.tolerance_cm + 1e-9:
            yield (
                f"the gap on the {plan.side} skin at {place[0]} was read back as {gap:+.2f} cm, "
                f"expected {plan.expected_cm:+.2f} ± {plan.tolerance_cm:.2f} cm"
            )


def _day_reasons(desk: Desk, stored: Stored, view: DayView) -> Iterator[str]:
    day = desk.now.date().isoformat()
    given = {row.fraction for row in stored.deliveries if row.at[:10] == day}
    given.discard(view.fraction)
    if len(given) >= stored.course.fractions_a_day:
        numbers = " and ".join(str(number) for number in sorted(given))
        was = "s {} were" if len(given) > 1 else " {} was"
        yield (
            f"fraction{was.format(numbers)} delivered today already, and the course has "
            f"{stored.course.fractions_a_day} a day"
        )
