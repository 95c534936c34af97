"""Templates, the practice scenario and the fixtures read as they are, and a machine can do them."""

from __future__ import annotations

import tomllib
from pathlib import Path
from typing import TYPE_CHECKING

import pytest

from featherlog.exchange.demo import DEMO_SPINE, demo_courses, demo_machine, demo_text
from featherlog.exchange.design_file import parse_design, read_design
from featherlog.exchange.machine_file import parse_machine, read_machine
from featherlog.exchange.template import DESIGN_TEMPLATE, MACHINE_TEMPLATE
from featherlog.junction.machine import Jaw
from featherlog.junction.solve import solve

if TYPE_CHECKING:
    from featherlog.junction.design import Course
    from featherlog.junction.plan import PositionSettings

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
    "# superior_border = { point_cm = [10.0, 0.0, 26.0], held = true, cover_x_cm = [3.0, 17.0] }": {
        "\nsuperior_border": "\n# superior_border"
    },
    "# dose_per_fraction_gy = 1.8": {},
    '# earlier_course = { label = "2019", dose_gy = 30.0, fractions = 15,': {
        '"AP upper" = 118.0\n"PA upper" = 118.0\n': "",
        '"AP upper" = 117.0\n"PA upper" = 117.0\n': "",
        '{ "mid thigh" = -1.0 }': "0.0",
    },
    "# sad_cm = 100.0": {},
    '# edges_by = "leaves"': {},
    "# entry_cm = [10.0, -8.0, 14.0]": {
        "\nisocentre_cm": "\n# isocentre_cm",
        'name = "PA upper"': 'name = "PA upper"\nentry_cm = [10.0, 8.0, 14.0]',
    },
    '# turned_field = "upper"': {
        'technique = "skin gap"': 'technique = "rotated"\nmatched_beam = "AP lower"'
    },
    '# matched_beam = "AP lower"': {
        'technique = "skin gap"': 'technique = "rotated"\nturned_field = "upper"'
    },
    '# angles = "recomputed"': {
        'technique = "skin gap"': (
            'technique = "rotated"\nturned_field = "upper"\nmatched_beam = "AP lower"'
        )
    },
    "# separation_cm = 0.3": {},
    '# borne_by = "lower"': {"# separation_cm": "separation_cm"},
    "# block_dose_gy = 16.0": {
        'pattern = "blocks"': 'pattern = "dose"',
        "\nblock_fractions": "\n# block_fractions",
    },
    "# weights = [1.0, 1.0]": {
        'pattern = "blocks"': 'pattern = "split"',
        "\nblock_fractions": "\n# block_fractions",
    },
    "# restart_each_phase = true": {},
    '# holidays = { country = "DE", region = "BY" }': {},
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


def test_the_console_scale_the_machine_template_comments_out_is_allowed() -> None:
    start, end = MACHINE_TEMPLATE.index("# [display]"), MACHINE_TEMPLATE.index("\n# One [[energy]]")
    shown = MACHINE_TEMPLATE[start:end].replace("# ", "")
    text = MACHINE_TEMPLATE[:start] + shown + MACHINE_TEMPLATE[end:]
    assert parse_machine(text, "machine.toml").display is not None


@pytest.mark.parametrize("course", demo_courses(), ids=lambda course: course.key)
def test_alder_can_deliver_the_practice_courses(course: Course) -> None:
    assert len(solve(course, demo_machine())) == 3


def test_alder_can_deliver_the_practice_spine_supine_and_prone() -> None:
    machine = demo_machine()
    supine, prone = (
        solve(parse_design(demo_text(name), name, machine), machine) for name in DEMO_SPINE.values()
    )
    assert len(supine) == 3
    # Turned over, the laterals' collimators turn the other way and nothing else changes.
    for lying, turned in zip(_turns(supine), _turns(prone), strict=True):
        assert lying == (-turned[0], *turned[1:])


def _turns(settings: tuple[PositionSettings, ...]) -> list[tuple[object, ...]]:
    return [
        (beam.collimator_deg, beam.couch_deg, beam.jaw_cm, beam.meterset_mu)
        for position in settings
        for field in position.fields
        for beam in field.beams
    ]


def test_the_spine_fixture_has_the_derived_answers() -> None:
    # See fixtures/README.md; collimator and couch are those of the right lateral.
    machine = read_machine(FIXTURES / "standard_100cm.toml")
    settings = solve(read_design(FIXTURES / "craniospinal.toml", machine), machine)
    found = [
        (
            lateral.exact_collimator_deg,
            lateral.exact_couch_deg,
            lateral.exact_jaw_cm[Jaw.Y1],
            lateral.exact_jaw_cm[Jaw.Y2],
        )
        for lateral in (position.fields[0].beams[1] for position in settings)
    ]
    assert found == [
        pytest.approx((7.6226, -4.9335, -8.5557, 10.7606), abs=0.0001),
        pytest.approx((7.0905, -5.5253, -9.5995, 10.7513), abs=0.0001),
        pytest.approx((6.5568, -6.1177, -10.6481, 10.7399), abs=0.0001),
    ]


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
