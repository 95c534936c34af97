"""Edges and jaws of the program against rays traced by the tests' own reading of IEC 61217."""

from __future__ import annotations

from typing import TYPE_CHECKING

import pytest
from hypothesis import assume, given
from hypothesis import strategies as st
from rays import Setting, edge_z, ray
from spine_course import beam, junction, machine, pair

from featherlog.geometry.beams import BeamFrame, beam_frame
from featherlog.geometry.frames import PatientPosition
from featherlog.junction.placing import Task
from featherlog.junction.rounding import place_exact

if TYPE_CHECKING:
    from featherlog.junction.design import Beam

WITHIN_CM = 1e-9
position = st.sampled_from(list(PatientPosition))
turn = st.floats(-360, 360)
length = st.floats(-20, 20)
JAW_AXIS = {"X1": 0, "X2": 0, "Y1": 1, "Y2": 1}

settings = st.builds(
    Setting, position, turn, turn, turn, st.tuples(length, length, length), st.floats(80, 120)
)
# Angles that keep every end of a field within 30 degrees of the junction axis.
matched = st.builds(
    Setting,
    position,
    st.floats(0, 359.9),
    st.floats(-14, 14),
    st.floats(-14, 14),
    st.tuples(st.floats(-3, 3), st.floats(-10, 0), st.just(0.0)),
)


def frame(beam_setting: Setting) -> BeamFrame:
    return beam_frame(
        PatientPosition(beam_setting.position),
        gantry_deg=beam_setting.gantry_deg,
        collimator_deg=beam_setting.collimator_deg,
        couch_deg=beam_setting.couch_deg,
        isocentre_cm=beam_setting.isocentre_cm,
        sad_cm=beam_setting.sad_cm,
    )


@given(settings, st.sampled_from(sorted(JAW_AXIS)), length, length, st.floats(0.6, 1.4))
def test_a_ray_past_the_jaw_lies_in_the_edge_plane(
    setting: Setting, jaw: str, jaw_cm: float, along_cm: float, part: float
) -> None:
    x, y, z = ray(setting, jaw, jaw_cm, along_cm, part)
    normal_beam = frame(setting).axes[2]
    assume(abs(normal_beam[JAW_AXIS[jaw]] + jaw_cm / setting.sad_cm * normal_beam[2]) > 0.2)
    edge = frame(setting).edge(jaw_cm, JAW_AXIS[jaw])
    assert edge.z_at(x, y) == pytest.approx(z, abs=WITHIN_CM)


@given(settings, st.sampled_from(sorted(JAW_AXIS)), length, length, st.floats(0.6, 1.4))
def test_the_jaw_through_a_point_on_a_ray_is_the_jaw_the_ray_passed(
    setting: Setting, jaw: str, jaw_cm: float, along_cm: float, part: float
) -> None:
    point = ray(setting, jaw, jaw_cm, along_cm, part)
    assert frame(setting).jaw_through(point, JAW_AXIS[jaw]) == pytest.approx(jaw_cm, abs=WITHIN_CM)


@given(matched, matched, st.floats(-4, 4), st.floats(2, 9))
def test_every_solved_edge_passes_through_the_moved_match_point(
    above: Setting, below: Setting, offset_cm: float, depth_cm: float
) -> None:
    position = PatientPosition(above.position)
    upper = _moved(above, position, 12.0)
    lower = _moved(below, position, -12.0)
    course = pair(
        [_beam("u", upper)],
        [_beam("l", lower)],
        junction("J", (0, 0, 0), depth_cm),
        position=position,
    )
    chain = place_exact(Task(course, machine(), {"J": depth_cm}), {"J": offset_cm})
    for setting, end in (
        (upper, chain[0].beams[0].inferior),
        (lower, chain[1].beams[0].superior),
    ):
        z = edge_z(setting, end.jaw, end.jaw_cm, 0.0, -depth_cm)
        assert z == pytest.approx(offset_cm, abs=WITHIN_CM)


def _moved(setting: Setting, position: PatientPosition, z_cm: float) -> Setting:
    x, y, _ = setting.isocentre_cm
    angles = (setting.gantry_deg, setting.collimator_deg, setting.couch_deg)
    return Setting(position, *angles, (x, y, z_cm))


def _beam(name: str, setting: Setting) -> Beam:
    return beam(
        name,
        setting.gantry_deg,
        setting.isocentre_cm,
        collimator_deg=setting.collimator_deg,
        couch_deg=setting.couch_deg,
    )
