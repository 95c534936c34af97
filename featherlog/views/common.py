"""Parts that several views share."""

from __future__ import annotations

from dataclasses import dataclass

from featherlog.dose.departure_dose import PlaceDose

__all__ = ["DepartureLine", "Heading", "PlaceDose"]


@dataclass(frozen=True, slots=True)
class Heading:
    """Who and what a page is about; ``identifiers`` are (name, value) pairs."""

    course: str
    patient_name: str
    identifiers: tuple[tuple[str, str], ...]
    site: str
    patient_position: str
    machine: str
    plan_label: str
    state: str
    revision: str
    demo: bool


@dataclass(frozen=True, slots=True)
class DepartureLine:
    """One departure as listed: ``grade`` is its kind of consequence, ``reason`` may be empty.

    ``status`` is open, explained, decided, or corrected where its record was put right; it waits
    for a decision until one of the last two. ``doses`` are its figures for ideal edges, ``flags``
    name the department's reporting thresholds that they reach: nothing is classified.
    """

    number: int
    fraction: int
    kind: str
    grade: str
    detail: str
    reason: str
    status: str = "open"
    decision: str = ""
    doses: tuple[PlaceDose, ...] = ()
    flags: tuple[str, ...] = ()

    @property
    def undecided(self) -> bool:
        """Tell whether somebody still has to decide on it."""
        return self.status in ("open", "explained")
