"""Which way an edge goes in the patient, whatever its jaw does."""

from __future__ import annotations

from typing import TYPE_CHECKING

import pytest
from spine_course import held, machine, reach, spine

from featherlog.junction.edges import edge_move_cm
from featherlog.junction.solve import solve

if TYPE_CHECKING:
    from featherlog.junction.design import Course
    from featherlog.junction.plan import BeamSetting

STEP_CM = -1.5


def lowest_beam(of: Course) -> tuple[BeamSetting, BeamSetting]:
    """Return the beam of the lowest field at position B and at position A."""
    before, now = solve(of, machine())
    return now.fields[-1].beams[0], before.fields[-1].beams[0]


def test_a_held_border_stays_in_the_patient_while_its_jaw_closes() -> None:
    # Isocentre and border point at one height, so the edge is followed where it is held.
    of = spine(
        lower_follows="J2", offsets_cm=(0.0, STEP_CM), borders=(reach(10.0), held(0, 0, -56))
    )
    now, before = lowest_beam(of)
    jaw = now.inferior_jaw
    assert now.jaw_cm[jaw] - before.jaw_cm[jaw] == pytest.approx(-STEP_CM, abs=1e-5)
    assert edge_move_cm(now, before, "inferior") == pytest.approx(0.0, abs=1e-5)
    assert edge_move_cm(now, before, "superior", (0.0, -6.0)) == pytest.approx(STEP_CM, abs=1e-5)


def test_an_edge_moved_by_its_jaw_alone_goes_with_it() -> None:
    of = spine(offsets_cm=(0.0, STEP_CM), borders=(reach(10.0), reach(12.0)))
    now, before = lowest_beam(of)
    jaw = now.superior_jaw
    change_cm = now.jaw_cm[jaw] - before.jaw_cm[jaw]
    assert edge_move_cm(now, before, "superior") == pytest.approx(change_cm, abs=1e-9)
    assert edge_move_cm(now, before, "inferior") == 0.0
