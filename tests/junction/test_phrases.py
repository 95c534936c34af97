"""How the figures of a junction are said."""

from __future__ import annotations

from dataclasses import replace

import pytest
from spine_course import beam, junction, machine, pair, spine

from featherlog.junction.design import Side
from featherlog.junction.machine import Steps
from featherlog.junction.phrases import angles_beside_set, mismatch_as_set, plays
from featherlog.junction.plan import Mismatch, Play
from featherlog.junction.solve import solve


@pytest.mark.parametrize(
    ("worst", "least", "most", "said"),
    [
        (1.125, -1.125, 1.125, "+1.125, −1.125"),
        (-0.4, -0.4, 0.1, "−0.400, +0.100"),
        (0.3, 0.1, 0.3, "+0.300"),
        (-0.3, -0.3, -0.1, "−0.300"),
        (0.3, -0.0004, 0.3, "+0.300"),
        (0.0, 0.0, 0.0, "0.000"),
    ],
)
def test_a_gap_and_an_overlap_at_one_point_are_both_said(
    worst: float, least: float, most: float, said: str
) -> None:
    assert mismatch_as_set(Mismatch("cord", 0.0, 0.0, worst, worst, least, most)) == said


def test_a_plan_stored_without_the_extremes_says_the_worst_alone() -> None:
    assert mismatch_as_set(Mismatch("cord", 0.0, 0.0, 0.1, 0.2)) == "+0.200"


def test_opposed_pairs_of_unequal_length_gap_and_overlap_alike_at_the_cord() -> None:
    # Khan's pairs of 30 and 15 cm matched at 10 cm: 5 cm deeper the edges part by 0.75 and 0.375.
    upper, lower = (
        [beam(f"{name} AP", 0, (0, -10, z)), beam(f"{name} PA", 180, (0, 10, z))]
        for name, z in (("upper", 16.5), ("lower", -8.25))
    )
    between = junction(
        "J", (0, -10, 0), 10.0, entrance=Side.ANTERIOR, thickness_cm=20.0, critical_depth_cm=15.0
    )
    found = solve(pair(upper, lower, between), machine())[0].junction("J")
    cords = [place for place in found.mismatches if place.place == "cord"]
    assert [mismatch_as_set(cord) for cord in cords] == ["+1.125, −1.125"] * 3


def test_how_far_settings_may_move_the_match_is_said_either_way() -> None:
    (settings,) = solve(spine(offsets_cm=(0.0,)), machine())
    known = replace(
        settings.junctions[0], if_jaws_off=Play(0.2, 0.236), if_all_off=Play(0.5, 0.671)
    )
    assert list(plays(known)) == [
        ("jaws", "±0.20 cm at match depth, ±0.24 cm at worst"),
        ("jaws, all angles, moved tables", "±0.50 cm at match depth, ±0.67 cm at worst"),
    ]
    assert list(plays(replace(known, if_jaws_off=None, if_all_off=None))) == []


def test_angles_against_the_neighbour_as_set_are_said_where_they_differ() -> None:
    coarse, fine = (
        solve(spine(offsets_cm=(0.0,)), machine(steps=steps))[0]
        for steps in (Steps(0.1, 0.1, 1.0), Steps(1e-9, 1e-9, 1e-9))
    )
    assert angles_beside_set(coarse.fields[0].beams[0]) == (
        "against the neighbour as set: collimator −7.6040, couch +4.9542 degrees"
    )
    assert angles_beside_set(fine.fields[0].beams[0]) == ""
    assert angles_beside_set(coarse.fields[1].beams[0]) == ""
