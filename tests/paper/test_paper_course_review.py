from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

from pdf_runs import font_files, overlapping, page_runs, page_texts, squeezed, whole_text

from featherlog.paper.course_review import course_review
from featherlog.paper.review_grid import departs
from featherlog.paper.style import MARGIN_PT, PAGE_SIZES, SMALLEST_PT
from featherlog.views.common import PlaceDose
from featherlog.views.review import GridCell, GridRow, ShareLine
from featherlog.views.review_words import departure_notes, strips_words, week_words
from featherlog.words import DEMO_NOTICE, RECORD_CAUTION

if TYPE_CHECKING:
    from featherlog.views.review import ReviewView


def test_twenty_fractions_and_two_junctions_fit_one_page(review: ReviewView) -> None:
    assert len(page_texts(course_review(review))) == 1


def test_a_long_course_goes_on_to_a_second_page_under_the_same_heading(
    long_review: ReviewView,
) -> None:
    pages = page_texts(course_review(long_review, "letter"))
    assert len(pages) == 2
    for page in pages:
        for words in ("FH-004217", long_review.ledger_head, DEMO_NOTICE, RECORD_CAUTION):
            assert squeezed(words) in page
    assert "40" in pages[0]


def test_exceptions_come_before_everything_else(review: ReviewView) -> None:
    text = whole_text(course_review(review))
    order = [
        "EXCEPTIONS",
        "JunctionJ1:thetwosideshavenotbeengiventhesame.",
        "Noverifierisnamedforfraction4.",
        "UpperspinetreatedatA,plannedB(reason:marksmisread)",
        "Outstanding:positionBwasfirsttreatedinfraction6:physicscheckoutstanding",
        "7of20fractionsdelivered",
    ]
    places = [text.index(words) for words in order]
    assert places == sorted(places)


def test_an_uneventful_course_says_so(review: ReviewView) -> None:
    grid = tuple(replace(row, verifier=row.performer) for row in review.grid)
    sides = tuple(replace(side, equal=True) for side in review.sides)
    week = replace(review.week, outstanding=())
    calm = replace(review, departures=(), sides=sides, grid=grid, week=week)
    assert "EXCEPTIONSnone" in whole_text(course_review(calm))


def test_shares_sides_next_shift_and_figures_are_on_the_page(review: ReviewView) -> None:
    text = whole_text(course_review(review))
    assert "A1055B522C500" in text
    assert "12.60Cranial11.52UpperspineNO" in text
    assert "fraction11,topositionC,projected2031-03-17" in text
    for junction in review.dose.junctions:
        for curve in junction.lines[1].curves:
            assert curve.figures is not None
            assert f"{curve.name}{curve.figures.maximum_gy:.2f}" in text
    assert squeezed(review.dose.caution) in text
    assert "95%" in text
    assert "107%" in text


def test_strip_counts_and_what_came_since_the_last_sign_off_are_on_the_page(
    review: ReviewView,
) -> None:
    text = whole_text(course_review(review))
    for words in (*strips_words(review.strips), *week_words(review.week)):
        assert squeezed(words) in text
    assert "z−1.0to0.0cm5.7of6.7" in text
    assert "fractionrecorded(2):fraction6,7;" in text
    assert "acountandnotadose" in text


def test_a_departure_bears_its_figures_flags_and_decision(review: ReviewView) -> None:
    dose = PlaceDose("strip at J1", 1.0, 0.0, 1.8, 0.0, -1.8, 21.6, 23.4, 92.3)
    line = replace(
        review.departures[0],
        status="decided",
        decision="shares stay",
        doses=(dose,),
        flags=("100.0 %, beyond the department's reporting threshold",),
    )
    text = whole_text(course_review(replace(review, departures=(line,))))
    for words in departure_notes(line):
        assert squeezed(words) in text
    assert "1.0cmwide,0.00Gyinthisfraction(0%),21.60of23.40Gyinthecourse(92.3%)" in text
    assert "Decision:sharesstay.decided." in text


