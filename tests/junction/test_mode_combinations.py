"""Every way of moving three fields in every patient position has one answer, and it is right.

Four positions × jaws or couch for each field × held or free for both borders × the junction that
the middle field follows (with offsets to one end or the other) × angles recomputed or held: 512.
"""

from __future__ import annotations

from dataclasses import dataclass
from itertools import product
from math import isfinite
from typing import TYPE_CHECKING

import pytest
from rays import Setting, edge_z
from spine_course import free, held, machine, spine

from featherlog.geometry.patient import PatientPosition
from featherlog.junction.design import Angles
from featherlog.junction.solve import solve

if TYPE_CHECKING:
    from collections.abc import Callable

    from featherlog.junction.design import Border
    from featherlog.junction.plan import BeamSetting, FieldSetting

WITHIN_CM = 1e-9
JAWS, COUCH = False, True
MATCH = {"J1": (0.0, -5.0, 0.0), "J2": (0.0, -6.0, -30.0)}
TOP, BOTTOM = (0.0, -8.0, 20.0), (0.0, -6.0, -56.0)
# The middle field's junction, and by how much each junction moves.
FOLLOWED = [("J1", {"J1": -1.0, "J2": -0.7}), ("J2", {"J1": 0.9, "J2": 1.2})]


@dataclass(frozen=True)
class Case:
    """One combination; ``follows`` names the junction of each field moved by the couch."""

    position: PatientPosition
    follows: tuple[str | None, str | None, str | None]
    borders: tuple[Callable[[float, float, float], Border], ...]
    offset_cm: dict[str, float]
    angles: Angles

    def __str__(self) -> str:
        modes = "-".join(name or "jaws" for name in self.follows)
        ends = "-".join(border.__name__ for border in self.borders)
        return f"{self.position}-{modes}-{ends}-{self.offset_cm['J1']:+.1f}-{self.angles}"

    @property
    def moves_cm(self) -> list[float]:
        return [self.offset_cm[name] if name else 0.0 for name in self.follows]


CASES = [
    Case(
        position,
        tuple(
            name if mode else None for name, mode in zip(("J1", followed, "J2"), modes, strict=True)
        ),
        borders,
        offset_cm,
        angles,
    )
    for position, modes, borders, (followed, offset_cm), angles in product(
        PatientPosition,
        product((JAWS, COUCH), repeat=3),
        product((held, free), repeat=2),
        FOLLOWED,
        Angles,
    )
]


def test_there_are_512() -> None:
    assert len({str(case) for case in CASES}) == 512


@pytest.mark.parametrize("case", CASES, ids=str)
def test_every_combination_is_well_posed(case: Case) -> None:
    brain, upper, lower = case.follows
    course = spine(
        case.position,
        brain_follows=brain,
        upper_follows=upper,
        lower_follows=lower,
        borders=(case.borders[0](*TOP), case.borders[1](*BOTTOM)),
        angles=case.angles,
        offsets_cm=(case.offset_cm,),
    )
    (settings,) = solve(course, machine())
    laterals, (above,), (below,) = (each.beams for each in settings.fields)
    check_moves(case, settings.fields)
    for one in (*laterals, above, below):
        assert all(isfinite(value) for value in (*one.jaw_cm.values(), *one.isocentre_cm))
        assert isfinite(one.collimator_deg)
        assert isfinite(one.couch_deg)
    for lateral in laterals:
        assert_through(case, lateral, "superior", border_point(case, TOP, 0))
        assert_through(case, lateral, "inferior", match_point(case, "J1"))
    assert_through(case, above, "superior", match_point(case, "J1"))
    assert_through(case, above, "inferior", match_point(case, "J2"))
    assert_through(case, below, "superior", match_point(case, "J2"))
    assert_through(case, below, "inferior", border_point(case, BOTTOM, 2))
    if case.angles is Angles.RECOMPUTED:
        for place in settings.junction("J1").mismatches:
            assert place.exact_cm == pytest.approx(0.0, abs=WITHIN_CM)


def check_moves(case: Case, fields: tuple[FieldSetting, ...]) -> None:
    """Check that the table goes against the isocentre; to the feet is to the gantry head first."""
    toward_gantry = -1 if case.position.startswith("HF") else 1
    for each, move, name in zip(fields, case.moves_cm, case.follows, strict=True):
        assert each.moved_by == ("couch" if name else "jaws")
        assert each.moved_cm == pytest.approx(move, abs=WITHIN_CM)
        assert each.table_from_a_cm == pytest.approx((0, toward_gantry * move, 0), abs=WITHIN_CM)


def match_point(case: Case, name: str) -> tuple[float, float, float]:
    x, y, z = MATCH[name]
    return x, y, z + case.offset_cm[name]


def border_point(
    case: Case, at: tuple[float, float, float], field: int
) -> tuple[float, float, float]:
    travels = case.borders[0 if field == 0 else 1] is free
    return at[0], at[1], at[2] + (case.moves_cm[field] if travels else 0.0)


def assert_through(
    case: Case, one: BeamSetting, end: str, point: tuple[float, float, float]
) -> None:
    x, y, z = point
    jaw = one.superior_jaw if end == "superior" else one.inferior_jaw
    angles = (one.gantry_deg, one.exact_collimator_deg, one.exact_couch_deg)
    traced = Setting(case.position, *angles, one.isocentre_cm)
    assert edge_z(traced, jaw, one.exact_jaw_cm[jaw], x, y) == pytest.approx(z, abs=WITHIN_CM)
