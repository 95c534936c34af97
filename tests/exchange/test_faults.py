"""Every kind of bad design and machine input, and the sentences that refuse it."""

from __future__ import annotations

import tomllib
from pathlib import Path
from typing import Any

import pytest

from featherlog.errors import InputError
from featherlog.exchange.design_file import parse_design
from featherlog.exchange.machine_file import parse_machine

_HERE = Path(__file__).parent
DESIGN = (_HERE / "good_design.toml").read_text(encoding="utf-8")
TURNED = (_HERE / "good_turned_design.toml").read_text(encoding="utf-8")
MACHINE_TEXT = (_HERE / "good_machine.toml").read_text(encoding="utf-8")
MACHINE = parse_machine(MACHINE_TEXT, "machine.toml")


def _cases(file: str) -> list[Any]:
    cases = tomllib.loads((_HERE / file).read_text(encoding="utf-8"))["case"]
    return [pytest.param(*case.values(), id=case["instead"] or case["written"]) for case in cases]


def _design_faults(text: str) -> list[str]:
    with pytest.raises(InputError) as refusal:
        parse_design(text, "design.toml", MACHINE)
    return list(refusal.value.faults)


@pytest.mark.parametrize(("written", "instead", "faults"), _cases("design_faults.toml"))
def test_a_bad_design_is_refused_in_these_words(
    written: str, instead: str, faults: list[str]
) -> None:
    assert written in DESIGN
    assert _design_faults(DESIGN.replace(written, instead, 1)) == faults


@pytest.mark.parametrize(("written", "instead", "faults"), _cases("turned_design_faults.toml"))
def test_a_bad_design_with_a_turned_field_is_refused_in_these_words(
    written: str, instead: str, faults: list[str]
) -> None:
    assert written in TURNED
    assert _design_faults(TURNED.replace(written, instead, 1)) == faults


def test_a_design_of_earlier_fields_alone_is_refused() -> None:
    lines = TURNED.splitlines(keepends=True)
    [earlier] = [line for line in lines if line.startswith("earlier_course")]
    jaws = 'moved_by = "jaws"\n'
    everywhere = TURNED.replace(earlier, "").replace(jaws, jaws + earlier)
    assert (
        "design.toml line 21: field has only fields of earlier courses, but one must be treated in "
        "this one"
    ) in _design_faults(everywhere)


@pytest.mark.parametrize(("written", "instead", "faults"), _cases("machine_faults.toml"))
def test_a_bad_machine_is_refused_in_these_words(
    written: str, instead: str, faults: list[str]
) -> None:
    assert written in MACHINE_TEXT
    with pytest.raises(InputError) as refusal:
        parse_machine(MACHINE_TEXT.replace(written, instead, 1), "machine.toml")
    assert list(refusal.value.faults) == faults


def test_faults_are_reported_all_at_once_in_the_order_of_the_file() -> None:
    bad = DESIGN
    for written, instead in (
        ('key = "FH-1042"', 'key = ""'),
        ("ssd_cm = 92.0", "ssd_cm = false"),
        ("knee = -2.0", 'knee = "far"'),
        ("start_date", "start_day"),
    ):
        bad = bad.replace(written, instead, 1)
    assert [fault.split(" is ")[0] for fault in _design_faults(bad)] == [
        "design.toml line 3: course.key",
        "design.toml line 27: field[1].beam[1].ssd_cm",
        "design.toml line 100: position[2].offset_cm.knee",
        "design.toml line 107: sequence.start_date",
        "design.toml line 111: sequence.start_day",
    ]


@pytest.mark.parametrize("broken", ["key", "key =", 'key = "A', "key = 1 2", "[course"])
def test_broken_toml_names_its_line(broken: str) -> None:
    [fault] = _design_faults(DESIGN.replace('key = "FH-1042"', broken, 1))
    assert fault.startswith("design.toml line 3: is not valid TOML, ")


def test_brackets_nested_beyond_reason_are_refused_in_words() -> None:
    [fault] = _design_faults(f"format = {'[' * 5000}")
    assert fault == "design.toml: is not valid TOML, brackets are nested too deeply"


def test_a_number_of_endless_digits_is_refused_in_words() -> None:
    # Python neither reads nor writes so many decimal digits, but it reads hexadecimal ones.
    [decimal] = _design_faults(f"format = {'9' * 5000}")
    assert decimal.startswith("design.toml: is not valid TOML, ")
    [hexadecimal] = _design_faults(f"format = 0x{'f' * 5000}")
    assert hexadecimal.startswith("design.toml line 1: format is 0xffff")
