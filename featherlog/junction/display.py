"""A console's own scale beside IEC 61217: never guessed, only from the machine's description."""

from __future__ import annotations

from typing import TYPE_CHECKING

from featherlog.junction.machine import AngleForm, Jaw

if TYPE_CHECKING:
    from featherlog.junction.machine import AngleScale


def shown_angle(scale: AngleScale, iec_deg: float) -> float:
    """Return the angle (degrees) a console shows for an IEC 61217 angle."""
    turned = round(scale.sense * (iec_deg - scale.zero_deg), 6) % 360.0  # noise just below 0 is 0
    if scale.form is AngleForm.SIGNED and turned > 180.0:  # noqa: PLR2004 - half a turn
        return turned - 360.0
    return turned


def shown_jaw(jaw: Jaw, iec_cm: float) -> float:
    """Return a jaw position (cm) that is positive on the jaw's own side of the axis."""
    return (iec_cm if jaw in (Jaw.X2, Jaw.Y2) else -iec_cm) + 0.0
