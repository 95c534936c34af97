"""Table read-outs, notes and events as people type and read them."""

from __future__ import annotations

from typing import TYPE_CHECKING

import pytest
from department import AUTHOR, THERAPIST, THIGH
from program import PAIR

if TYPE_CHECKING:
    from collections.abc import Callable

    from program import Outcome, Program

    Run = Callable[..., Outcome]

READ = ("--lateral", "0.3", "--longitudinal", "101.2", "--vertical", "-12")
SHIFT = ("--lateral", "0", "--longitudinal", "-0.5", "--vertical", "0.25")
ONE = ("--by", THERAPIST)


@pytest.fixture
def run(
    department: Program, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> Run:
    return lambda *words: department.here(monkeypatch, capsys, *words)


def test_a_table_reading_gives_the_targets_of_the_day(run: Run) -> None:
    came = run("table", "read", THIGH, "upper thigh", *READ, *PAIR)
    assert (came.code, came.err) == (0, "")
    assert came.out.startswith("Table read for upper thigh at A in fraction 1; ")
    day = run("today", THIGH)
    assert "TABLE to lateral +0.3, longitudinal +130.2, vertical −12.0 cm" in day.out
    assert "Table positions are absolute, by the read-out of upper thigh at A" in day.out
    confirmed = run("confirm", THIGH, *PAIR).out
    assert "lower thigh: TABLE to lateral +0.3, longitudinal +130.2, vertical −12.0 cm" in confirmed
    target = run("today", THIGH, "--json").json["fields"][1]["target"]
    assert target["longitudinal_cm"] == pytest.approx(130.2)


def test_a_table_reading_is_told_with_units(run: Run) -> None:
    told = run("table", "read", THIGH, "upper thigh", *READ, *PAIR, "--json").json
    assert (told["position"], told["longitudinal_cm"]) == ("A", 101.2)


def test_events_are_listed_with_their_figures_and_signers(run: Run) -> None:
    assert run("events", THIGH).out == "No events.\n"
    field = ("--field", "upper thigh", "--fraction", "1")
    assert run("note", "image-shift", THIGH, *field, *SHIFT, *ONE).code == 0
    assert run("note", "physics-present", THIGH, "--fraction", "1", "--by", AUTHOR).code == 0
    marks = ("--position", "A", "--reason", "faded")
    assert run("note", "marks-redrawn", THIGH, *marks, *ONE).code == 0
    assert [line["kind"] for line in run("events", THIGH, "--json").json] == [
        "image shift",
        "physics present",
        "marks redrawn",
    ]
    text = " ".join(run("events", THIGH).out.split())
    assert (
        "image shift: field upper thigh, fraction 1, lateral 0.0 cm, longitudinal −0.5 cm, "
        "vertical +0.25 cm; signed by Ash Plover" in text
    )
    assert "physics present: fraction 1; signed by Rowan Finch" in text
    assert "marks redrawn: position A, faded; signed by Ash Plover" in text


def test_fields_shifted_apart_are_pointed_out_beside_the_data(run: Run) -> None:
    words = ("note", "image-shift", THIGH, "--fraction", "1")
    run(*words, "--field", "upper thigh", *SHIFT, *ONE)
    still = ("--lateral", "0", "--longitudinal", "0", "--vertical", "0")
    came = run(*words, "--field", "lower thigh", *still, *ONE)
    assert came.code == 0
    assert came.fault.startswith("LOOK: lower thigh was shifted ")


def test_an_outage_stands_on_the_day_until_it_ends(run: Run) -> None:
    assert run("note", "imager-out", THIGH, "--reason", "tube fault", *ONE).code == 0
    risk = "RAISED RISK: imager out since 2026-03-02T09:00:00+01:00 (tube fault)."
    assert risk in run("today", THIGH).out
    assert f"{THIGH}: imager out since" in run("today").out
    assert run("note", "imager-back", THIGH, "--reason", "repaired", *ONE).code == 0
    assert "imager" not in run("today", THIGH).out


def test_a_reading_is_typed_by_name(run: Run) -> None:
    words = ("confirm", THIGH, *PAIR, "--reading")
    assert run(*words, "AP upper:Y1=fourteen").fault == (
        "--reading AP upper:Y1=fourteen: 'fourteen' is not a number of cm"
    )
    assert run(*words, "AP upper:Y1=-14.02").code == 0
