"""A junction on a sloping back against lines drawn in the sagittal plane."""

from __future__ import annotations

from dataclasses import dataclass
from math import cos, radians, sin, tan

import pytest
from spine_course import beam, junction, machine, pair

from featherlog.junction.design import Side
from featherlog.junction.solve import solve

SAD = 100.0
DEPTH = 5.0
# Isocentres on the level of the skin point, so far above and below the match point.
UPPER_Z, LOWER_Z = 12.0, -15.0


@dataclass(frozen=True)
class Skin:
    """An entrance side: its gantry angle, and the sign of y that leaves the patient."""

    side: Side
    gantry_deg: float
    outward: int


BACK, FRONT = Skin(Side.POSTERIOR, 180.0, 1), Skin(Side.ANTERIOR, 0.0, -1)


def meets_skin(isocentre_z_cm: float, match_z_cm: float, slope_deg: float) -> float:
    """Return the z at which the line from source through match point crosses the skin.

    Heights are outward from the level of the skin point; the skin rises toward the head.
    """
    rise = tan(radians(slope_deg))
    # Along the line: z = match + t·(isocentre - match), height = -DEPTH + t·(SAD + DEPTH).
    run, climb = isocentre_z_cm - match_z_cm, SAD + DEPTH
    part = (rise * match_z_cm + DEPTH) / (climb - rise * run)
    return match_z_cm + part * run


@pytest.mark.parametrize("skin", [BACK, FRONT], ids=["back", "front"])
@pytest.mark.parametrize("slope_deg", [0.0, 10.0, -20.0])
@pytest.mark.parametrize("offset_cm", [0.0, -1.5, 2.0])
def test_the_gap_along_the_axis_and_along_the_skin(
    skin: Skin, slope_deg: float, offset_cm: float
) -> None:
    of = pair(
        [beam("u", skin.gantry_deg, (0, 0, UPPER_Z))],
        [beam("l", skin.gantry_deg, (0, 0, LOWER_Z))],
        junction("J", (0, 0, 0), DEPTH, entrance=skin.side, skin_slope_deg=slope_deg),
        offsets_cm=(0.0, offset_cm),
    )
    (gap,) = solve(of, machine())[1].junction("J").skin_gaps
    above, below = (meets_skin(z, offset_cm, slope_deg) for z in (UPPER_Z, LOWER_Z))
    assert gap.exact_cm == pytest.approx(above - below, abs=1e-9)
    assert gap.superior_part_cm == pytest.approx(above - offset_cm, abs=1e-5)
    assert gap.inferior_part_cm == pytest.approx(offset_cm - below, abs=1e-5)
    along = (above - below) / cos(radians(slope_deg))
    assert gap.along_skin_cm == pytest.approx(along, abs=1e-5)


@pytest.mark.parametrize("slope_deg", [12.0, -12.0])
def test_a_couch_move_is_along_the_axis_only_and_changes_the_ssd(slope_deg: float) -> None:
    move = -2.0
    of = pair(
        [beam("u", 180, (0, 0, UPPER_Z)), beam("front", 0, (0, 0, UPPER_Z))],
        [beam("l", 180, (0, 0, LOWER_Z))],
        junction("J", (0, 0, 0), DEPTH, skin_slope_deg=slope_deg, thickness_cm=20.0),
        follows="J",
        offsets_cm=(0.0, move),
    )
    settings = solve(of, machine())[1]
    # Toward the feet a back that rises to the head falls away from the source.
    rise = tan(radians(slope_deg)) * move
    (back, front), (lower,) = (each.beams for each in settings.fields)
    assert back.ssd_cm == pytest.approx(95.0 - rise)
    assert lower.ssd_cm == pytest.approx(95.0 - rise)
    assert front.ssd_cm == 95.0
    assert settings.junction("J").depth_below_skin_cm == pytest.approx(DEPTH + rise)
    assert settings.junction("J").match_depth_cm == DEPTH
    assert settings.fields[0].table_from_a_cm == (0, 2.0, 0)


def axis_meets_skin(gantry_deg: float, couch_deg: float, slope_deg: float, move_cm: float) -> float:
    """Return the distance from source to sloping back along a beam axis, by bisection.

    Head first supine, isocentre on the axis of the back 8 cm deep, moved along the patient.
    """
    tilt = radians(gantry_deg)
    turn = radians(couch_deg)
    # The source as the patient sees it: right-handed turns about the vertical, then the gantry.
    source = (
        SAD * sin(tilt) * cos(turn),
        -8.0 - SAD * cos(tilt),
        UPPER_Z + move_cm - SAD * sin(tilt) * sin(turn),
    )
    isocentre = (0.0, -8.0, UPPER_Z + move_cm)
    near, far = 0.0, 2 * SAD
    for _ in range(80):
        middle = (near + far) / 2
        _, y, z = (a + (b - a) * middle / SAD for a, b in zip(source, isocentre, strict=True))
        outside = y > tan(radians(slope_deg)) * z
        near, far = (middle, far) if outside else (near, middle)
    return near


@pytest.mark.parametrize("gantry_deg", [180.0, 150.0, 215.0])
@pytest.mark.parametrize("couch_deg", [0.0, 20.0])
@pytest.mark.parametrize("slope_deg", [12.0, -20.0])
def test_the_ssd_of_an_oblique_beam_runs_to_where_its_axis_meets_the_slope(
    gantry_deg: float, couch_deg: float, slope_deg: float
) -> None:
    move = -2.0
    before, after = (axis_meets_skin(gantry_deg, couch_deg, slope_deg, by) for by in (0.0, move))
    oblique = beam("u", gantry_deg, (0, -8, UPPER_Z), couch_deg=couch_deg, ssd_cm=before)
    of = pair(
        [oblique],
        [beam("l", 180, (0, 0, LOWER_Z))],
        junction("J", (0, 0, 0), DEPTH, skin_slope_deg=slope_deg),
        follows="J",
        offsets_cm=(0.0, move),
    )
    (found,) = solve(of, machine())[1].fields[0].beams
    assert found.ssd_cm == pytest.approx(after, abs=1e-9)


def test_fields_moved_by_their_jaws_keep_their_ssd_on_a_slope() -> None:
    of = pair(
        [beam("u", 180, (0, 0, UPPER_Z))],
        [beam("l", 180, (0, 0, LOWER_Z))],
        junction("J", (0, 0, 0), DEPTH, skin_slope_deg=12.0),
        offsets_cm=(0.0, -2.0),
    )
    for each in solve(of, machine())[1].fields:
        assert each.beams[0].ssd_cm == 95.0
