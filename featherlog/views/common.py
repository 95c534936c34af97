"""Parts that several views share."""

from __future__ import annotations

from dataclasses import dataclass


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
    """One departure as listed: ``grade`` is its kind of consequence, ``reason`` may be empty."""

    number: int
    fraction: int
    kind: str
    grade: str
    detail: str
    reason: str
