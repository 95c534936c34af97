"""Turned beams and overlapping pairs against rays traced by the tests' own reading of IEC 61217."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st
from rays import Setting, edge_z, in_patient, source
from spine_course import beam, junction, machine, pair

from featherlog.errors import RefusedError
from featherlog.geometry.patient import PatientPosition
from featherlog.junction.design import Side, Technique
from featherlog.junction.solve import solve

if TYPE_CHECKING:
    from featherlog.junction.design import Course
    from featherlog.junction.plan import BeamSetting, PositionSettings

WITHIN_CM = 1e-9
place = st.floats(-12, 12)
Place = tuple[float, float]
# Lateral, tangent and oblique beams; near 0 and 180 there is no couch angle to be found.
side_gantry = st.one_of(st.floats(35, 145), st.floats(215, 325), st.sampled_from([90.0, 270.0]))


def exact(one: BeamSetting, lying: str) -> Setting:
    angles = (one.gantry_deg, one.exact_collimator_deg, one.exact_couch_deg)
    return Setting(lying, *angles, one.isocentre_cm, one.sad_cm)


def exact_edge_z(one: BeamSetting, lying: str, end: str, at: Place) -> float:
    jaw = one.inferior_jaw if end == "inferior" else one.superior_jaw
    return edge_z(exact(one, lying), jaw, one.exact_jaw_cm[jaw], *at)


@dataclass(frozen=True)
class Case:
    """Beams to be turned onto one neighbour, ``away_cm`` above it (or below), then moved."""

    lying: PatientPosition
    gantries_deg: list[float]
    neighbour_gantry_deg: float
    isocentre_cm: Place
    away_cm: float
    offset_cm: float
    upper_turns: bool
    sads_cm: tuple[float, float]


case = st.builds(
    Case,
    st.sampled_from(list(PatientPosition)),
    st.lists(side_gantry, min_size=1, max_size=2),
    st.floats(0, 359.9),
    st.tuples(st.floats(-6, 6), st.floats(-10, 0)),
    st.floats(6, 14),
    st.floats(-3, 3),
    st.booleans(),
    st.tuples(st.floats(80, 120), st.floats(80, 120)),
)


@given(case, st.lists(st.tuples(place, place), min_size=3, max_size=3))
def test_a_turned_edge_is_the_neighbours_edge_at_any_point(of: Case, points: list[Place]) -> None:
    up = 1 if of.upper_turns else -1
    turning = [
        beam(f"t{n}", gantry, (*of.isocentre_cm, up * of.away_cm), sad_cm=of.sads_cm[0])
        for n, gantry in enumerate(of.gantries_deg)
    ]
    still = [beam("still", of.neighbour_gantry_deg, (0, -4, -up * 12), sad_cm=of.sads_cm[1])]
    between = junction("J", (0, 0, 0), 5.0, turned_field="UPPER" if of.upper_turns else "LOWER")
    fields = (turning, still)[::up]
    course = pair(*fields, between, position=of.lying, offsets_cm=(0.0, of.offset_cm))
    moving, (fixed,) = (each.beams for each in solved(course).fields[::up])
    own, theirs = ("inferior", "superior")[::up]
    for one in moving:
        for at in points:
            expected = exact_edge_z(fixed, of.lying, theirs, at)
            assert exact_edge_z(one, of.lying, own, at) == pytest.approx(expected, abs=WITHIN_CM)


def solved(of: Course) -> PositionSettings:
    try:
        return solve(of, machine())[1]
    except RefusedError as refused:
        # The neighbour's plane may lie out of reach of every source on the arc.
        assume("no couch angle" not in str(refused) and "no jaw faces" not in str(refused))
        raise


def beams_that_light(field: list[tuple[Setting, float, float]], y_cm: float, z_cm: float) -> int:
    """Count the beams of a field whose ray to a midline point passes between its two Y jaws."""
    lit = 0
    for setting, low_cm, high_cm in field:
        _, sy, sz = source(setting)
        _, cy, cz = in_patient(setting, (0.0, 0.0, 0.0))
        # The plane of the isocentre lies square to these vertical beams.
        along = (cy - sy) / (y_cm - sy)
        lit += low_cm < sz + along * (z_cm - sz) - cz < high_cm
    return lit


@settings(max_examples=15)
@given(st.floats(8, 30), st.floats(8, 30), st.floats(6, 10), st.floats(0.5, 9))
def test_three_field_overlap_by_counting_rays(
    upper: float, lower: float, depth: float, beyond: float
) -> None:
    critical_cm = depth + min(beyond, depth)
    between = junction(
        "J",
        (0, 0, 0),
        depth,
        entrance=Side.ANTERIOR,
        thickness_cm=2 * depth,
        critical_depth_cm=critical_cm,
    )
    fields = [
        [beam(f"{name}{g:.0f}", g, (0, depth, z)) for g in (0.0, 180.0)]
        for name, z in (("u", upper), ("l", -lower))
    ]
    position_a = solve(pair(*fields, between), machine())[0]
    opened = [
        [
            (
                exact(one, "HFS"),
                one.jaw_cm[one.inferior_jaw],
                one.jaw_cm[one.superior_jaw],
            )
            for one in each.beams
        ]
        for each in position_a.fields
    ]
    step = 0.005
    counted = sum(
        sum(beams_that_light(field, critical_cm, index * step) for field in opened) > 2
        for index in range(-640, 641)
    )
    found = position_a.junction("J").three_field_overlap_cm
    assert found == pytest.approx(counted * step, abs=2 * step)
    expected = abs(upper - lower) / 100 * (critical_cm - depth)
    assert found == pytest.approx(expected, abs=1e-5)


@given(
    st.tuples(st.floats(20, 70), st.floats(5, 12)),
    st.sampled_from([0.0, 0.4, -0.3]),
    st.floats(-3, 3),
)
def test_tangents_meet_a_nodal_half_beam_wherever_the_junction_goes(
    tangent: tuple[float, float], separation_cm: float, offset_cm: float
) -> None:
    gantry, away = tangent
    nodal = [beam("nodal", 350.0, (5, 0, 0))]
    tangents = [beam("medial", 270 + gantry, (8, -3, -away))]
    tangents.append(beam("lateral", 90 + gantry, (8, -3, -away)))
    between = junction(
        "J",
        (8, -6, 0),
        3.0,
        entrance=Side.ANTERIOR,
        technique=Technique.ROTATED,
        turned_field="LOWER",
        separation_cm=separation_cm,
        borne_by="LOWER",
    )
    position_b = solved(pair(nodal, tangents, between, offsets_cm=(0.0, offset_cm)))
    for mismatch in position_b.junction("J").mismatches:
        assert mismatch.exact_cm == pytest.approx(separation_cm, abs=WITHIN_CM)
