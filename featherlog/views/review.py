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
    """Dose given by the field on each side of a junction so far, Gy at its own reference.

    ``equal`` is true only when both sides also stood at the same positions in every fraction.
    """

    junction: str
    superior_field: str
    superior_gy: float
    inferior_field: str
    inferior_gy: float
    equal: bool


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
    next_shift: NextShift | None
    dose: DoseView
    ledger_head: str
    printed_at: str
    caution: str
