"""What the machine cannot do is refused by limit, value and nearest admissible offset."""

from __future__ import annotations

import re
from dataclasses import replace
from typing import TYPE_CHECKING

import pytest
from spine_course import FFS, HFS, beam, junction, machine, pair, spine

from featherlog.errors import RefusedError
from featherlog.junction import limits
from featherlog.junction.design import Technique
from featherlog.junction.machine import Jaw, Machine, Range, Steps
from featherlog.junction.rounding import place_rounded
from featherlog.junction.solve import solve
from featherlog.words import MINUS, signed

if TYPE_CHECKING:
    from collections.abc import Mapping

    from featherlog.junction.design import Course
    from featherlog.junction.placing import Chain, Task

MILLIMETRE = Steps(jaw_cm=0.1, table_cm=0.1, angle_deg=1.0)


def refusal(of: Course, on: Machine) -> str:
    with pytest.raises(RefusedError) as caught:
        solve(of, on)
    return str(caught.value)


def machine_with(steps: Steps, jaw: Jaw, low: float, high: float) -> Machine:
    return machine(steps=steps, travel={jaw: Range(low, high)})


@pytest.mark.parametrize("steps", [MILLIMETRE, Steps(1e-6, 1e-6, 1e-6)])
@pytest.mark.parametrize(
    ("asked", "jaw", "travel"),
    [
        # LOWER's superior jaw closes toward the axis as the junction goes down, and passes it.
        (-17.0, Jaw.Y2, (-1.0, 20.0)),
        (-14.9, Jaw.Y2, (0.5, 20.0)),
        # UPPER's inferior jaw opens.
        (-4.0, Jaw.Y1, (-17.25, 20.0)),
        (-4.006, Jaw.Y1, (-17.3, 20.0)),
        (3.3, Jaw.Y2, (-20.0, 16.0)),
    ],
)
def test_a_jaw_beyond_its_travel_names_the_nearest_offset_that_can_be_set(
    asked: float, jaw: Jaw, travel: tuple[float, float], steps: Steps
) -> None:
    on = machine_with(steps, jaw, *travel)
    message = refusal(spine(offsets_cm=(0.0, asked)), on)
    low, high = travel
    limits = re.escape(f"{signed(low)} to {signed(high)}")
    said = re.fullmatch(
        rf"position B: jaw {jaw} of beam [a-z ]+ would stand at (\S+) cm, beyond its "
        rf"travel {limits} cm; the nearest admissible offset is (\S+) cm",
        message.splitlines()[0],
    )
    assert said
    stands, nearest = (float(figure.replace(MINUS, "-")) for figure in said.groups())
    assert not low <= stands <= high
    solve(spine(offsets_cm=(0.0, nearest)), on)
    toward = 0.01 if asked > nearest else -0.01
    refusal(spine(offsets_cm=(0.0, nearest + toward)), on)


def test_the_largest_opening() -> None:
    on = machine(opening_cm=30.0)
    message = refusal(
        spine(offsets_cm=(0.0, 4.0, -4.0), upper_follows="J1"), machine(opening_cm=28.0)
    )
    assert (
        "position A: jaws Y1 and Y2 of beam upper would open 28.43 cm, wider than 28.00" in message
    )
    solve(spine(offsets_cm=(0.0, 4.0), upper_follows="J1"), on)


def test_jaws_that_would_close_on_each_other() -> None:
    message = refusal(spine(offsets_cm=(0.0, -26.0)), machine())
    assert "position B: jaws Y1 and Y2 of beam lower would close on each other" in message


def tilted(gantry_deg: float, couch_deg: float = 0.0) -> Course:
    beams = [
        beam(name, gantry_deg, (0, -5, z), couch_deg=couch_deg) for name, z in (("u", 9), ("l", -9))
    ]
    between = junction("J", (0, 0, 0), 5.0, technique=Technique.HALF_BEAM)
    return pair(beams[:1], beams[1:], between)


def test_an_angle_the_machine_does_not_have() -> None:
    on = machine(gantry_deg=(0, 170))
    message = refusal(tilted(190.0), on)
    assert message.startswith(
        "position A: gantry angle of beam u is 190.0 degrees, outside 0.0 to +170.0 degrees"
    )
    solve(tilted(170.0), on)


@pytest.mark.parametrize(("gantry", "allowed"), [(270.0, (-180, 180)), (-90.0, (0, 360))])
def test_an_angle_is_the_same_a_whole_turn_away(
    gantry: float, allowed: tuple[float, float]
) -> None:
    solve(tilted(gantry), machine(gantry_deg=allowed))


def test_every_fault_of_every_position_is_named() -> None:
    message = refusal(spine(FFS, offsets_cm=(0.0, -26.0, -27.0)), machine())
    assert [line[:11] for line in message.splitlines()] == ["position B:", "position C:"]


@pytest.mark.parametrize("asked", [-0.5, 9.0])
def test_a_skin_gap_that_no_depth_gives_is_refused(asked: float) -> None:
    beams = [beam(name, 180, (0, -5, z)) for name, z in (("u", 9), ("l", -9))]
    between = junction("J", (0, 0, 0), None, skin_gap_cm=asked, thickness_cm=20.0)
    message = refusal(pair(beams[:1], beams[1:], between), machine())
    # 9 cm each at 20 cm of depth, seen from 95 cm above the skin.
    assert message == (
        f"junction J: no match depth from 0 to 20.0 cm gives a skin gap of {asked:.2f} cm; "
        "depth 20.0 cm gives 3.13 cm"
    )