def test_a_side_of_an_earlier_course_is_no_exception(review: ReviewView) -> None:
    (side,) = review.sides
    earlier = replace(side, superior_fractions=None, equal=None)
    text = whole_text(course_review(replace(review, sides=(earlier,))))
    assert "earliercourse" in text
    assert "thetwosideshavenotbeengiventhesame" not in text


def test_the_grid_shows_planned_and_delivered_positions_and_who(review: ReviewView) -> None:
    text = whole_text(course_review(review))
    assert "plannedAAAAABBBBBCCCCCAAAAA" in text
    assert "UpperspineAAAAAAB40%verified✓✓✓–✓✓✓" in text
    assert "PerformedbyAshPlover(4),HazelWren(3)." in text
    assert "VerifiedbyLindenDunnock(6),nobodynamed(1)." in text


def test_a_cell_departs_by_position_by_meterset_or_by_being_left_out() -> None:
    whole = GridCell("Cranial", "B", 100.0)
    cells = (
        whole,
        GridCell("Spine", "A", 100.0),
        GridCell("Sacrum", "B", 40.0),
        GridCell("Neck", "", 0.0),
    )
    row = GridRow(6, "B", "2031-03-10", "Hazel Wren", "", cells)
    assert [departs(row, cell) for cell in cells] == [False, True, True, True]
    ahead = replace(row, cells=(cells[3],))
    assert not departs(ahead, cells[3])


def test_the_review_is_legible_inside_the_page_embedded_and_repeatable(
    long_review: ReviewView,
) -> None:
    data = course_review(long_review)
    width, _ = PAGE_SIZES["A4"]
    for runs in page_runs(data):
        assert min(run.size for run in runs) >= SMALLEST_PT
        assert overlapping(runs) == []
        assert max(run.right for run in runs) <= width - MARGIN_PT + 0.5
    assert all(font_files(data).values())
    assert data == course_review(long_review)


def test_a_course_not_begun_has_a_review(review: ReviewView) -> None:
    cells = tuple(
        replace(cell, delivered_position="", delivered_percent=0.0) for cell in review.grid[0].cells
    )
    grid = tuple(replace(row, cells=cells) for row in review.grid)
    fresh = replace(
        review, delivered_fractions=0, departures=(), sides=(), grid=grid, next_shift=None
    )
    text = whole_text(course_review(fresh))
    assert "Nofractiondeliveredyet." in text
    assert "noneleftinthiscourse" in text


def test_a_sentence_that_two_cautions_share_is_printed_once(review: ReviewView) -> None:
    dose = replace(review.dose, caution=f"{review.caution} {review.dose.caution}")
    text = whole_text(course_review(replace(review, dose=dose)))
    assert text.count(squeezed(review.caution)) == 1
    assert text.count(squeezed(review.dose.caution)) == 1


def test_counts_are_whole_numbers_or_parts_of_two_decimals(review: ReviewView) -> None:
    shares = (ShareLine("A", 10.0, 5.0, 4.6667), *review.shares[1:])
    assert "A1054.67" in whole_text(course_review(replace(review, shares=shares)))


def test_positions_of_a_split_fraction_stay_inside_their_cells(review: ReviewView) -> None:
    def split(row: GridRow) -> GridRow:
        cells = tuple(
            replace(cell, delivered_position=cell.delivered_position and "A+B+C")
            for cell in row.cells
        )
        return replace(row, planned_position="A+B+C", cells=cells)

    rows = [split(row) for row in review.grid]
    left = replace(rows[6].cells[1], delivered_position="A+B", delivered_percent=66.7)
    rows[6] = replace(rows[6], cells=(rows[6].cells[0], left))
    data = course_review(replace(review, grid=tuple(rows)))
    text = whole_text(data)
    assert "planned" + "split" * 20 in text
    assert "Upperspine" + "split" * 6 + "A+B67%" in text
    assert "Split:afractionoverpositionsA+B+C." in text
    assert all(overlapping(runs) == [] for runs in page_runs(data))
