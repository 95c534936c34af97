"""The course sum against a computation that shares no code with it."""

from __future__ import annotations

import dataclasses
import math
from itertools import pairwise
from typing import TYPE_CHECKING

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from small_plans import (
    SAD_CM,
    beam,
    half_beam_plan,
    machine,
    plan,
    position,
    quality,
    toward_source,
)

from featherlog.dose.amounts import delivered_amounts, planned_amounts
from featherlog.dose.course_sum import AxisLine, edge_on_line, line_dose
from featherlog.geometry.patient import PatientPosition
from featherlog.geometry.planes import EdgePlane
from featherlog.sequence.progress import DeliveredBeam

if TYPE_CHECKING:
    from collections.abc import Collection

    from hypothesis.strategies import DrawFn

    from featherlog.junction.machine import DepthTable, Machine
    from featherlog.junction.plan import BeamSetting, Plan

ENERGIES = ("6 MV", "15 MV")


@st.composite
def machines(draw: DrawFn) -> Machine:
    widths_cm = st.tuples(*[st.floats(0.2, 1.2)] * 3)
    return machine(
        *(
            quality(
                draw(widths_cm),
                depth_cm=(1.5, 5.0, 10.0),
                transmission=draw(st.floats(0.0, 0.05)),
                name=name,
            )
            for name in ENERGIES
        )
    )


@st.composite
def plans(draw: DrawFn) -> Plan:
    """Two fields of one or two beams each, up to three positions, a few unequal fractions."""
    beams = [(field, name) for field in (0, 1) for name in range(draw(st.integers(1, 2)))]
    fixed = {
        key: {
            "gantry_deg": draw(st.floats(0.0, 360.0)),
            "isocentre_cm": draw(st.tuples(*[st.floats(-4.0, 4.0)] * 3)),
            "ssd_cm": draw(st.floats(85.0, 100.0)),
            "weight": draw(st.floats(0.1, 1.0)),
            "energy": draw(st.sampled_from(ENERGIES)),
        }
        for key in beams
    }
    positions = []
    for label in "ABC"[: draw(st.integers(1, 3))]:
        fields = [[], []]
        for (field, name), values in fixed.items():
            middle_cm = draw(st.floats(-3.0, 3.0))
            jaws = (middle_cm, 15.0) if field == 0 else (-15.0, middle_cm)
            fields[field].append(
                beam(f"{field}{name}", inferior_jaw_cm=jaws[0], superior_jaw_cm=jaws[1], **values)
            )
        positions.append(position(label, fields))
    fraction = st.tuples(st.sampled_from([p.label for p in positions]), st.floats(1.0, 3.0))
    return plan(positions, draw(st.lists(fraction, min_size=1, max_size=4)))


def normal_distribution(u: float) -> float:
    """Integrate the normal density from 0 to u by Simpson's rule."""
    u = max(-9.0, min(9.0, u))
    step = u / 200
    total = 0.0
    for index in range(201):
        factor = 1 if index in (0, 200) else 4 if index % 2 else 2
        total += factor * math.exp(-((index * step) ** 2) / 2)
    return 0.5 + total * step / 3 / math.sqrt(2 * math.pi)


def width_at(depth_cm: float, table: DepthTable) -> float:
    points = list(zip(table.depth_cm, table.value, strict=True))
    if depth_cm <= points[0][0]:
        return points[0][1]
    for (above, first), (below, second) in pairwise(points):
        if depth_cm <= below:
            return first + (second - first) * (depth_cm - above) / (below - above)
    return points[-1][1]


def direct_beam(
    z_cm: float, x_cm: float, y_cm: float, setting: BeamSetting, alder: Machine
) -> float:
    """One beam at one point, its edges by magnification from the source."""
    of = next(q for q in alder.qualities if q.name == setting.energy)
    source_x, source_y = toward_source(setting.gantry_deg)
    iso_x, iso_y, iso_z = setting.isocentre_cm
    distance = SAD_CM - (source_x * (x_cm - iso_x) + source_y * (y_cm - iso_y))
    width_cm = width_at(max(0.0, distance - setting.ssd_cm), of.penumbra_80_20_cm)
    rises = []
    for jaw_cm in (setting.jaw_cm["Y1"], setting.jaw_cm["Y2"]):
        edge_cm = iso_z + jaw_cm * distance / SAD_CM
        along_cm = width_cm / 1.6832424671458286 * math.hypot(1.0, jaw_cm / SAD_CM)
        rises.append(normal_distribution((z_cm - edge_cm) / along_cm))
    return of.transmission + (1 - of.transmission) * (rises[0] - rises[1])


def settings_of(p: Plan, label: str) -> list[BeamSetting]:
    there = next(each for each in p.positions if each.label == label)
    return [setting for field in there.fields for setting in field.beams]


POINT = st.tuples(st.floats(-3.0, 3.0), st.floats(-6.0, 0.0))


