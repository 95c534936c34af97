"""What the dose estimate says, as plain data that a view shows unchanged.

Only the standard library is needed to read it. Doses in Gy, lengths in cm, z along the junction
axis (+ superior).
"""

from __future__ import annotations

from dataclasses import dataclass

PLANNED = "planned"
DELIVERED = "delivered"
PREDICTED = "predicted"
UNFEATHERED = "unfeathered"

UNFINISHED = "includes an unfinished fraction, so no percent is given"


@dataclass(frozen=True, slots=True)
class DoseFigures:
    """Figures of one profile; z along the axis (+ superior).

    Maximum and hot length are against ``reference_gy``, minimum and cold length against
    ``cold_reference_gy``. They differ beside a field of an earlier course: hot is judged against
    the higher dose of the two sides, cold against the lower.
    """

    reference_gy: float
    cold_reference_gy: float
    maximum_gy: float
    maximum_percent: float
    maximum_z_cm: float
    minimum_gy: float
    minimum_percent: float
    minimum_z_cm: float
    over_107_cm: float
    under_95_cm: float


@dataclass(frozen=True, slots=True)
class DoseCurve:
    """One profile: planned, delivered, predicted or unfeathered.

    ``figures`` is None where there is no dose yet, and where ``note`` says why no percent is given.
    """

    name: str
    dose_gy: tuple[float, ...]
    figures: DoseFigures | None
    note: str = ""


@dataclass(frozen=True, slots=True)
class DoseLine:
    """Profiles along the junction axis at one depth."""

    place: str
    depth_cm: float
    x_cm: float
    y_cm: float
    z_cm: tuple[float, ...]
    curves: tuple[DoseCurve, ...]


@dataclass(frozen=True, slots=True)
class JunctionDose:
    """All depths of one junction; ``position_z_cm`` marks the match points by position label."""

    junction: str
    reference_dose_gy: float
    position_z_cm: tuple[tuple[str, float], ...]
    lines: tuple[DoseLine, ...]
