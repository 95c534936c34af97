"""The review's lines in words, the same on screen and paper."""

from __future__ import annotations

from itertools import groupby
from typing import TYPE_CHECKING

from featherlog.words import figure

if TYPE_CHECKING:
    from collections.abc import Iterable, Iterator

    from featherlog.views.common import DepartureLine, PlaceDose
    from featherlog.views.review import (
        BreakLine,
        ChangeLine,
        ReviewEvent,
        SidesLine,
        SignOffLine,
        StripLine,
        WeekView,
    )

STATUS = {
    "open": "OPEN",
    "explained": "OPEN, undecided",
    "decided": "decided",
    "corrected": "record corrected",
}
"""How a departure's status is shown: it is open until somebody decides."""

EQUAL = {True: "equal", False: "NOT EQUAL", None: "an earlier course's side is not compared"}
"""Whether the two sides of a junction have had the same, as in ``SidesLine.equal``."""

STRIP_COUNT = "strip coverage so far, a count and not a dose"


def dose_words(dose: PlaceDose) -> str:
    """Say what a departure did to the dose of one place, in the fraction and in the course."""
    said = (
        f"{figure(dose.fraction_gy, 2)} Gy in this fraction ({dose.fraction_percent:.0f} %), "
        f"{figure(dose.total_gy, 2)} of {figure(dose.total_planned_gy, 2)} Gy in the course "
        f"({dose.total_percent:.1f} %)"
    )
    if dose.width_cm is None:
        return f"{dose.place}: {said}"
    return f"{dose.place}: {figure(dose.width_cm)} cm wide, {said}, ideal edges"


def departure_notes(line: DepartureLine) -> Iterator[str]:
    """Yield a departure's figures, the thresholds it reaches and the decision on it."""
    yield from map(dose_words, line.doses)
    for flag in line.flags:
        yield f"FLAG {flag}"
    if line.decision:
        yield f"Decision: {line.decision}"


def side_words(side: SidesLine) -> str:
    """Say what the two sides of a junction have been given."""
    given = (
        f"{field} {gy:.2f} Gy" + ("" if had is None else f" ({figure(had, 0)} fractions)")
        for field, gy, had in (
            (side.superior_field, side.superior_gy, side.superior_fractions),
            (side.inferior_field, side.inferior_gy, side.inferior_fractions),
        )
    )
    return f"{side.junction}: {', '.join(given)}: {EQUAL[side.equal]}"


def strips_words(strips: Iterable[StripLine]) -> Iterator[str]:
    """Say how often the strips of each junction were covered, and should have been."""
    for junction, lines in groupby(strips, key=lambda strip: strip.junction):
        counts = (
            f"z {figure(line.low_cm)} to {figure(line.high_cm)} cm "
            f"{figure(line.covered_count, 0)} of {figure(line.expected_count, 0)}"
            for line in lines
        )
        yield f"{junction}, {STRIP_COUNT}: {'; '.join(counts)}"


def since_words(week: WeekView) -> str:
    """Say since when the changes are."""
    return f"Since the review signed {week.since}" if week.since else "No review was signed before"


def change_words(change: ChangeLine) -> str:
    """Say what happened of one kind; like phrases, such as fraction numbers, are put together."""
    named = [phrase.partition(" ") for phrase in change.words]
    if len({first for first, _, _ in named}) == 1 and all(rest.isdigit() for _, _, rest in named):
        said = f"{named[0][0]} {', '.join(rest for _, _, rest in named)}"
    else:
        said = "; ".join(phrase for phrase in change.words if phrase)
    return f"{change.kind} ({change.count})" + (f": {said}" if said else "")


def event_words(event: ReviewEvent) -> str:
    """Say when something happened, who noted it, and what they said."""
    return f"{event.at} {event.kind}, {event.who}" + (f": {event.words}" if event.words else "")


def break_words(pause: BreakLine) -> str:
    """Say when treatment stood still."""
    if pause.treatment_days == 1:
        return f"no treatment on {pause.first_date}"
    span = f"from {pause.first_date} to {pause.last_date}"
    return f"no treatment {span} ({pause.treatment_days} treatment days)"


def sign_off_words(line: SignOffLine) -> str:
    """Say who of a role signed last, and how much came after."""
    since = "1 entry" if line.entries_since == 1 else f"{line.entries_since} entries"
    return f"{line.role} {line.who}, {line.at}, {since} since"


def week_words(week: WeekView) -> Iterator[str]:
    """Yield everything that came since the last sign-off, and the breaks of the whole course."""
    yield since_words(week)
    yield from map(change_words, week.changes)
    yield from map(event_words, week.events)
    if week.image_shifts:
        yield "image-guidance shifts, no departures, follow"
        yield from map(event_words, week.image_shifts)
    if week.late_fractions:
        yield f"entered late: fraction {', '.join(map(str, week.late_fractions))}"
    yield from map(break_words, week.breaks)
    for check in week.position_checks:
        if check.checked_by:
            yield f"position {check.position} checked by {check.checked_by}, {check.checked_at}"
    for line in week.sign_offs:
        if line.who:
            yield f"review signed by {sign_off_words(line)}"
