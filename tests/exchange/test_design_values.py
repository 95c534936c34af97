"""What a good design file becomes."""

from __future__ import annotations

from pathlib import Path

import pytest

from featherlog.errors import InputError, NotFoundError
from featherlog.exchange.design_file import named_machine, parse_design, read_design
from featherlog.exchange.machine_file import read_machine
from featherlog.junction.design import Border, Weekday

_HERE = Path(__file__).parent
DESIGN = _HERE / "good_design.toml"
GOOD = DESIGN.read_text(encoding="utf-8")
MACHINE = read_machine(_HERE / "good_machine.toml")
COURSE = read_design(DESIGN, MACHINE)


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
