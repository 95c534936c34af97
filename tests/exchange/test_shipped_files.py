"""Templates, the practice scenario and the fixtures read as they are, and a machine can do them."""

from __future__ import annotations

import tomllib
from pathlib import Path
from typing import TYPE_CHECKING

import pytest

from featherlog.exchange.demo import demo_courses, demo_machine
from featherlog.exchange.design_file import parse_design, read_design
from featherlog.exchange.machine_file import parse_machine, read_machine
from featherlog.exchange.template import DESIGN_TEMPLATE, MACHINE_TEMPLATE
from featherlog.junction.solve import solve

if TYPE_CHECKING:
    from featherlog.junction.design import Course

FIXTURES = Path(__file__).parents[2] / "fixtures"


def test_the_templates_are_a_design_its_machine_can_deliver() -> None:
    machine = parse_machine(MACHINE_TEMPLATE, "machine.toml")
    course = parse_design(DESIGN_TEMPLATE, "design.toml", machine)
    assert [position.label for position in solve(course, machine)] == ["A", "B"]


# Template line -> what it becomes: every key that is shown commented out must be allowed.
OPTIONAL = {
    '# follows = "mid thigh"': {'moved_by = "jaws"': 'moved_by = "couch"'},
    "# superior_border = { reach_cm = 12.0 }": {"\nsuperior_border": "\n# superior_border"},
    "# skin_gap_cm = 2.3": {"\nmatch_depth_cm": "\n# match_depth_cm"},
    '# critical = { name = "cord", depth_cm = 12.0 }': {},
    "# reference_dose_gy = 30.0": {},
    "# skin_slope_deg = 0.0": {},
}


@pytest.mark.parametrize("optional", OPTIONAL)
def test_every_key_the_template_comments_out_is_allowed(optional: str) -> None:
    assert optional in DESIGN_TEMPLATE
    text = DESIGN_TEMPLATE
    for written, instead in OPTIONAL[optional].items():
        text = text.replace(written, instead, 1)
    text = text.replace(optional, optional.removeprefix("# "), 1)
    assert tomllib.loads(text) != tomllib.loads(DESIGN_TEMPLATE)
    parse_design(text, "design.toml", parse_machine(MACHINE_TEMPLATE, "machine.toml"))


@pytest.mark.parametrize("course", demo_courses(), ids=lambda course: course.key)
def test_alder_can_deliver_the_practice_courses(course: Course) -> None:
    assert len(solve(course, demo_machine())) == 3


def test_the_textbook_fixture_has_the_textbook_answers() -> None:
    # Khan, The Physics of Radiation Therapy, adjacent fields; see fixtures/README.md.
    machine = read_machine(FIXTURES / "standard_100cm.toml")
    [position] = solve(read_design(FIXTURES / "mantle_para_aortic.toml", machine), machine)
    junction = position.junctions[0]
    for gap in junction.skin_gaps:
        assert gap.superior_part_cm == pytest.approx(1.50)
        assert gap.inferior_part_cm == pytest.approx(0.75)
        assert gap.expected_cm == pytest.approx(2.25)
    assert junction.three_field_overlap_cm == pytest.approx(0.375)
    assert junction.gap_without_overlap_cm == pytest.approx(2.625)


def test_every_fixture_has_its_origin_written_down() -> None:
    readme = (FIXTURES / "README.md").read_text(encoding="utf-8")
    assert [file.name for file in FIXTURES.glob("*.toml") if file.name not in readme] == []
