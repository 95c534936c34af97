from __future__ import annotations

import dataclasses
import subprocess
import sys
from typing import TYPE_CHECKING

import pytest
from small_plans import beam, course, half_beam_plan, machine, plan, position, quality

from featherlog.dose.course_sum import AxisLine
from featherlog.dose.junction_dose import junction_doses
from featherlog.dose.result import UNFINISHED
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


def test_while_a_fraction_is_unfinished_the_delivered_curve_has_gy_and_no_percent() -> None:
    begun = DeliveredBeam(2, "field", "UPPER", "A", 100.0, 100.0)
    by_name = curves("AA", [*both(1, "A"), begun])
    delivered = by_name["delivered"]
    assert (delivered.figures, delivered.note) == (None, UNFINISHED)
    assert (max(delivered.dose_gy), min(delivered.dose_gy)) == pytest.approx((3.6, 1.8), abs=1e-3)
    assert by_name["predicted"].figures.maximum_percent == pytest.approx(100.0)
    assert {curve.note for name, curve in by_name.items() if name != "delivered"} == {""}


def beside_earlier(dose_gy: float, deliveries: list[DeliveredBeam]) -> dict[str, DoseCurve]:
    """Fifteen fractions of 2 Gy at LOWER beside a field of an earlier course."""
    of = half_beam_plan("A" * 15, 2.0)
    upper, *others = of.positions[0].fields
    earlier = dataclasses.replace(upper, earlier_course="2029", earlier_dose_gy=dose_gy)
    first = dataclasses.replace(of.positions[0], fields=(earlier, *others))
    positions = (first, *of.positions[1:])
    of = dataclasses.replace(of, positions=positions)
    reference = dataclasses.replace(course(15).junctions[0], reference_dose_gy=30.0)
    between = dataclasses.replace(course(15), junctions=(reference,))
    (junction,) = junction_doses(between, of, ALDER, deliveries)
    return {curve.name: curve for curve in junction.lines[1].curves}


@pytest.mark.parametrize("fractions", [1, 2, 15])
@pytest.mark.parametrize("earlier_gy", [20.0, 30.0, 45.0])
def test_beside_an_earlier_course_each_side_is_judged_by_its_own_dose(
    fractions: int, earlier_gy: float
) -> None:
    given = [
        DeliveredBeam(number, "field", "LOWER", "A", 100.0, 100.0)
        for number in range(1, fractions + 1)
    ]
    by_name = beside_earlier(earlier_gy, given)
    for curve in by_name.values():
        figures = curve.figures
        assert figures.maximum_percent == pytest.approx(100.0, abs=0.1)
        assert figures.minimum_percent == pytest.approx(100.0, abs=0.1)
        assert (figures.over_107_cm, figures.under_95_cm) == (0.0, 0.0)
    delivered = by_name["delivered"].figures
    sides = sorted([delivered.cold_reference_gy, delivered.reference_gy])
    assert sides == pytest.approx(sorted([earlier_gy, 2.0 * fractions]))


def test_an_earlier_course_alone_has_no_figures_yet() -> None:
    assert beside_earlier(30.0, [])["delivered"].figures is None


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
