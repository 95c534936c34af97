"""The dose table: every point once, unrounded, with its caution and no formulas."""

from __future__ import annotations

import csv
from io import StringIO

import pytest

from featherlog.exchange.dose_csv import dose_csv
from featherlog.views.common import Heading
from featherlog.views.dose import DoseCurve, DoseLine, DoseView, JunctionDose
from featherlog.words import DEMO_NOTICE, DOSE_CAUTION


def _view(junction: str = "thigh", heading: Heading | None = None) -> DoseView:
    curves = (DoseCurve("planned", (10.0, 1 / 3), None), DoseCurve("delivered", (0.0, 4.0), None))
    line = DoseLine("match depth", 8.0, 10.0, 0.0, (-1.0, 1.5), curves)
    dose = JunctionDose(junction, 20.0, (("A", 0.0),), (line,))
    return DoseView(heading, 10, 2, "Edges alone.", (dose,), DOSE_CAUTION)


def _rows(text: str) -> list[dict[str, str]]:
    lines = [line for line in text.splitlines() if not line.startswith("#")]
    return list(csv.DictReader(StringIO("\n".join(lines))))


def test_every_point_of_every_curve_is_one_row() -> None:
    rows = _rows(dose_csv(_view()))
    assert [(row["curve"], row["z_cm"]) for row in rows] == [
        ("planned", "-1.0"),
        ("planned", "1.5"),
        ("delivered", "-1.0"),
        ("delivered", "1.5"),
    ]
    assert float(rows[1]["dose_gy"]) == 1 / 3
    assert float(rows[0]["percent"]) == 50.0
    assert {row["place"] for row in rows} == {"match depth"}


def test_the_caution_and_the_model_stand_first() -> None:
    assert dose_csv(_view()).splitlines()[:2] == [f"# {DOSE_CAUTION}", "# Edges alone."]


def test_a_practice_table_says_so_and_names_its_course_but_not_the_patient() -> None:
    heading = Heading(
        course="FH-2041",
        patient_name="Juniper Lark",
        identifiers=(),
        site="thigh",
        patient_position="HFS",
        machine="Alder",
        plan_label="THIGH1",
        state="approved",
        revision="r1",
        demo=True,
    )
    text = dose_csv(_view(heading=heading))
    assert text.splitlines()[:2] == [f"# {DEMO_NOTICE}", "# course FH-2041, revision r1"]
    assert "Juniper" not in text


@pytest.mark.parametrize("name", ["=1+1", "+1", "-1", "@SUM(A1)", "\t=1", "\r=1"])
def test_no_text_cell_can_be_a_formula(name: str) -> None:
    [cell] = {row["junction"] for row in _rows(dose_csv(_view(name)).replace("\r", " "))}
    assert cell.startswith("'")


def test_a_view_without_junctions_still_has_its_columns() -> None:
    empty = DoseView(None, 0, 0, "Nothing.", (), DOSE_CAUTION)
    assert dose_csv(empty).splitlines()[-1].startswith("junction,place,depth_cm")
