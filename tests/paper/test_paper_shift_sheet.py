from __future__ import annotations

from dataclasses import fields, is_dataclass, replace
from io import BytesIO
from typing import TYPE_CHECKING, Any

import pytest
from pdf_runs import font_files, overlapping, page_runs, page_texts, squeezed, whole_text
from pypdf import PdfReader

from featherlog.errors import InputError
from featherlog.paper.shift_sheet import shift_sheet
from featherlog.paper.style import MARGIN_PT, PAGE_SIZES, SMALLEST_PT
from featherlog.views.day import TableTargetView
from featherlog.words import (
    DEMO_NOTICE,
    RECORD_CAUTION,
    THIS_FRACTION_ONLY,
    figure,
    meterset,
    signed,
)

if TYPE_CHECKING:
    from collections.abc import Iterator

    from featherlog.views.day import DayView, GapView

DAYS = (
    "shift_day",
    "no_shift_day",
    "first_day",
    "part_day",
    "step_day",
    "stop_day",
    "crowded_day",
)
READY_DAYS = ("shift_day", "no_shift_day", "part_day", "crowded_day")
# Codes that decide what is printed; they are not printed themselves.
CODES = {"status", "shift", "stop_reasons", "edges_by"}


@pytest.fixture(params=DAYS)
def day(request: pytest.FixtureRequest) -> DayView:
    return request.getfixturevalue(request.param)


@pytest.fixture(params=READY_DAYS)
def ready_day(request: pytest.FixtureRequest) -> DayView:
    return request.getfixturevalue(request.param)


def strings(record: Any) -> Iterator[str]:
    if isinstance(record, str):
        yield record
    elif isinstance(record, tuple):
        for item in record:
            yield from strings(item)
    elif is_dataclass(record):
        for field in fields(record):
            if field.name not in CODES:
                yield from strings(getattr(record, field.name))


def numbers(view: DayView) -> Iterator[str]:
    for beam in (beam for field in view.fields for beam in field.beams):
        yield from map(figure, (beam.gantry_deg, beam.ssd_cm))
        yield from map(signed, (beam.collimator_deg, beam.couch_deg))
        yield meterset(beam.to_deliver_mu)
        yield from (squeezed(f"{jaw.jaw} {signed(jaw.cm)}") for jaw in beam.jaws if not jaw.words)
        yield from (f"{signed(jaw.previous_cm)}→{signed(jaw.cm)}" for jaw in beam.jaws if jaw.words)
    for gap in (gap for junction in view.junctions for gap in junction.gaps):
        yield accepted(gap)


def accepted(gap: GapView) -> str:
    low, high = gap.expected_cm - gap.tolerance_cm, gap.expected_cm + gap.tolerance_cm
    return f"{figure(gap.expected_cm)}{figure(low)}to{figure(high)}"


@pytest.mark.parametrize("page_size", ["A4", "letter"])
@pytest.mark.parametrize("name", [name for name in DAYS if name != "crowded_day"])
def test_two_fields_and_one_junction_fit_one_page(
    name: str, page_size: Any, request: pytest.FixtureRequest
) -> None:
    assert len(page_runs(shift_sheet(request.getfixturevalue(name), page_size))) == 1


@pytest.mark.parametrize("page_size", ["A4", "letter"])
def test_only_the_diagrams_of_a_crowded_day_go_to_a_second_page(
    crowded_day: DayView, page_size: Any
) -> None:
    first, second = page_texts(shift_sheet(crowded_day, page_size))
    assert all(text in first for text in numbers(crowded_day))
    assert "Verifier:" in first
    assert second.count("FEET(gantryend)") == 2
    assert "103.5" not in second


def test_every_word_and_number_of_the_view_is_on_the_sheet(ready_day: DayView) -> None:
    text = whole_text(shift_sheet(ready_day))
    missing = [
        fact for fact in (*strings(ready_day), *numbers(ready_day)) if squeezed(fact) not in text
    ]
    assert missing == []