def test_a_field_whose_jaws_face_no_junction_is_refused_by_its_beam() -> None:
    of = pair(
        [beam("u", 180, (0, -5, 9), collimator_deg=45)],
        [beam("l", 180, (0, -5, -9))],
        junction("J", (0, 0, 0), 5.0),
        position=HFS,
    )
    assert refusal(of, machine()).startswith(
        "position A: beam u: no jaw faces the junction within 30 degrees: the nearest is turned "
        "45.0 degrees from the junction axis"
    )


AT_A = "position A is where offsets are measured from: change the design"
NOWHERE = "no offset is admissible: change the design"


def test_position_a_is_not_told_to_move_from_where_it_is_measured() -> None:
    on = machine_with(MILLIMETRE, Jaw.Y2, -20.0, 10.0)
    lines = refusal(spine(offsets_cm=(0.0, -2.0)), on).splitlines()
    at_a = [line for line in lines if line.startswith("position A")]
    assert at_a
    assert all(line.endswith(f"; {AT_A}") for line in at_a)
    assert not any("nearest" in line for line in at_a)


def test_every_beam_that_faces_no_junction_is_named() -> None:
    of = pair(
        [beam("u", 180, (0, -5, 9), collimator_deg=45)],
        [beam("l", 180, (0, -5, -9), collimator_deg=50), beam("fine", 0, (0, -5, -9))],
        junction("J", (0, 0, 0), 5.0),
    )
    assert [line.split(": no jaw")[0] for line in refusal(of, machine()).splitlines()] == [
        "position A: beam u",
        "position A: beam l",
    ]


def test_every_beam_that_cannot_be_turned_is_named() -> None:
    laterals = [beam(name, gantry, (0, -8, 9)) for name, gantry in (("left", 90), ("right", 270))]
    between = junction("J", (0, 0, 0), 5.0, turned_field="UPPER")
    of = pair(laterals, [beam("l", 180, (0, 0, -14))], between)
    lines = refusal(of, machine(couch_deg=(-1, 1))).splitlines()
    assert [line.split(": the couch")[0] for line in lines] == [
        "position A: beam left",
        "position A: beam right",
    ]


def counted(monkeypatch: pytest.MonkeyPatch) -> list[object]:
    """Count how often a position is placed to look for an offset."""
    asked: list[object] = []

    def place(task: Task, offset_cm: Mapping[str, float]) -> Chain:
        asked.append(offset_cm)
        return place_rounded(task, offset_cm)

    monkeypatch.setattr(limits, "place_rounded", place)
    return asked


def with_beams(
    *, side_jaws_cm: tuple[float, float] = (-5.0, 5.0), gantry_deg: float = 180.0
) -> Course:
    beams = [
        replace(beam(name, gantry_deg, (0, -5, z)), side_jaws_cm=side_jaws_cm)
        for name, z in (("u", 9), ("l", -9))
    ]
    return pair(beams[:1], beams[1:], junction("J", (0, 0, 0), 5.0), offsets_cm=(0.0, -1.0))


@pytest.mark.parametrize(
    ("of", "on"),
    [
        (with_beams(gantry_deg=190.0), machine(gantry_deg=(0, 185))),
        (with_beams(side_jaws_cm=(-5.0, 5.0)), machine(travel={Jaw.X1: Range(-4, 0)})),
        (with_beams(side_jaws_cm=(6.0, 5.0)), machine()),
        (with_beams(side_jaws_cm=(-50.0, 50.0)), machine()),
        # The outer jaws of both fields stand 15 cm from their axis, by their borders' reach.
        (with_beams(), machine(travel={Jaw.Y2: Range(-60, 14)})),
    ],
    ids=["gantry", "side jaw", "side jaws closed", "side jaws too wide", "reach"],
)
def test_what_no_offset_changes_starts_no_search(
    of: Course, on: Machine, monkeypatch: pytest.MonkeyPatch
) -> None:
    asked = counted(monkeypatch)
    lines = refusal(of, on).splitlines()
    assert {line[9] for line in lines} == {"A", "B"}
    assert all(line.endswith(AT_A if line[9] == "A" else NOWHERE) for line in lines)
    assert asked == []


def test_a_source_that_no_couch_turn_moves_starts_no_search(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    between = junction("J", (0, 0, 0), 5.0, turned_field="UPPER")
    of = pair(
        [beam("vertex", 180, (0, -8, 9))],
        [beam("l", 180, (0, 0, -14))],
        between,
        offsets_cm=(0.0, -1.0),
    )
    asked = counted(monkeypatch)
    assert refusal(of, machine()).splitlines()[1].endswith(NOWHERE)
    assert asked == []


def test_an_angle_that_follows_the_junction_starts_a_search() -> None:
    # The couch of the laterals turns by about 0.6 degrees for each cm.
    on = machine(steps=MILLIMETRE, couch_deg=(-5.6, 5.6))
    message = refusal(spine(offsets_cm=(0.0, -3.0)), on)
    assert "position B: beam left lateral: the couch would have to turn to" in message
    assert "the nearest admissible offset is" in message


def test_a_collimator_at_90_matches_with_its_x_jaws() -> None:
    of = pair(
        [beam("u", 180, (0, -5, 9), collimator_deg=90)],
        [beam("l", 180, (0, -5, -9))],
        junction("J", (0, 0, 0), 5.0),
    )
    (upper,), (lower,) = (each.beams for each in solve(of, machine())[0].fields)
    assert (upper.superior_jaw, upper.inferior_jaw) == (Jaw.X2, Jaw.X1)
    assert upper.jaw_cm == {Jaw.X1: -9.0, Jaw.X2: 15.0, Jaw.Y1: -5.0, Jaw.Y2: 5.0}
    assert lower.jaw_cm == {Jaw.X1: -5.0, Jaw.X2: 5.0, Jaw.Y1: -15.0, Jaw.Y2: 9.0}
