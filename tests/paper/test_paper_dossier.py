from __future__ import annotations

from dataclasses import replace
from datetime import date
from typing import TYPE_CHECKING, Any

import pytest
from pdf_runs import font_files, overlapping, page_runs, page_texts, squeezed, whole_text
from solved_views import HASH, by_leaves, craniospinal, opposed_pair, solved, with_earlier

from featherlog.errors import InputError
from featherlog.junction.design import Pattern
from featherlog.junction.phrases import angles_beside_set, mismatch_as_set
from featherlog.paper.dossier import dossier
from featherlog.paper.style import MARGIN_PT, PAGE_SIZES, SMALLEST_PT
from featherlog.words import DEMO_NOTICE, figure, meterset, signed

if TYPE_CHECKING:
    from collections.abc import Iterator

    from featherlog.views.common import Heading
    from featherlog.views.day import DayView
    from featherlog.views.dose import DoseView
    from featherlog.views.solution import SolutionView


@pytest.fixture
def spine_view(heading: Heading, dose_view: DoseView) -> SolutionView:
    return solved(craniospinal(), dose_view, replace(heading, state="CHECKED"))


@pytest.fixture
def pair_view(dose_view: DoseView) -> SolutionView:
    """A design that was only solved: no heading, no content to sign."""
    one = replace(dose_view, heading=None, junctions=dose_view.junctions[:1])
    return solved(opposed_pair(), one)


@pytest.fixture(params=["spine_view", "pair_view"])
def view(request: pytest.FixtureRequest) -> SolutionView:
    return request.getfixturevalue(request.param)


def settings(view: SolutionView) -> Iterator[str]:
    for beam in (b for p in view.positions for f in p.treated for b in f.beams):
        yield meterset(beam.meterset_mu)
        yield from (
            figure(beam.jaw_cm[jaw]) + figure(exact, 4, 4)
            for jaw, exact in beam.exact_jaw_cm.items()
        )
        yield figure(beam.collimator_deg) + figure(beam.exact_collimator_deg, 4, 4)
        yield figure(beam.couch_deg) + figure(beam.exact_couch_deg, 4, 4)


def left_over(view: SolutionView) -> Iterator[str]:
    for junction in (j for p in view.positions for j in p.junctions):
        for gap in junction.skin_gaps:
            yield f"{gap.side}{figure(gap.exact_cm, 3, 3)}{figure(gap.expected_cm)}"
        for each in junction.mismatches:
            numbers = f"{figure(each.x_cm)}{figure(each.y_cm)}"
            as_set = squeezed(mismatch_as_set(each))
            yield f"{numbers}{signed(each.exact_cm, 3, 3)}{as_set}"
        assert junction.if_jaws_off is not None
        assert junction.if_all_off is not None
        for what, off in (
            ("jaws", junction.if_jaws_off),
            ("jaws,allangles,movedtables", junction.if_all_off),
        ):
            at, worst = figure(off.at_match_depth_cm, 2), figure(off.worst_cm, 2)
            yield f"change,offbytolerance:{what}±{at}cmatmatchdepth,±{worst}cmatworst"


@pytest.mark.parametrize("page_size", ["A4", "letter"])
def test_the_dossier_takes_four_to_seven_pages(view: SolutionView, page_size: Any) -> None:
    pages = page_texts(dossier(view, page_size))
    assert 4 <= len(pages) <= 7
    for number, text in enumerate(pages, start=1):
        assert f"Page{number}of{len(pages)}" in text
        for words in (view.course.patient_name, view.course.key, view.caution, view.dose.caution):
            assert squeezed(words) in text


def test_the_content_that_is_signed_is_large_and_in_full(spine_view: SolutionView) -> None:
    data = dossier(spine_view)
    first = page_texts(data)[0]
    assert HASH in first
    assert first.index(HASH[:16]) < first.index("prepared") < first.index("WARNINGS")
    assert max(run.size for run in page_runs(data)[0]) == 20
    assert all(HASH[:16] in text for text in page_texts(data))


def test_each_act_names_who_when_and_meaning_or_is_open(spine_view: SolutionView) -> None:
    first = page_texts(dossier(spine_view))[0]
    assert "preparedHazelWren2031-03-0110:12+01:00Ipreparedthisdesign" in first
    assert "checkedAshPlover2031-03-0215:40+01:00Icheckedthisdesignindependently" in first
    assert "approvedopenIapprovethisdesignfortreatment" in first


