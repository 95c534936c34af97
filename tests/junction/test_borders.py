"""Outer borders: points and limits that must stay covered, and leaves inside jaws."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

import pytest
from rays import Setting, edge_z
from spine_course import FINE, beam, free, held, junction, machine, pair, reach, spine

from featherlog.errors import RefusedError
from featherlog.junction.design import Border, EdgesBy
from featherlog.junction.machine import Jaw, Range, Steps
from featherlog.junction.solve import solve

if TYPE_CHECKING:
    from featherlog.junction.design import Course

MILLIMETRE = Steps(jaw_cm=0.1, table_cm=0.1, angle_deg=1.0)


def covering(limits_cm: tuple[float, float] | None) -> Course:
    """Give the spine with laterals, whose couch turn tilts the superior border."""
    return replace(
        spine(offsets_cm=(0.0, -2.0)),
        superior_border=Border((0, -8, 20), held=True, cover_x_cm=limits_cm),
    )


@pytest.mark.parametrize("position", [0, 1])
def test_a_tilted_border_covers_both_lateral_limits(position: int) -> None:
    settings = solve(covering((-7.0, 7.0)), machine())[position]
    for one in settings.fields[0].beams:
        angles = (one.gantry_deg, one.exact_collimator_deg, one.exact_couch_deg)
        traced = Setting("HFS", *angles, one.isocentre_cm)
        jaw = one.superior_jaw
        edges = [edge_z(traced, jaw, one.exact_jaw_cm[jaw], x, -8) for x in (-7.0, 0.0, 7.0)]
        assert min(edges) == pytest.approx(20.0, abs=1e-9)
        assert max(edges) > 20.5
    border = settings.borders[0]
    assert (border.end, border.x_cm) == ("superior", (0.0, -7.0, 7.0))
    assert border.short_cm == pytest.approx(0.0, abs=1e-5)
    assert min(border.z_cm) == pytest.approx(20.0, abs=1e-5)


def test_without_limits_only_the_border_point_is_met() -> None:
    border = solve(covering(None), machine())[0].borders[0]
    assert border.x_cm == (0.0,)
    assert border.z_cm == pytest.approx((20.0,), abs=1e-5)


@pytest.mark.parametrize("steps", [MILLIMETRE, FINE])
def test_a_border_that_travels_away_is_refused_with_its_figure(steps: Steps) -> None:
    of = replace(
        spine(offsets_cm=(0.0, 1.0), lower_follows="J2"),
        inferior_border=Border((0, -6, -56), cover_x_cm=(-3.0, 3.0)),
    )
    with pytest.raises(RefusedError) as caught:
        solve(of, machine(steps=steps))
    # The posterior field's edge does not tilt across: it goes up with the isocentre by 1 cm.
    assert str(caught.value).startswith(
        "position B: the inferior border would be left uncovered by 1.0"
    )
    assert "the nearest admissible offset is" in str(caught.value)


def test_a_border_that_travels_outward_stays_covered() -> None:
    of = replace(
        spine(offsets_cm=(0.0, -1.0), lower_follows="J2"),
        inferior_border=Border((0, -6, -56), cover_x_cm=(-3.0, 3.0)),
    )
    border = solve(of, machine())[1].borders[1]
    assert (border.end, border.short_cm) == ("inferior", 0.0)
    assert border.z_cm == pytest.approx((-57.0,) * 3, abs=1e-5)


def test_a_border_given_by_reach_is_not_watched() -> None:
    of = replace(spine(offsets_cm=(0.0,)), inferior_border=reach(11.0))
    assert [border.end for border in solve(of, machine())[0].borders] == ["superior"]


def two(edges_by: EdgesBy) -> Course:
    upper = [beam("u", 180, (0, -5, 12), edges_by=edges_by)]
    lower = [beam("l", 180, (0, -5, -12))]
    return pair(upper, lower, junction("J", (0, 0, 0), 5.0))


def test_leaf_edges_are_not_held_to_the_travel_of_the_jaws() -> None:
    on = machine(travel={Jaw.Y1: Range(-11.0, 60.0)})
    with pytest.raises(RefusedError, match=r"jaw Y1 of beam u would stand at .12\.00 cm"):
        solve(two(EdgesBy.JAWS), on)
    (settings,) = solve(replace(two(EdgesBy.LEAVES), inferior_border=reach(10.0)), on)
    assert settings.fields[0].beams[0].edges_by == "leaves"
    assert settings.fields[0].beams[0].jaw_cm[Jaw.Y1] == pytest.approx(-12.0)


def test_the_side_jaws_of_a_leaf_field_still_have_their_travel() -> None:
    on = machine(travel={Jaw.X2: Range(-60.0, 4.0)})
    with pytest.raises(RefusedError, match="jaw X2 of beam u would stand at"):
        solve(two(EdgesBy.LEAVES), on)


def test_a_free_border_and_a_held_one_are_the_same_while_nothing_moves() -> None:
    ends = [
        solve(replace(spine(offsets_cm=(0.0, -1.0)), inferior_border=border), machine())[1]
        for border in (held(0, -6, -56), free(0, -6, -56))
    ]
    one, other = (each.fields[2].beams[0].exact_jaw_cm for each in ends)
    assert one == other
