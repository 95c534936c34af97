from __future__ import annotations

import dataclasses
import subprocess
import sys
from typing import TYPE_CHECKING

import pytest
from small_plans import beam, course, half_beam_plan, machine, plan, position, quality

from featherlog.dose.course_sum import AxisLine
from featherlog.dose.junction_dose import junction_doses
from featherlog.dose.window import junction_window
from featherlog.geometry.patient import PatientPosition
from featherlog.sequence.progress import DeliveredBeam

if TYPE_CHECKING:
    from featherlog.dose.result import DoseCurve

ALDER = machine(quality(0.6))


def both(fraction: int, label: str) -> list[DeliveredBeam]:
    return [
        DeliveredBeam(fraction, "field", name, label, 100.0, 100.0) for name in ("UPPER", "LOWER")
    ]


def curves(
    labels: str,
    deliveries: list[DeliveredBeam],
    gap_cm: float = 0.0,
    place: str = "match depth, spinal cord",
) -> dict[str, DoseCurve]:
    (junction,) = junction_doses(
        course(len(labels)), half_beam_plan(labels, gap_cm=gap_cm), ALDER, deliveries
    )
    line = next(line for line in junction.lines if line.place == place)
    return {curve.name: curve for curve in line.curves}


def test_lines_lie_at_skin_match_critical_and_asked_depths_once_each() -> None:
    (junction,) = junction_doses(
        course(3, report_depths_cm=(8.0, 5.0)), half_beam_plan("ABC"), ALDER, [], (8.0, 2.0)
    )
    assert [(line.place, line.depth_cm, line.x_cm, line.y_cm) for line in junction.lines] == [
        ("entrance skin", 0.0, 0.0, 0.0),
        ("match depth, spinal cord", 5.0, 0.0, -5.0),
        ("asked depth", 8.0, 0.0, -8.0),
        ("asked depth", 2.0, 0.0, -2.0),
    ]
    assert junction.position_z_cm == (("A", 0.0), ("B", -1.0), ("C", -2.0))


def test_every_curve_runs_along_the_whole_line() -> None:
    (junction,) = junction_doses(course(3), half_beam_plan("ABC"), ALDER, both(1, "A"))
    for line in junction.lines:
        assert [curve.name for curve in line.curves] == [
            "planned",
            "delivered",
            "predicted",
            "unfeathered",
        ]
        assert {len(curve.dose_gy) for curve in line.curves} == {len(line.z_cm)}


def test_feathering_shares_the_overlap_between_positions() -> None:
    by_name = curves("ABC", [], gap_cm=-0.1)
    assert by_name["unfeathered"].figures.maximum_percent == pytest.approx(111.2, abs=0.05)
    # 11.2 % at the middle position, a third of the time, and 0.2 % from each neighbour.
    assert by_name["planned"].figures.maximum_percent == pytest.approx(103.88, abs=0.05)
    assert by_name["planned"].figures.over_107_cm == 0.0
    assert by_name["unfeathered"].figures.over_107_cm > 0.3


def test_before_any_delivery_the_delivered_curve_has_no_figures() -> None:
    by_name = curves("ABC", [])
    assert by_name["delivered"].figures is None
    assert set(by_name["delivered"].dose_gy) == {0.0}
    assert by_name["predicted"] == dataclasses.replace(by_name["planned"], name="predicted")


def test_delivered_dose_is_measured_against_the_complete_fractions() -> None:
    figures = curves("AABB", both(1, "A") + both(2, "A"))["delivered"].figures
    assert figures.reference_gy == pytest.approx(3.6)
    assert figures.maximum_percent == pytest.approx(100.0)


def test_a_fraction_too_many_shows_as_excess() -> None:
    figures = curves("AA", both(1, "A") + both(2, "A") + both(3, "A"))["delivered"].figures
    assert figures.maximum_percent == pytest.approx(150.0)


def test_a_wrong_position_stays_in_the_prediction() -> None:
    deliveries = [
        DeliveredBeam(1, "field", "UPPER", "A", 100.0, 100.0),
        DeliveredBeam(1, "field", "LOWER", "B", 100.0, 100.0),
    ]
    by_name = curves("AAAAAA", deliveries)
    assert by_name["planned"].figures.minimum_percent == pytest.approx(100.0)
    # A strip 1 cm wide without one of six fractions.
    assert by_name["predicted"].figures.minimum_percent == pytest.approx(100 - 84 / 6, abs=0.1)


def window_of(
    *, upper_end_cm: float, lower_end_cm: float = -15.0, gap_cm: float = 0.0
) -> tuple[float, float]:
    positions = [
        position(
            label,
            [
                [beam("UPPER", inferior_jaw_cm=z_cm + gap_cm / 2, superior_jaw_cm=upper_end_cm)],
                [beam("LOWER", inferior_jaw_cm=lower_end_cm, superior_jaw_cm=z_cm - gap_cm / 2)],
            ],
        )
        for label, z_cm in (("A", 0.0), ("B", -1.0))
    ]
    line = AxisLine(0.0, -5.0, PatientPosition.HFS, ALDER)
    return junction_window(line, plan(positions, [("A", 1.8)]), 0)


def test_the_window_holds_every_position_with_a_margin() -> None:
    assert window_of(upper_end_cm=15.0) == pytest.approx((-2.5, 1.5))
    assert window_of(upper_end_cm=15.0, gap_cm=0.4) == pytest.approx((-2.7, 1.7))


def test_the_window_ends_before_the_penumbra_of_a_near_border() -> None:
    four_sigma_cm = 4 * 0.6 / 1.68324
    low_cm, high_cm = window_of(upper_end_cm=2.0, lower_end_cm=-3.0)
    assert (low_cm, high_cm) == pytest.approx((-3 + four_sigma_cm, 2 - four_sigma_cm), abs=1e-3)


def test_the_window_of_a_very_short_field_still_holds_the_meeting_edges() -> None:
    assert window_of(upper_end_cm=0.5) == pytest.approx((-2.5, 0.0))


def test_what_is_shown_needs_no_numerical_library() -> None:
    code = "import sys, featherlog.views.dose; sys.exit('numpy' in sys.modules)"
    assert subprocess.run([sys.executable, "-c", code], check=False).returncode == 0
