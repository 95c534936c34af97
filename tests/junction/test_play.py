"""How far settings off by their tolerance move a match, against every way of being off."""

from __future__ import annotations

from itertools import product
from typing import TYPE_CHECKING

import pytest
from rays import Setting, edge_z
from spine_course import beam, junction, machine, pair, spine

from featherlog.junction.design import Technique
from featherlog.junction.plan import Play
from featherlog.junction.solve import solve

if TYPE_CHECKING:
    from collections.abc import Iterable

    from featherlog.junction.plan import BeamSetting, PositionSettings

JAW_CM, ANGLE_DEG = 0.1, 1.0


def test_two_jaws_each_off_by_a_millimetre_part_by_two_at_the_isocentre() -> None:
    # At the isocentre's depth; less on the skin, 5 cm nearer to the source.
    half = junction("J", (0, 0, 0), 5.0, technique=Technique.HALF_BEAM)
    both = [[beam(name, 180, (0, -5, 0))] for name in "ul"]
    (settings,) = solve(pair(*both, half), machine())
    assert settings.junction("J").if_jaws_off == Play(pytest.approx(0.2), pytest.approx(0.2))


@pytest.mark.parametrize("separation_cm", [0.3, -0.3])
def test_neither_a_planned_separation_nor_a_skin_gap_counts_as_being_off(
    separation_cm: float,
) -> None:
    # Edges 20 cm apart at the isocentre plane gap by 1 cm on the skin, which is no error.
    of = pair(
        [beam("u", 180, (0, -5, 10))],
        [beam("l", 180, (0, -5, -10))],
        junction("J", (0, 0, 0), 5.0, thickness_cm=20.0, separation_cm=separation_cm),
    )
    found = solve(of, machine())[0].junction("J")
    assert found.skin_gaps[0].expected_cm == pytest.approx(1.0 + 0.95 * separation_cm, abs=0.05)
    assert found.if_jaws_off is not None
    assert found.if_jaws_off.at_match_depth_cm == pytest.approx(0.2)
    # Worst on the opposite skin, 15 cm below the isocentre.
    assert found.if_jaws_off.worst_cm == pytest.approx(0.2 * 1.15)


@pytest.mark.parametrize("isocentres_z_cm", [(9.0, -9.0), (0.0, 0.0)])
def test_the_table_counts_under_fields_that_it_moves_each_for_itself(
    isocentres_z_cm: tuple[float, float],
) -> None:
    # Tolerances of 0.2 cm; fields of one isocentre share one table setting and its error.
    between = junction("J", (0, 0, 0), 5.0, technique=Technique.HALF_BEAM)
    both = [[beam(name, 180, (0, -5, z))] for name, z in zip("ul", isocentres_z_cm, strict=True)]
    still, moved = (
        solve(pair(*both, between, follows=follows), machine())[0].junction("J")
        for follows in (None, "J")
    )
    assert moved.if_jaws_off == still.if_jaws_off
    assert moved.if_all_off is not None
    assert still.if_all_off is not None
    apart = 2 * 0.2 if isocentres_z_cm[0] else 0.0
    for of_moved, of_still in (
        (moved.if_all_off.worst_cm, still.if_all_off.worst_cm),
        (moved.if_all_off.at_match_depth_cm, still.if_all_off.at_match_depth_cm),
    ):
        assert of_moved - of_still == pytest.approx(apart)


def edge_places(
    one: BeamSetting, end: str, at: tuple[float, float], *, angles: bool
) -> Iterable[float]:
    """Yield where an edge lies with every setting off by its tolerance, either way."""
    jaw = one.superior_jaw if end == "superior" else one.inferior_jaw
    ways = product((-1, 1), repeat=4) if angles else [(way, 0, 0, 0) for way in (-1, 1)]
    for jaw_way, *turns in ways:
        gantry, collimator, couch = (ANGLE_DEG * way for way in turns)
        off = Setting(
            "HFS",
            one.gantry_deg + gantry,
            one.collimator_deg + collimator,
            one.couch_deg + couch,
            one.isocentre_cm,
        )
        yield edge_z(off, jaw, one.jaw_cm[jaw] + jaw_way * JAW_CM, *at)


def farthest_of_all_ways(settings: PositionSettings, name: str, *, angles: bool) -> float:
    """Return the greatest change of the mismatch as set that any way of being off makes."""
    index = [each.junction for each in settings.junctions].index(name)
    uppers, lowers = (each.beams for each in settings.fields[index : index + 2])
    found = [0.0]
    for place in settings.junction(name).mismatches:
        at = (place.x_cm, place.y_cm)
        for above, below in product(uppers, lowers):
            as_set = above.inferior_edge.z_at(*at) - below.superior_edge.z_at(*at)
            ends = list(edge_places(above, "inferior", at, angles=angles))
            starts = list(edge_places(below, "superior", at, angles=angles))
            found += [max(ends) - min(starts) - as_set, min(ends) - max(starts) - as_set]
    return max(abs(value) for value in found)


@pytest.mark.parametrize("name", ["J1", "J2"])
@pytest.mark.parametrize("position", [0, 1])
def test_the_sum_of_single_errors_is_the_worst_of_all_together(position: int, name: str) -> None:
    settings = solve(spine(), machine())[position]
    found = settings.junction(name)
    jaws = farthest_of_all_ways(settings, name, angles=False)
    everything = farthest_of_all_ways(settings, name, angles=True)
    assert found.if_jaws_off is not None
    assert found.if_jaws_off.worst_cm == pytest.approx(jaws, abs=1e-4)
    # First order: what two errors make of each other is left out.
    assert found.if_all_off is not None
    assert found.if_all_off.worst_cm == pytest.approx(everything, rel=0.03)
    assert everything > jaws
