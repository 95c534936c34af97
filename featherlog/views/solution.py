"""A solved design as a physicist checks it: settings, shares, warnings and dose."""

from __future__ import annotations

from dataclasses import dataclass

from featherlog.junction.design import Course  # noqa: TC001 - msgspec reads annotations at run time
from featherlog.junction.hand_check import HandCheck  # noqa: TC001 - as above
from featherlog.junction.plan import PositionSettings  # noqa: TC001 - as above
from featherlog.views.common import Heading  # noqa: TC001 - as above
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
class Signature:
    """One act on the way to approval: what it was, by whom and when; empty where still open."""

    act: str
    name: str
    at: str


@dataclass(frozen=True, slots=True)
class SolutionView:
    """A design with everything that follows from it; ``shares`` are fractions by position.

    ``heading``, ``content_hash`` and ``signatures`` belong to a stored revision, whose approval
    refers to that content; a design that was only solved has none.
    """

    heading: Heading | None
    content_hash: str
    signatures: tuple[Signature, ...]
    returned_reason: str
    course: Course
    machine: str
    positions: tuple[PositionSettings, ...]
    blocks: tuple[BlockLine, ...]
    shares: tuple[tuple[str, float], ...]
    more_even: tuple[BlockLine, ...]
    shift_fractions: tuple[int, ...]
    warnings: tuple[str, ...]
    hand_checks: tuple[HandCheck, ...]
    dose: DoseView
    printed_at: str
    caution: str
