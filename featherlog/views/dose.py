"""The summed junction dose of one course, as shown."""

from __future__ import annotations

from dataclasses import dataclass

from featherlog.dose.result import (
    DoseCurve,
    DoseFigures,
    DoseLine,
    JunctionDose,
)
from featherlog.views.common import Heading  # noqa: TC001 - msgspec reads annotations at run time

__all__ = ["DoseCurve", "DoseFigures", "DoseLine", "DoseView", "JunctionDose"]


@dataclass(frozen=True, slots=True)
class DoseView:
    """The dose estimate of a course; ``model`` says in a sentence what was and was not counted."""

    heading: Heading | None
    fractions: int
    delivered_fractions: int
    model: str
    junctions: tuple[JunctionDose, ...]
    caution: str
