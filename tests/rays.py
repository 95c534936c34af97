"""Field edges by tracing rays from the source past a jaw: an own reading of IEC 61217.

It shares no code with the program. Every step is a change of coordinates written out, from the
beam limiting device through the gantry and the room to the table top and the patient.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import cos, radians, sin

Triple = tuple[float, float, float]


@dataclass(frozen=True)
class Setting:
    """Angles (degrees), isocentre (cm) and source-axis distance (cm) of one beam."""

    position: str
    gantry_deg: float
    collimator_deg: float
    couch_deg: float
    isocentre_cm: Triple
    sad_cm: float = 100.0


def in_patient(beam: Setting, device: Triple) -> Triple:
    """Carry a point in beam limiting device coordinates to the patient."""
    turn, lean, swing = (
        radians(angle) for angle in (beam.collimator_deg, beam.gantry_deg, beam.couch_deg)
    )
    x, y, z = device
    x, y = x * cos(turn) - y * sin(turn), x * sin(turn) + y * cos(turn)
    # Facing the gantry, a clockwise turn takes up to the right.
    x, z = x * cos(lean) + z * sin(lean), z * cos(lean) - x * sin(lean)
    # The table turns counter-clockwise seen from above, so what is fixed turns the other way in it.
    x, y = x * cos(swing) + y * sin(swing), y * cos(swing) - x * sin(swing)
    head_first, supine = beam.position.startswith("HF"), beam.position.endswith("S")
    # Head-first supine the patient's left is on the right of a viewer who faces the gantry; lying
    # prone or feet first changes that hand over, and both together change it back.
    left = x if head_first == supine else -x
    posterior = -z if supine else z
    superior = y if head_first else -y
    xi, yi, zi = beam.isocentre_cm
    return xi + left, yi + posterior, zi + superior


def source(beam: Setting) -> Triple:
    return in_patient(beam, (0.0, 0.0, beam.sad_cm))


def jaw_edge(beam: Setting, jaw: str, jaw_cm: float, along_cm: float) -> Triple:
    """Return a point of a jaw's edge at the isocentre plane, ``along_cm`` along that edge."""
    device = (jaw_cm, along_cm, 0.0) if jaw.startswith("X") else (along_cm, jaw_cm, 0.0)
    return in_patient(beam, device)


def ray(beam: Setting, jaw: str, jaw_cm: float, along_cm: float, part: float) -> Triple:
    """Follow the ray past a jaw's edge to ``part`` of the way to the isocentre plane."""
    start, past = source(beam), jaw_edge(beam, jaw, jaw_cm, along_cm)
    x, y, z = (a + part * (b - a) for a, b in zip(start, past, strict=True))
    return x, y, z


def edge_z(beam: Setting, jaw: str, jaw_cm: float, x_cm: float, y_cm: float) -> float:
    """Return the z, at lateral x and height y, of the plane through source and jaw edge."""
    a = source(beam)
    b, c = (jaw_edge(beam, jaw, jaw_cm, along) for along in (-10.0, 10.0))
    u, v = ([p - q for p, q in zip(point, a, strict=True)] for point in (b, c))
    nx, ny, nz = (
        u[1] * v[2] - u[2] * v[1],
        u[2] * v[0] - u[0] * v[2],
        u[0] * v[1] - u[1] * v[0],
    )
    return a[2] - (nx * (x_cm - a[0]) + ny * (y_cm - a[1])) / nz
