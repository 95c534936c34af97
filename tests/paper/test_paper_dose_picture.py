from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING
from xml.etree import ElementTree as ET

import pytest
from hypothesis import given
from hypothesis import strategies as st
from pdf_runs import font_files, overlapping, page_runs, page_texts, squeezed
from reportlab.graphics.shapes import Drawing, PolyLine, String

from featherlog.dose.result import UNFINISHED
from featherlog.errors import NotFoundError
from featherlog.paper.dose_picture import dose_drawing, dose_pdf, dose_svg, line_drawing
from featherlog.paper.plot import ticks
from featherlog.paper.style import SMALLEST_PT

if TYPE_CHECKING:
    from featherlog.views.dose import DoseView, JunctionDose

SVG = "{http://www.w3.org/2000/svg}"


def curves(drawing: Drawing) -> list[PolyLine]:
    return [item for item in drawing.contents if isinstance(item, PolyLine)]


def label_texts(drawing: Drawing) -> set[str]:
    return {item.text for item in drawing.contents if isinstance(item, String)}


def test_each_curve_has_a_line_style_of_its_own(junction_dose: JunctionDose) -> None:
    drawn = curves(dose_drawing(junction_dose, "match depth"))
    assert len({tuple(curve.strokeDashArray or ()) for curve in drawn}) == len(drawn) == 4


def test_curves_levels_positions_axes_and_ends_are_named(junction_dose: JunctionDose) -> None:
    expected = {"planned", "delivered", "predicted", "unfeathered", "95 %", "100 %", "107 %"}
    expected |= {"A", "B", "C", "HEAD", "FEET", "dose, Gy", "z, cm (+ toward the head)"}
    assert expected <= label_texts(dose_drawing(junction_dose, "match depth"))


def test_the_superior_end_lies_left(junction_dose: JunctionDose) -> None:
    drawing = dose_drawing(junction_dose, "skin")
    marks = {item.text: item.x for item in drawing.contents if isinstance(item, String)}
    assert marks["A"] < marks["B"] < marks["C"]
    assert marks["HEAD"] < marks["FEET"]


def test_higher_dose_lies_higher(junction_dose: JunctionDose) -> None:
    drawing = dose_drawing(junction_dose, "spinal cord")
    levels = {item.text: item.y for item in drawing.contents if isinstance(item, String)}
    assert levels["95 %"] < levels["100 %"] < levels["107 %"]


def test_an_unknown_place_is_refused_with_the_known_ones(junction_dose: JunctionDose) -> None:
    with pytest.raises(NotFoundError, match=r"J1 .*skin, match depth, spinal cord"):
        dose_drawing(junction_dose, "lens")


def test_svg_is_xml_with_every_curve_and_its_words(junction_dose: JunctionDose) -> None:
    root = ET.fromstring(dose_svg(junction_dose, "match depth"))  # noqa: S314 - our own output
    points = len(junction_dose.lines[0].z_cm)
    drawn = [line.get("points", "").split() for line in root.iter(f"{SVG}polyline")]
    assert [len(coordinates) for coordinates in drawn] == [2 * points] * 4
    words = {text.text for text in root.iter(f"{SVG}text")}
    assert {"planned", "107 %", "HEAD"} <= words
    assert root.findtext(f"{SVG}title") == "Junction J1, dose along the axis: match depth"


def test_svg_is_repeatable(junction_dose: JunctionDose) -> None:
    assert dose_svg(junction_dose, "skin") == dose_svg(junction_dose, "skin")


def test_each_junction_has_a_page_with_all_its_depths_and_figures(dose_view: DoseView) -> None:
    pages = page_texts(dose_pdf(dose_view))
    assert len(pages) == 2
    for page, junction in zip(pages, dose_view.junctions, strict=True):
        assert f"JUNCTION{junction.junction}" in page
        assert squeezed(dose_view.caution) in page
        assert squeezed(dose_view.model) in page
        for line in junction.lines:
            assert squeezed(line.place) in page
            for curve in line.curves:
                assert curve.figures is not None
                assert f"{curve.name}{curve.figures.maximum_gy:.2f}" in page


def test_a_design_without_a_patient_has_a_page_too(dose_view: DoseView) -> None:
    pages = page_texts(dose_pdf(replace(dose_view, heading=None)))
    assert "Finch" not in "".join(pages)


def test_dose_pages_are_legible_embedded_and_repeatable(dose_view: DoseView) -> None:
    data = dose_pdf(dose_view, "letter")
    for runs in page_runs(data):
        assert min(run.size for run in runs) >= SMALLEST_PT
        assert overlapping(runs) == []
    assert all(font_files(data).values())
    assert data == dose_pdf(dose_view, "letter")


@given(st.floats(-100, 100), st.floats(0.01, 200))
def test_ticks_are_few_evenly_spaced_and_inside(low: float, span: float) -> None:
    values = ticks(low, low + span)
    assert 2 <= len(values) <= 7
    assert low - 1e-6 <= values[0]
    assert values[-1] <= low + span + 1e-6


def test_two_depths_of_one_name_are_drawn_and_listed_apart(dose_view: DoseView) -> None:
    junction = dose_view.junctions[0]
    skin, match, _ = junction.lines
    asked = (replace(skin, place="asked depth"), replace(match, place="asked depth"))
    view = replace(dose_view, junctions=(replace(junction, lines=asked),))
    (page,) = page_texts(dose_pdf(view))
    for line in asked:
        figures = line.curves[0].figures
        assert figures is not None
        assert f"askeddepth,{line.depth_cm:.1f}cmplanned{figures.maximum_gy:.2f}" in page
    heights = {
        curves(line_drawing(junction, line, width=400, height=150))[0].points[101] for line in asked
    }
    assert len(heights) == 2


def test_every_row_of_percents_names_its_own_reference(dose_view: DoseView) -> None:
    junction = dose_view.junctions[0]
    line = junction.lines[0]
    own = tuple(
        replace(curve, figures=replace(curve.figures, reference_gy=12.6, cold_reference_gy=3.2))
        for curve in line.curves
        if curve.name == "delivered" and curve.figures is not None
    )
    view = replace(dose_view, junctions=(replace(junction, lines=(replace(line, curves=own),)),))
    (page,) = page_texts(dose_pdf(view))
    assert "100%isGy" in page
    assert "0.000.4012.6;3.2" in page


def test_a_curve_with_an_unfinished_fraction_has_gy_and_words(dose_view: DoseView) -> None:
    junction = dose_view.junctions[0]
    line = junction.lines[0]
    curves_now = tuple(
        replace(curve, figures=None, note=UNFINISHED) if curve.name == "delivered" else curve
        for curve in line.curves
    )
    lines = (replace(line, curves=curves_now),)
    view = replace(dose_view, junctions=(replace(junction, lines=lines),))
    (page,) = page_texts(dose_pdf(view))
    dose_gy = next(curve.dose_gy for curve in line.curves if curve.name == "delivered")
    said = f"delivered{max(dose_gy):.2f}down to {min(dose_gy):.2f} Gy; {UNFINISHED}"
    assert squeezed(said) in page
