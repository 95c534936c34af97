"""The chart round's page for one course."""

from __future__ import annotations

from dataclasses import dataclass

from featherlog.views.common import (  # noqa: TC001 - msgspec reads annotations at run time
    DepartureLine,
    Heading,
)
from featherlog.views.day import NextShift  # noqa: TC001 - as above
from featherlog.views.dose import DoseView  # noqa: TC001 - as above


@dataclass(frozen=True, slots=True)
class ShareLine:
    """Fractions at one position: planned for the course, planned so far, and delivered."""

    position: str
    planned: float
    planned_so_far: float
    delivered: float


@dataclass(frozen=True, slots=True)
class GridCell:
    """One field in one fraction: delivered position (empty before) and percent of its meterset."""

    field: str
    delivered_position: str
    delivered_percent: float


@dataclass(frozen=True, slots=True)
class GridRow:
    """One fraction: planned position, when and by whom it was treated, and each field's cell."""

    fraction: int
    planned_position: str
    delivered_at: str
    performer: str
    verifier: str
    cells: tuple[GridCell, ...]


@dataclass(frozen=True, slots=True)
class SidesLine:
    """What the field on each side of a junction has given so far: Gy, and fractions' worth.

    ``equal`` compares fractions, for each field may have its own dose. It is true only when both
    sides also stood at the same positions in every fraction, and None where one is a field of an
    earlier course, which has no fractions to compare.
    """

    junction: str
    superior_field: str
    superior_gy: float
    superior_fractions: float | None
    inferior_field: str
    inferior_gy: float
    inferior_fractions: float | None
    equal: bool | None


@dataclass(frozen=True, slots=True)
class ChangeLine:
    """Entries of one kind since the last sign-off; ``words`` holds a phrase for each."""

    kind: str
    count: int
    words: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class ReviewEvent:
    """Something that happened beside the fractions; ``fraction`` None where it belongs to none."""

    entry: int
    at: str
    kind: str
    who: str
    fraction: int | None
    words: str


@dataclass(frozen=True, slots=True)
class StripLine:
    """How often a strip between neighbouring match points was covered: a count, not a dose."""

    junction: str
    low_cm: float
    high_cm: float
    expected_count: float
    covered_count: float


@dataclass(frozen=True, slots=True)
class BreakLine:
    """Treatment days in a row without a fraction, from the first to the last (ISO 8601)."""

    first_date: str
    last_date: str
    treatment_days: int


@dataclass(frozen=True, slots=True)
class PositionCheckLine:
    """A position that the course was shifted to, and its physics check; empty while outstanding."""

    position: str
    first_fraction: int
    checked_by: str
    checked_at: str


@dataclass(frozen=True, slots=True)
class SignOffLine:
    """The last review signed by a role, empty where there is none, and the entries since."""

    role: str
    who: str
    at: str
    entries_since: int


@dataclass(frozen=True, slots=True)
class WeekView:
    """What a weekly review looks at beside the sums.

    ``since`` is when a review was last signed, empty where none was. ``changes``,
    ``image_shifts`` and ``events`` tell of what came after; ``outstanding`` says what still has to
    be done, a sentence for each. ``reviewed_to`` is the course's last entry, which a signature
    covers.
    """

    since: str
    changes: tuple[ChangeLine, ...]
    events: tuple[ReviewEvent, ...]
    image_shifts: tuple[ReviewEvent, ...]
    late_fractions: tuple[int, ...]
    breaks: tuple[BreakLine, ...]
    position_checks: tuple[PositionCheckLine, ...]
    sign_offs: tuple[SignOffLine, ...]
    outstanding: tuple[str, ...]
    reviewed_to: int


@dataclass(frozen=True, slots=True)
class ReviewView:
    """What was delivered, what it adds up to, and what is open."""

    heading: Heading
    fractions: int
    delivered_fractions: int
    departures: tuple[DepartureLine, ...]
    shares: tuple[ShareLine, ...]
    sides: tuple[SidesLine, ...]
    grid: tuple[GridRow, ...]
    strips: tuple[StripLine, ...]
    week: WeekView
    next_shift: NextShift | None
    dose: DoseView
    ledger_head: str
    printed_at: str
    caution: str
