"""What is left when settings are off by their tolerance, against trying every way of being off."""

from __future__ import annotations

from itertools import product
from typing import TYPE_CHECKING

import pytest
from rays import Setting, edge_z
from spine_course import beam, junction, machine, pair, spine

from featherlog.junction.design import Technique
from featherlog.junction.solve import solve

if TYPE_CHECKING:
    from collections.abc import Iterable

    from featherlog.junction.plan import BeamSetting, PositionSettings

JAW_CM, ANGLE_DEG = 0.1, 1.0


def test_two_jaws_each_off_by_a_millimetre_part_by_two_at_the_isocentre() -> None:
    # At the isocentre's depth and on the skin, 5 cm nearer to the source.
    half = junction("J", (0, 0, 0), 5.0, technique=Technique.HALF_BEAM)
    both = [[beam(name, 180, (0, -5, 0))] for name in "ul"]
    (settings,) = solve(pair(*both, half), machine())
    assert settings.junction("J").if_jaws_off_cm == pytest.approx(0.2)


@pytest.mark.parametrize(("separation_cm", "worst_cm"), [(0.3, 0.5), (-0.3, -0.5)])
def test_errors_add_to_the_planned_separation(separation_cm: float, worst_cm: float) -> None:
    between = junction(
        "J", (0, 0, 0), 5.0, technique=Technique.HALF_BEAM, separation_cm=separation_cm
    )
    both = [[beam(name, 180, (0, -5, 0))] for name in "ul"]
    (settings,) = solve(pair(*both, between), machine())
    assert settings.junction("J").if_jaws_off_cm == pytest.approx(worst_cm, abs=1e-3)


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


def worst_of_all_ways(settings: PositionSettings, name: str, *, angles: bool) -> float:
    index = [each.junction for each in settings.junctions].index(name)
    uppers, lowers = (each.beams for each in settings.fields[index : index + 2])
    found = [0.0]
    for place in settings.junction(name).mismatches:
        at = (place.x_cm, place.y_cm)
        for above, below in product(uppers, lowers):
            ends = list(edge_places(above, "inferior", at, angles=angles))
            starts = list(edge_places(below, "superior", at, angles=angles))
            found += [max(ends) - min(starts), min(ends) - max(starts)]
    return max(abs(value) for value in found)


@pytest.mark.parametrize("name", ["J1", "J2"])
@pytest.mark.parametrize("position", [0, 1])
def test_the_sum_of_single_errors_is_the_worst_of_all_together(position: int, name: str) -> None:
    settings = solve(spine(), machine())[position]
    found = settings.junction(name)
    jaws = worst_of_all_ways(settings, name, angles=False)
    everything = worst_of_all_ways(settings, name, angles=True)
    assert abs(found.if_jaws_off_cm) == pytest.approx(jaws, abs=1e-4)
    # First order: what two errors make of each other is left out.
    assert abs(found.if_all_off_cm) == pytest.approx(everything, rel=0.03)
    assert everything > jaws
