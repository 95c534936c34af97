"""What a good design file becomes."""

from __future__ import annotations

from datetime import date
from pathlib import Path

import pytest

from featherlog.errors import InputError, NotFoundError
from featherlog.exchange.design_file import named_machine, parse_design, read_design
from featherlog.exchange.machine_file import read_machine
from featherlog.junction.design import Angles, Border, EarlierCourse, EdgesBy, Weekday

_HERE = Path(__file__).parent
DESIGN = _HERE / "good_design.toml"
GOOD = DESIGN.read_text(encoding="utf-8")
MACHINE = read_machine(_HERE / "good_machine.toml")
COURSE = read_design(DESIGN, MACHINE)
TURNED_TEXT = (_HERE / "good_turned_design.toml").read_text(encoding="utf-8")
TURNED = parse_design(TURNED_TEXT, "design.toml", MACHINE)


def test_an_entry_point_puts_the_isocentre_on_the_beam_axis_at_the_source_axis_distance() -> None:
    # SSD 92 with SAD 100: the isocentre lies 8 cm under the skin, from either side.
    anterior, posterior = COURSE.fields[0].beams
    assert anterior.isocentre_cm == (10.0, 0.0, 14.0)
    assert posterior.isocentre_cm == (10.0, 0.0, 14.0)


def test_an_oblique_entry_point_follows_the_beam() -> None:
    text = GOOD.replace("gantry_deg = 0", "gantry_deg = 90", 1)
    anterior = parse_design(text, "design.toml", MACHINE).fields[0].beams[0]
    # At gantry 90 the source is at the patient's left (head first supine), so 8 cm goes along -x.
    assert anterior.isocentre_cm == (2.0, -8.0, 14.0)


def test_an_own_source_distance_puts_the_isocentre() -> None:
    # SSD 100 with SAD 105: 5 cm under the posterior skin, toward the anterior.
    [beam] = TURNED.fields[1].beams
    assert (beam.sad_cm, beam.isocentre_cm) == (105.0, (0.0, -5.0, -14.0))


def test_collimator_and_couch_become_signed() -> None:
    turned = COURSE.fields[0].beams[1]
    assert (turned.gantry_deg, turned.collimator_deg, turned.couch_deg) == (180.0, -10.0, 180.0)


def test_borders_are_a_reach_or_a_point() -> None:
    assert COURSE.superior_border == Border(reach_cm=12.0)
    assert COURSE.inferior_border == Border((10.0, 0.0, -27.0), held=True)


def test_a_couch_field_with_one_junction_follows_it() -> None:
    assert [field.follows for field in COURSE.fields] == [None, "knee", "knee"]


def test_a_single_offset_is_every_junctions() -> None:
    assert COURSE.positions[0].offset_cm == {"thigh": 0.0, "knee": 0.0}
    assert COURSE.positions[1].offset_cm == {"thigh": -1.0, "knee": -2.0}


def test_what_is_left_out_has_its_documented_value() -> None:
    assert COURSE.note == ""
    assert COURSE.junctions[0].reference_dose_gy == 20.0
    assert COURSE.fields[1].beams[0].weight == 1.0
    assert COURSE.sequence.weekdays == tuple(Weekday)[:5]
    assert COURSE.fields[0].beams[0].sad_cm == MACHINE.sad_cm
    assert COURSE.fields[0].beams[0].edges_by is EdgesBy.JAWS
    assert COURSE.fields[0].dose_per_fraction_gy is None
    assert (COURSE.junctions[0].separation_cm, COURSE.junctions[0].borne_by) == (0.0, None)
    assert COURSE.sequence.holidays == ()
    assert not COURSE.sequence.restart_each_phase


def test_a_turned_field_and_its_match() -> None:
    neck = TURNED.junctions[0]
    assert (neck.turned_field, neck.matched_beam, neck.angles) == ("brain", "PA upper", Angles.HELD)
    recomputed = TURNED_TEXT.replace('angles = "held"\n', "").replace(
        'matched_beam = "PA upper"\n', ""
    )
    neck = parse_design(recomputed, "design.toml", MACHINE).junctions[0]
    assert (neck.matched_beam, neck.angles) == (None, Angles.RECOMPUTED)


def test_a_separation_is_borne_by_the_named_field_or_by_the_one_beside_an_earlier_course() -> None:
    assert [(j.separation_cm, j.borne_by) for j in TURNED.junctions] == [
        (-0.2, "brain"),
        (0.5, "upper spine"),
    ]
    shared = TURNED_TEXT.replace('borne_by = "brain"\n', "")
    assert parse_design(shared, "design.toml", MACHINE).junctions[0].borne_by is None