def test_a_returned_revision_says_why(spine_view: SolutionView) -> None:
    returned = replace(spine_view, returned_reason="Agree the match depth first.")
    assert "RETURNED:Agreethematchdepthfirst." in page_texts(dossier(returned))[0]
    assert "RETURNED" not in whole_text(dossier(spine_view))


def test_a_design_that_was_only_solved_offers_nothing_to_sign(pair_view: SolutionView) -> None:
    text = whole_text(dossier(pair_view))
    assert "Itisnotstored,andthereisnothingtosignyet." in text
    assert "FH-004217" in text
    assert "Signature" not in text
    assert squeezed(DEMO_NOTICE) not in text


def test_every_warning_stands_in_full_on_the_first_page(spine_view: SolutionView) -> None:
    warnings = ("the shares are uneven", "the slope of the skin at J1 is not stated")
    first = page_texts(dossier(replace(spine_view, warnings=warnings)))[0]
    assert "WARNINGS:2" in first
    assert all(squeezed(warning) in first for warning in warnings)
    none = page_texts(dossier(replace(spine_view, warnings=())))[0]
    assert "WARNINGS:none" in none


def test_the_design_is_stated_as_it_was_asked_for(spine_view: SolutionView) -> None:
    text = whole_text(dossier(spine_view))
    for junction in spine_view.course.junctions:
        assert junction.name in text
        assert squeezed(junction.technique.value) in text
    assert "LOWER·movedbycouch;tablefollowsjunctionJ2" in text
    assert "Phase1201.836.01" in text
    assert "positionC−2.0cmfromA" in text
    slope = replace(spine_view.course.junctions[0], skin_slope_deg=None, separation_cm=-0.2)
    course = replace(
        spine_view.course, junctions=(slope, spine_view.course.junctions[1]), note="Prone later."
    )
    text = whole_text(dossier(replace(spine_view, course=course)))
    assert "slopeoftheskinnotstated0.0°" in text
    assert "−0.2cm(overlap),splitevenly" in text
    assert "Note:Pronelater." in text


def test_the_rule_of_the_sequence_and_the_days_are_stated(spine_view: SolutionView) -> None:
    rule = spine_view.course.sequence
    text = whole_text(dossier(spine_view))
    assert "Pattern:blocks;5fractionstoablock" in text
    assert "Monday,Tuesday,Wednesday,Thursday,Fridayfrom2031-03-03" in text
    split = replace(
        rule,
        pattern=Pattern.SPLIT,
        block_fractions=None,
        weights=(0.5, 0.25, 0.25),
        closed_dates=(date(2031, 3, 14),),
        holiday_calendar="DE, BW",
    )
    course = replace(spine_view.course, sequence=split)
    text = whole_text(dossier(replace(spine_view, course=course)))
    assert "split;everyfractioninpartsA0.50,B0.25,C0.25" in text
    assert "withoutthepublicholidaysofDE,BW;closed2031-03-14" in text


def test_junctions_are_drawn_from_the_side_where_they_are_given(
    spine_view: SolutionView, crowded_day: DayView
) -> None:
    data = dossier(spine_view, side_views=crowded_day.junctions)
    text = whole_text(data)
    assert text.count("HEAD(gantryend)") == 2
    assert "JUNCTIONSFROMTHESIDE,POSITIONA" in text
    assert all(overlapping(runs) == [] for runs in page_runs(data))
    assert "gantryend" not in whole_text(dossier(spine_view))


def test_every_setting_stands_above_its_exact_value(view: SolutionView) -> None:
    text = whole_text(dossier(view))
    assert [fact for fact in settings(view) if fact not in text] == []


def test_a_table_move_from_the_first_position_is_in_words(spine_view: SolutionView) -> None:
    text = whole_text(dossier(spine_view))
    assert "frompositionA:TABLEmoves1.0cmtowardthegantry(longitudinal+1.0cm)" in text


def test_leaf_edges_are_said_to_belong_to_the_plan(
    pair_view: SolutionView, dose_view: DoseView
) -> None:
    text = whole_text(dossier(solved(by_leaves(opposed_pair()), dose_view)))
    assert text.count("leafedgesbelongtotheplan:notsetbyhand") == 2 * 3
    assert text.count("inferior,leaves") == text.count("superior,leaves") == 2 * 3
    assert "leafedge" not in whole_text(dossier(pair_view))


