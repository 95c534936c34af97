"""What a treatment machine can do, and how its beams behave at their edges."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import date  # noqa: TC003 - msgspec reads the annotations at run time
from enum import StrEnum


class Jaw(StrEnum):
    """Beam limiting device jaws, as in IEC 61217."""

    X1 = "X1"
    X2 = "X2"
    Y1 = "Y1"
    Y2 = "Y2"


@dataclass(frozen=True, slots=True)
class Range:
    """A closed range of allowed values, in the unit of its owner."""

    low: float
    high: float

    def holds(self, value: float, slack: float = 1e-9) -> bool:
        """Tell whether ``value`` lies in the range, allowing for rounding noise."""
        return self.low - slack <= value <= self.high + slack


@dataclass(frozen=True, slots=True)
class Steps:
    """The smallest step that can be set: jaws and table in cm, angles in degrees."""

    jaw_cm: float
    table_cm: float
    angle_deg: float


@dataclass(frozen=True, slots=True)
class Tolerances:
    """How far a delivered or measured value may lie from the planned one."""

    jaw_cm: float
    table_cm: float
    angle_deg: float
    meterset_percent: float


@dataclass(frozen=True, slots=True)
class DepthTable:
    """Values against depth below the entrance surface (cm), depths rising."""

    depth_cm: tuple[float, ...]
    value: tuple[float, ...]


@dataclass(frozen=True, slots=True)
class BeamQuality:
    """The edge model of one energy.

    ``penumbra_80_20_cm`` holds the 80-20 % width of an edge by depth; ``transmission`` is the
    fraction of the open-field dose found far outside the field (jaw and head leakage).
    """

    name: str
    penumbra_80_20_cm: DepthTable
    transmission: float


class AngleForm(StrEnum):
    """How a console writes angles."""

    FULL_CIRCLE = "0 to 360"
    SIGNED = "-180 to 180"


@dataclass(frozen=True, slots=True)
class AngleScale:
    """How a console shows an IEC 61217 angle.

    ``zero_deg`` is the IEC angle shown as 0, ``sense`` +1 where the shown angle rises with the IEC
    angle and -1 where it falls.
    """

    zero_deg: float
    sense: int
    form: AngleForm


@dataclass(frozen=True, slots=True)
class DisplayScale:
    """The console's own scale, shown beside IEC 61217.

    With ``jaws_outward`` every jaw reads positive on its own side of the axis and negative when it
    has passed it.
    """

    gantry: AngleScale
    collimator: AngleScale
    couch: AngleScale
    jaws_outward: bool


@dataclass(frozen=True, slots=True)
class Machine:
    """One treatment machine.

    Jaw travel is in signed IEC 61217 positions at the isocentre plane (cm): X1 and Y1 lie on the
    negative side of the beam axis, X2 and Y2 on the positive, and a jaw that may pass the axis has
    a range that does. Collimator and couch ranges are signed degrees about zero. On its
    ``closed_dates`` nobody is treated. ``display`` is None where the console shows IEC 61217.
    """

    name: str
    sad_cm: float
    jaw_travel_cm: dict[Jaw, Range]
    largest_opening_cm: float
    gantry_deg: Range
    collimator_deg: Range
    couch_deg: Range
    steps: Steps
    tolerances: Tolerances
    qualities: tuple[BeamQuality, ...]
    closed_dates: tuple[date, ...] = ()
    display: DisplayScale | None = None

    def quality(self, name: str) -> BeamQuality:
        """Return the edge model of the named energy; ``KeyError`` where there is none."""
        for quality in self.qualities:
            if quality.name == name:
                return quality
        raise KeyError(name)
