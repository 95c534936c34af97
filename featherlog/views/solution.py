"""A solved design as a physicist checks it: settings, shares, warnings and dose."""

from __future__ import annotations

from dataclasses import dataclass

from featherlog.junction.design import Course  # noqa: TC001 - msgspec reads annotations at run time
from featherlog.junction.plan import PositionSettings  # noqa: TC001 - as above
from featherlog.views.dose import DoseView  # noqa: TC001 - as above


@dataclass(frozen=True, slots=True)
class BlockLine:
    """Consecutive fractions at one position, with the projected dates of the first and last."""

    first_fraction: int
    last_fraction: int
    position: str
    first_date: str
    last_date: str


@dataclass(frozen=True, slots=True)
class SolutionView:
    """A design with everything that follows from it; ``shares`` are fractions by position."""

    course: Course
    machine: str
    positions: tuple[PositionSettings, ...]
    blocks: tuple[BlockLine, ...]
    shares: tuple[tuple[str, int], ...]
    shift_fractions: tuple[int, ...]
    warnings: tuple[str, ...]
    dose: DoseView
    caution: str
