"""A field edge as a plane in the patient; free of numerical libraries."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class EdgePlane:
    """A field edge as a plane in patient axes: every r with normal · r = offset_cm."""

    normal: tuple[float, float, float]
    offset_cm: float

    def z_at(self, x_cm: float, y_cm: float) -> float:
        """Return the edge coordinate: the plane's z (cm) at lateral x and height y."""
        return (self.offset_cm - self.normal[0] * x_cm - self.normal[1] * y_cm) / self.normal[2]