def test_standing_sentences_are_on_every_page(crowded_day: DayView) -> None:
    for text in page_texts(shift_sheet(crowded_day)):
        for sentence in (THIS_FRACTION_ONLY, crowded_day.caution, RECORD_CAUTION, DEMO_NOTICE):
            assert squeezed(sentence) in text
        assert crowded_day.page_code in text
    assert "Page2of2" in page_texts(shift_sheet(crowded_day))[1]


def test_a_real_course_carries_no_practice_notice(shift_day: DayView) -> None:
    real = replace(shift_day, heading=replace(shift_day.heading, demo=False))
    assert squeezed(DEMO_NOTICE) not in whole_text(shift_sheet(real))


@pytest.mark.parametrize(
    ("name", "answer"),
    [
        ("shift_day", "SHIFTTODAY:YESA→B"),
        ("no_shift_day", "SHIFTTODAY:NO"),
        ("first_day", "FIRSTFRACTION"),
    ],
)
def test_the_answer_of_the_day_is_said_in_words_of_24_points(
    name: str, answer: str, request: pytest.FixtureRequest
) -> None:
    data = shift_sheet(request.getfixturevalue(name))
    assert answer in whole_text(data)
    large = [run for run in page_runs(data)[0] if run.size >= 24]
    assert len(large) == 2  # the position and the answer, nothing else competes


def test_the_first_fraction_claims_nothing_about_a_fraction_before(first_day: DayView) -> None:
    text = whole_text(shift_sheet(first_day))
    assert "lastfraction" not in text
    assert "doesnotmove" not in text


def test_a_stop_page_says_stop_and_why_and_holds_nothing_to_set(stop_day: DayView) -> None:
    data = shift_sheet(stop_day)
    text = whole_text(data)
    assert squeezed(stop_day.call) in text
    assert squeezed(stop_day.raised_risk[0]) in text
    assert all(squeezed(reason) in text for reason in stop_day.stop_reasons)
    assert max(run.size for run in page_runs(data)[0]) > 90
    settings = {fact for fact in numbers(stop_day) if fact not in {"0.0", "7.1"}}
    assert [fact for fact in settings if fact in text] == []
    assert "POSITIONB" not in text


def test_absolute_targets_stand_with_their_fields(shift_day: DayView) -> None:
    words = "TABLE to lateral +0.3, longitudinal +101.2, vertical −12.0 cm"
    first = replace(shift_day.fields[0], target=TableTargetView(0.3, 101.2, -12.0, words))
    sheet = shift_sheet(replace(shift_day, fields=(first, *shift_day.fields[1:])))
    assert squeezed(words) in whole_text(sheet)


def test_a_complete_fraction_holds_nothing_to_set(no_shift_day: DayView) -> None:
    text = whole_text(shift_sheet(replace(no_shift_day, status="complete")))
    assert "NOTHINGLEFTTOTREAT" in text
    assert [
        fact for fact in numbers(no_shift_day) if fact not in {"0.0", "7.1"} and fact in text
    ] == []


def test_a_part_delivered_fraction_locks_the_position_and_shows_what_remains(
    part_day: DayView,
) -> None:
    text = whole_text(shift_sheet(part_day))
    assert "POSITIONLOCKEDATB" in text
    assert "41.2of103.5given" in text
    assert "62.3" in text
    assert text.count("DONOTTREATAGAIN") == 1


def test_only_changed_jaws_show_an_old_value(shift_day: DayView, no_shift_day: DayView) -> None:
    assert whole_text(shift_sheet(shift_day)).count("→") == 1 + 4
    assert "→" not in whole_text(shift_sheet(no_shift_day))


def test_an_expected_overlap_is_named(shift_day: DayView) -> None:
    junction = shift_day.junctions[0]
    gap = replace(junction.gaps[0], expected_cm=-0.3)
    view = replace(shift_day, junctions=(replace(junction, gaps=(gap,)),))
    assert "−0.3overlap−0.5to−0.1" in whole_text(shift_sheet(view))


