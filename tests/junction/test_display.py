"""A console's own scale, by its zero, its sense and its form."""

import pytest

from featherlog.junction.display import shown_angle, shown_jaw
from featherlog.junction.machine import AngleForm, AngleScale, Jaw

FULL, SIGNED = AngleForm.FULL_CIRCLE, AngleForm.SIGNED


@pytest.mark.parametrize(
    ("zero", "sense", "form", "iec", "shown"),
    [
        # IEC itself, all the way round.
        (0.0, 1, FULL, 0.0, 0.0),
        (0.0, 1, FULL, -7.6, 352.4),
        (0.0, 1, FULL, 360.0, 0.0),
        (0.0, 1, SIGNED, 352.4, -7.6),
        (0.0, 1, SIGNED, 180.0, 180.0),
        (0.0, 1, SIGNED, -180.0, 180.0),
        # 180 where IEC says 0, falling as IEC rises.
        (180.0, -1, FULL, 0.0, 180.0),
        (180.0, -1, FULL, 90.0, 90.0),
        (180.0, -1, FULL, 270.0, 270.0),
        (180.0, -1, FULL, 187.6, 352.4),
        (180.0, -1, SIGNED, 187.6, -7.6),
        # Rising the other way from the same zero.
        (0.0, -1, FULL, -4.9, 4.9),
        (0.0, -1, FULL, 4.9, 355.1),
        # Noise of a turn is no full circle.
        (0.0, 1, FULL, -7e-10, 0.0),
    ],
)
def test_an_angle_on_the_console(
    zero: float, sense: int, form: AngleForm, iec: float, shown: float
) -> None:
    assert shown_angle(AngleScale(zero, sense, form), iec) == pytest.approx(shown, abs=1e-9)


@pytest.mark.parametrize(
    ("jaw", "iec", "shown"),
    [
        (Jaw.X1, -5.0, "5.0"),
        (Jaw.X2, 5.0, "5.0"),
        (Jaw.Y1, -8.6, "8.6"),
        # Past the axis.
        (Jaw.Y1, 1.2, "-1.2"),
        (Jaw.Y2, -1.2, "-1.2"),
        (Jaw.Y1, 0.0, "0.0"),
        (Jaw.Y2, -0.0, "0.0"),
    ],
)
def test_a_jaw_outward_is_positive_on_its_own_side(jaw: Jaw, iec: float, shown: str) -> None:
    assert str(shown_jaw(jaw, iec)) == shown
