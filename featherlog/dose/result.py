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


@dataclass(frozen=True, slots=True)
class DoseFigures:
    """Figures of one profile; percent is of ``reference_gy``, z along the axis (+ superior)."""

    reference_gy: float
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
    """One profile: planned, delivered, predicted or unfeathered; ``figures`` None when no dose."""

    name: str
    dose_gy: tuple[float, ...]
    figures: DoseFigures | None


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
