"""A planned separation at the match point: split evenly, or borne by one field."""

from __future__ import annotations

from math import isclose
from typing import TYPE_CHECKING

import pytest
from spine_course import beam, junction, machine, pair

from featherlog.junction.design import Technique
from featherlog.junction.solve import solve

if TYPE_CHECKING:
    from featherlog.junction.plan import PositionSettings


def at_match(settings: PositionSettings) -> tuple[float, float]:
    """Return the coordinates of both edges at the match point, 5 cm below the back."""
    upper, lower = (each.beams[0] for each in settings.fields)
    return upper.inferior_edge.z_at(0.0, -5.0), lower.superior_edge.z_at(0.0, -5.0)


@pytest.mark.parametrize("offset_cm", [0.0, -1.0])
@pytest.mark.parametrize(
    ("separation_cm", "borne_by", "edges_cm"),
    [
        (0.4, None, (0.2, -0.2)),
        (0.4, "UPPER", (0.4, 0.0)),
        (0.4, "LOWER", (0.0, -0.4)),
        (-0.3, None, (-0.15, 0.15)),
        (-0.3, "UPPER", (-0.3, 0.0)),
    ],
)
def test_edges_stand_apart_by_the_planned_separation(
    separation_cm: float, borne_by: str | None, edges_cm: tuple[float, float], offset_cm: float
) -> None:
    between = junction("J", (0, 0, 0), 5.0, separation_cm=separation_cm, borne_by=borne_by)
    of = pair(
        [beam("u", 180, (0, 0, 12))],
        [beam("l", 180, (0, 0, -12))],
        between,
        offsets_cm=(0.0, offset_cm),
    )
    settings = solve(of, machine())[1]
    expected = [z + offset_cm for z in edges_cm]
    assert at_match(settings) == pytest.approx(expected, abs=1e-5)
    found = settings.junction("J")
    assert found.separation_cm == separation_cm
    (middle, *_) = (place for place in found.mismatches if place.place == "match depth")
    assert middle.exact_cm == pytest.approx(separation_cm, abs=1e-9)


@pytest.mark.parametrize("borne_by", [None, "UPPER", "LOWER"])
def test_a_turned_edge_runs_beside_its_neighbours_at_the_separation(borne_by: str | None) -> None:
    between = junction(
        "J", (0, 0, 0), 5.0, turned_field="UPPER", separation_cm=0.4, borne_by=borne_by
    )
    laterals = [beam(f"lateral{g}", g, (0, -8, 9)) for g in (90.0, 270.0)]
    (settings,) = solve(pair(laterals, [beam("l", 180, (0, 0, -14))], between), machine())
    for place in settings.junction("J").mismatches:
        assert place.exact_cm == pytest.approx(0.4, abs=1e-9)
    lower = {None: -0.2, "UPPER": 0.0, "LOWER": -0.4}[borne_by]
    assert settings.fields[1].beams[0].superior_edge.z_at(0, -5) == pytest.approx(lower, abs=1e-5)


def test_a_separation_makes_the_skin_gap_wider_by_itself() -> None:
    gaps = []
    for separation_cm in (0.0, 0.5):
        between = junction("J", (0, 0, 0), 5.0, separation_cm=separation_cm, borne_by="LOWER")
        of = pair([beam("u", 180, (0, 0, 12))], [beam("l", 180, (0, 0, -12))], between)
        gaps.append(solve(of, machine())[0].junction("J").skin_gaps[0])
    without, wider = gaps
    assert wider.superior_part_cm == pytest.approx(without.superior_part_cm)
    # The source stands 105 cm above the match point and 100 cm above the skin.
    assert wider.exact_cm - without.exact_cm == pytest.approx(0.5 * 100 / 105, abs=1e-9)


def test_a_match_depth_and_the_skin_gap_that_goes_with_it_give_each_other() -> None:
    fields = [beam("u", 180, (0, 0, 12))], [beam("l", 180, (0, 0, -15))]
    by_depth = junction("J", (0, 0, 0), 5.0, separation_cm=0.2)
    gap = solve(pair(*fields, by_depth), machine())[0].junction("J").skin_gaps[0].exact_cm
    by_gap = junction("J", (0, 0, 0), None, skin_gap_cm=gap, thickness_cm=20.0, separation_cm=0.2)
    found = solve(pair(*fields, by_gap), machine())[0].junction("J")
    assert found.match_depth_cm == pytest.approx(5.0, abs=1e-7)
    assert isclose(found.skin_gaps[0].exact_cm, gap, abs_tol=1e-8)


def test_half_beams_stand_apart_everywhere_by_a_planned_separation() -> None:
    between = junction("J", (0, 0, 0), 5.0, technique=Technique.HALF_BEAM, separation_cm=0.2)
    both = [[beam(name, 180, (0, -5, 0))] for name in "ul"]
    (settings,) = solve(pair(*both, between), machine())
    assert [
        each.beams[0].exact_jaw_cm[jaw]
        for each, jaw in zip(settings.fields, ("Y1", "Y2"), strict=True)
    ] == [
        pytest.approx(0.1),
        pytest.approx(-0.1),
    ]