def test_a_field_of_an_earlier_course_has_no_metersets() -> None:
    assert TURNED.fields[2].earlier == EarlierCourse("spine 2019", 30.0, 15, 11.0)
    assert list(TURNED.positions[0].meterset_mu) == ["left", "right", "PA upper"]


def test_a_border_may_ask_for_cover_and_a_field_have_its_own_dose_and_leaf_edges() -> None:
    assert TURNED.superior_border.cover_x_cm == (-7.0, 7.0)
    assert TURNED.fields[1].dose_per_fraction_gy == 1.5
    assert [beam.edges_by for beam in TURNED.fields[0].beams] == [EdgesBy.LEAVES, EdgesBy.JAWS]


def test_the_order_may_go_by_dose_and_begin_again_with_each_phase() -> None:
    assert TURNED.sequence.block_dose_gy == 5.0
    assert TURNED.sequence.restart_each_phase


def test_a_split_has_a_weight_for_each_position() -> None:
    start, end = TURNED_TEXT.index('pattern = "dose"'), TURNED_TEXT.index("start_date")
    split = 'pattern = "split"\npositions = ["A", "B"]\nweights = [1, 0.5]\n'
    text = TURNED_TEXT[:start] + split + TURNED_TEXT[end:]
    assert parse_design(text, "design.toml", MACHINE).sequence.weights == (1.0, 0.5)


def test_the_machines_closed_dates_are_the_courses_too() -> None:
    assert COURSE.sequence.closed_dates == (
        date(2026, 3, 12),
        date(2026, 3, 13),
        date(2026, 5, 15),
    )


def test_public_holidays_are_those_of_the_region_from_the_first_year_on() -> None:
    holidays = TURNED.sequence.holidays
    assert TURNED.sequence.holiday_calendar == "DE, BY"
    # Good Friday and Easter Monday 2026 in all of Germany, Epiphany in Bavaria but not in Berlin.
    assert {date(2026, 4, 3), date(2026, 4, 6), date(2027, 1, 6)} <= set(holidays)
    assert list(holidays) == sorted(set(holidays))
    assert {day.year for day in holidays} == {2026, 2027, 2028}
    berlin = parse_design(TURNED_TEXT.replace('"BY"', '"BE"'), "design.toml", MACHINE).sequence
    assert date(2027, 1, 6) not in berlin.holidays
    country = parse_design(TURNED_TEXT.replace(', region = "BY"', ""), "design.toml", MACHINE)
    assert country.sequence.holiday_calendar == "DE"


def test_a_skin_gap_may_stand_for_the_match_depth() -> None:
    text = GOOD.replace("match_depth_cm = 8.0\nthick", "skin_gap_cm = 2.3\nthick", 1)
    junction = parse_design(text, "design.toml", MACHINE).junctions[0]
    assert (junction.match_depth_cm, junction.skin_gap_cm) == (None, 2.3)


def test_the_machine_is_named_before_the_design_is_read() -> None:
    assert named_machine(DESIGN) == "Alder"


def test_private_values_stay_out_of_messages() -> None:
    text = GOOD.replace('"Holly Pipit"', '"Holly Pipit "')
    with pytest.raises(InputError) as refusal:
        parse_design(text, "design.toml", MACHINE)
    assert "Holly" not in str(refusal.value)


def test_a_file_that_is_not_there_is_not_found(tmp_path: Path) -> None:
    with pytest.raises(NotFoundError, match="there is no such file"):
        read_design(tmp_path / "none.toml", MACHINE)


def test_a_file_that_is_not_text_is_refused(tmp_path: Path) -> None:
    scan = tmp_path / "scan.toml"
    scan.write_bytes(b"key = \xff")
    with pytest.raises(InputError, match="byte 7 is not text in UTF-8"):
        read_design(scan, MACHINE)


def test_a_folder_is_refused(tmp_path: Path) -> None:
    with pytest.raises(InputError, match="cannot be read"):
        read_design(tmp_path, MACHINE)


def test_a_byte_order_mark_and_carriage_returns_do_no_harm(tmp_path: Path) -> None:
    saved = tmp_path / "design.toml"
    saved.write_bytes(b"\xef\xbb\xbf" + GOOD.replace("\n", "\r\n").encode())
    assert read_design(saved, MACHINE) == COURSE