def test_nothing_is_printed_smaller_than_8_points(day: DayView) -> None:
    sizes = [run.size for page in page_runs(shift_sheet(day)) for run in page]
    assert min(sizes) >= SMALLEST_PT


def test_no_text_lies_on_other_text_or_off_the_page(day: DayView) -> None:
    width, height = PAGE_SIZES["A4"]
    for runs in page_runs(shift_sheet(day)):
        assert overlapping(runs) == []
        assert min(run.left for run in runs) >= MARGIN_PT - 0.5
        assert max(run.right for run in runs) <= width - MARGIN_PT + 0.5
        assert min(run.baseline for run in runs) >= MARGIN_PT
        assert max(run.top for run in runs) <= height - MARGIN_PT


def test_every_font_is_embedded(crowded_day: DayView) -> None:
    fonts = font_files(shift_sheet(crowded_day))
    assert fonts
    assert all(fonts.values()), fonts


def test_the_same_view_gives_the_same_bytes(part_day: DayView) -> None:
    assert shift_sheet(part_day) == shift_sheet(part_day)


def test_the_document_names_its_course_and_language_but_not_the_patient(shift_day: DayView) -> None:
    reader = PdfReader(BytesIO(shift_sheet(shift_day)))
    assert reader.metadata is not None
    assert reader.metadata.title == "Shift sheet, course finch-2031"
    assert reader.metadata.author == "featherlog"
    assert reader.root_object["/Lang"] == "en"
    assert "Finch" not in str(dict(reader.metadata))


def test_a_name_that_would_print_blank_is_refused(shift_day: DayView) -> None:
    view = replace(shift_day, heading=replace(shift_day.heading, patient_name="林 Finch"))
    with pytest.raises(InputError, match="U\\+6797"):
        shift_sheet(view)


def test_edges_come_before_side_jaws_whatever_their_order_in_the_view(shift_day: DayView) -> None:
    field = shift_day.fields[0]
    beam = replace(field.beams[0], jaws=tuple(reversed(field.beams[0].jaws)))
    view = replace(shift_day, fields=(replace(field, beams=(beam,)),))
    text = whole_text(shift_sheet(view))
    assert text.index("superiorY2") < text.index("inferiorY1") < text.index("sideX2")


def test_a_step_of_a_split_fraction_is_named_beside_the_fraction(step_day: DayView) -> None:
    text = whole_text(shift_sheet(step_day))
    assert "6of20STEP2of3" in text
    assert "34.5of103.5given" in text
    locked = whole_text(shift_sheet(replace(step_day, part_delivered=True)))
    assert "Step2offraction6mustbefinishedatpositionB." in locked


def test_a_fraction_of_one_step_names_no_step(shift_day: DayView) -> None:
    assert "STEP" not in whole_text(shift_sheet(shift_day))


def test_a_changed_angle_shows_its_old_value(step_day: DayView) -> None:
    text = whole_text(shift_sheet(step_day))
    assert "−7.6→−7.1" in text
    assert "+5.0→+5.5" in text
    assert text.count("7.1→") == 0  # the other lateral does not turn


def test_the_scale_of_the_console_stands_apart_and_replaces_nothing(step_day: DayView) -> None:
    text = whole_text(shift_sheet(step_day))
    assert "console:gantry180.0°,collimator183.5°,couch186.0°,Y19.6cm" in text
    assert "270.0" in text
    assert text.count("console:") == 2


def test_a_leaf_edge_is_not_offered_to_be_set(step_day: DayView, shift_day: DayView) -> None:
    with_leaves, with_jaws = (whole_text(shift_sheet(day)) for day in (step_day, shift_day))
    assert "leafedge,fromtheplan:notsetbyhand" in with_leaves
    assert with_jaws.count("−15.1→−16.0") == 2
    assert with_leaves.count("−15.1→−16.0") == 1