@settings(max_examples=40)
@given(plans(), machines(), POINT)
def test_planned_dose_is_the_sum_over_every_fraction_and_beam(
    p: Plan, alder: Machine, point: tuple[float, float]
) -> None:
    z_cm = [-4.0, -0.7, 0.3, 2.0]
    expected = [
        sum(
            fraction.dose_gy * setting.weight * direct_beam(z, *point, setting, alder)
            for fraction in p.fractions
            for setting in settings_of(p, fraction.position)
        )
        for z in z_cm
    ]
    line = AxisLine(*point, PatientPosition.HFS, alder)
    dose = line_dose(np.array(z_cm), line, p, planned_amounts(p))
    assert dose == pytest.approx(expected, rel=1e-6, abs=1e-6 * sum(f.dose_gy for f in p.fractions))


@settings(max_examples=40)
@given(plans(), machines(), POINT, st.data())
def test_delivered_dose_follows_each_beam_to_its_own_position(
    p: Plan, alder: Machine, point: tuple[float, float], data: st.DataObject
) -> None:
    names = [setting.beam for setting in settings_of(p, "A")]
    delivery = st.builds(
        DeliveredBeam,
        fraction=st.integers(1, len(p.fractions)),
        beam=st.sampled_from(names),
        position=st.sampled_from([each.label for each in p.positions]),
        meterset_mu=st.floats(0.0, 150.0),
        planned_mu=st.floats(50.0, 150.0),
    )
    deliveries = data.draw(st.lists(delivery, min_size=1, max_size=5))
    expected = 0.0
    for given_beam in deliveries:
        setting = next(
            each for each in settings_of(p, given_beam.position) if each.beam == given_beam.beam
        )
        part = given_beam.meterset_mu / given_beam.planned_mu
        dose_gy = p.fractions[given_beam.fraction - 1].dose_gy
        expected += dose_gy * setting.weight * part * direct_beam(0.3, *point, setting, alder)
    line = AxisLine(*point, PatientPosition.HFS, alder)
    dose = line_dose(np.array([0.3]), line, p, delivered_amounts(p, deliveries))
    assert dose[0] == pytest.approx(expected, rel=1e-6, abs=1e-6)


def test_an_oblique_edge_plane_stretches_the_penumbra_along_the_axis() -> None:
    setting = beam("UPPER", inferior_jaw_cm=0.0, superior_jaw_cm=15.0)
    line = AxisLine(0.0, -5.0, PatientPosition.HFS, machine(quality(0.5)))
    straight = edge_on_line(line, setting, EdgePlane((0.0, 0.0, 1.0), 2.0))
    oblique = edge_on_line(line, setting, EdgePlane((1.2, 0.0, 1.6), 3.2))
    assert (straight.z_cm, oblique.z_cm) == (2.0, 2.0)
    assert oblique.sigma_cm == pytest.approx(straight.sigma_cm / 0.8)


def test_with_the_table_turned_the_penumbra_is_that_of_the_depth_at_the_edge() -> None:
    setting = dataclasses.replace(
        beam("LEFT", inferior_jaw_cm=0.0, superior_jaw_cm=15.0), gantry_deg=90.0, couch_deg=30.0
    )
    alder = machine(quality((0.4, 0.8), depth_cm=(5.0, 9.0)))
    line = AxisLine(0.0, -5.0, PatientPosition.HFS, alder)
    # The isocentre lies at 5 cm; each cm toward the head adds sin 30 to the depth.
    edges = [
        edge_on_line(line, setting, EdgePlane((0.0, 0.0, 1.0), z_cm)).sigma_cm
        for z_cm in (0.0, 4.0)
    ]
    assert edges[1] / edges[0] == pytest.approx(0.6 / 0.4)


def late(field: str, fractions: Collection[int]) -> list[DeliveredBeam]:
    """Thirteen fractions, all fields at B from the sixth; one field stays at A for some."""
    deliveries = []
    for number in range(1, 14):
        for name in ("UPPER", "LOWER"):
            stays = number <= 5 or (name == field and number in fractions)
            deliveries.append(
                DeliveredBeam(number, "field", name, "A" if stays else "B", 100.0, 100.0)
            )
    return deliveries


@pytest.mark.parametrize(
    ("field", "fractions", "strip_gy"),
    [
        ("LOWER", [6], 25.2),
        ("UPPER", [6], 21.6),
        ("LOWER", range(6, 11), 32.4),
        ("UPPER", range(6, 11), 14.4),
    ],
)
def test_a_field_left_behind_doubles_or_empties_a_strip_one_step_wide(
    field: str, fractions: Collection[int], strip_gy: float
) -> None:
    p = half_beam_plan("AAAAABBBBBCCC")
    line = AxisLine(0.0, -5.0, PatientPosition.HFS, machine(quality(0.01)))
    amounts = delivered_amounts(p, late(field, fractions))
    doses = line_dose(np.array([-1.2, -0.8, -0.5, -0.2, 0.2]), line, p, amounts)
    assert doses == pytest.approx([23.4, strip_gy, strip_gy, strip_gy, 23.4], abs=1e-6)