def test_a_field_of_an_earlier_course_is_never_set(dose_view: DoseView) -> None:
    text = whole_text(dossier(solved(with_earlier(opposed_pair()), dose_view)))
    assert text.count("oftheearliercoursePELVIS-29,45.0Gy:neverset") == 3
    assert text.count("APupper6MV") == 1  # in the design alone


def test_what_is_left_at_each_junction_is_stated_everywhere(view: SolutionView) -> None:
    text = whole_text(dossier(view))
    assert [fact for fact in left_over(view) if fact not in text] == []


def test_a_gap_and_an_overlap_at_one_point_are_both_stated(pair_view: SolutionView) -> None:
    # Opposed pairs gap between their front beams where their back beams overlap.
    places = [place for p in pair_view.positions for j in p.junctions for place in j.mismatches]
    both = [place for place in places if place.opposite_cm is not None]
    text = whole_text(dossier(pair_view))
    assert both
    for place in both:
        assert f"{signed(place.rounded_cm, 3, 3)},{signed(place.opposite_cm, 3, 3)}" in text


def test_angles_against_the_neighbour_as_set_stand_beside_the_turned_beams(
    spine_view: SolutionView,
) -> None:
    said = [
        angles_beside_set(beam) for p in spine_view.positions for f in p.treated for beam in f.beams
    ]
    text = whole_text(dossier(spine_view))
    assert any(said)
    assert all(squeezed(words) in text for words in said)


def test_the_sequence_names_blocks_shares_and_shift_days(spine_view: SolutionView) -> None:
    text = whole_text(dossier(spine_view))
    for fact in (
        "1to5A2031-03-03to2031-03-07",
        "Shares:A10,B5,C5of20fractions",
        "Shiftdays:3(fractions6,11,16)",
        "Moreevenwithasmanyshiftdays:",
        "1to4A2031-03-03to2031-03-06",
    ):
        assert fact in text


def test_each_hand_check_stands_under_its_formula_with_a_box(view: SolutionView) -> None:
    text = whole_text(dossier(view))
    assert view.hand_checks
    for check in view.hand_checks:
        by_formula, exact = (figure(v, 4, 4) for v in (check.by_formula, check.exact))
        difference = signed(check.by_formula - check.exact, 4, 4)
        line = f"{check.position}{check.subject}{check.numbers}{by_formula}{exact}{difference}☐"
        assert squeezed(line) in text
        assert squeezed(f"{check.formula} ({check.source}") in text


def test_a_geometry_without_formulas_says_so(spine_view: SolutionView) -> None:
    text = whole_text(dossier(replace(spine_view, hand_checks=())))
    assert "Notextbookformulaapplies" in text


def test_the_dose_shows_the_design_and_nothing_delivered(spine_view: SolutionView) -> None:
    last = page_texts(dossier(spine_view))[-1]
    for fact in ("planned", "unfeathered", "J1,skin,0.0cm", "J2,spinalcord,6.5cm", "107%", "95%"):
        assert fact in last
    assert "predicted" not in last
    assert "delivered" not in last


def test_the_dossier_is_legible_inside_the_page_embedded_and_repeatable(
    view: SolutionView,
) -> None:
    data = dossier(view)
    width, height = PAGE_SIZES["A4"]
    for runs in page_runs(data):
        assert min(run.size for run in runs) >= SMALLEST_PT
        assert overlapping(runs) == []
        assert min(run.left for run in runs) >= MARGIN_PT - 0.5
        assert max(run.right for run in runs) <= width - MARGIN_PT + 0.5
        assert max(run.top for run in runs) <= height - MARGIN_PT
    assert all(font_files(data).values())
    assert data == dossier(view)


def test_heads_of_a_table_repeat_on_its_next_page(spine_view: SolutionView) -> None:
    many = replace(spine_view, hand_checks=spine_view.hand_checks * 4)
    pages = [text for text in page_texts(dossier(many)) if "☐" in text]
    assert len(pages) > 1
    assert all("byformulaexactdifference" in text for text in pages)


def test_a_warning_that_would_print_blank_is_refused(spine_view: SolutionView) -> None:
    with pytest.raises(InputError, match="U\\+6797"):
        dossier(replace(spine_view, warnings=("林",)))
