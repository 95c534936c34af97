"""Both practice courses from the design file to the last fraction, in real processes."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import pytest
from department import ADMINISTRATOR, AUTHOR, CHECKER, DESIGNS, PHYSICIAN, STAFF
from program import PAIR, SCENARIO, Outcome, Program

from featherlog.words import CAUTION, DOSE_CAUTION

if TYPE_CHECKING:
    from pathlib import Path


@dataclass(frozen=True)
class Life:
    """What a course is to be, written down by hand from its design file.

    ``apart`` is a fraction recorded with a field left behind, ``elsewhere`` one treated at another
    position, ``broken`` one whose first session ends early.
    """

    key: str
    positions: str
    days: tuple[str, ...]
    dose_gy: float
    first_table_words: str
    broken: tuple[int, str, float]
    elsewhere: tuple[int, str] | None = None
    apart: tuple[int, str, str] | None = None


# 13 March is closed, and weekends are free.
_DAYS = (
    *("2026-03-02", "2026-03-03", "2026-03-04", "2026-03-05", "2026-03-06"),
    *("2026-03-09", "2026-03-10", "2026-03-11", "2026-03-12"),
    *("2026-03-16", "2026-03-17", "2026-03-18", "2026-03-19", "2026-03-20"),
    *("2026-03-23", "2026-03-24", "2026-03-25"),
)
THIGH = Life(
    key="FH-2041",
    positions="AAAAABBBBBCCCCC",
    days=_DAYS[:15],
    dose_gy=30.0,
    first_table_words="TABLE moves 29.0 cm toward the gantry (longitudinal +29.0 cm)",
    broken=(3, "PA lower", 40.0),
    elsewhere=(7, "A"),
)
BREAST = Life(
    key="FH-2042",
    positions="ABCABCABCABCABC",
    days=_DAYS[2:],
    dose_gy=40.05,
    first_table_words="TABLE: stays as for supraclavicular",
    broken=(4, "medial tangent", 100.0),
    apart=(8, "tangents", "A"),
)
LIVES = [pytest.param(THIGH, id="thigh"), pytest.param(BREAST, id="breast")]


@dataclass(frozen=True)
class Clinic:
    """One course under treatment."""

    program: Program
    life: Life

    def on(self, day: str) -> Clinic:
        return Clinic(self.program.at(day), self.life)

    def today(self) -> Any:
        return self.program.json("today", self.life.key)

    def confirm(self, *words: str) -> Outcome:
        return self.program.start("confirm", self.life.key, *PAIR, *words)

    def record(self, *words: str) -> Any:
        return self.program.json("record", self.life.key, *PAIR, *words)


@pytest.fixture
def program(empty_database_url: str, tmp_path: Path) -> Program:
    return Program(empty_database_url, tmp_path).at("2026-02-27")


@pytest.mark.parametrize("life", LIVES)
def test_a_course_from_its_design_file_to_its_last_fraction(program: Program, life: Life) -> None:
    clinic = _approved(program, life)
    _first_day(clinic)
    for number, (day, position) in enumerate(zip(life.days, life.positions, strict=True), start=1):
        _treat(clinic.on(day), number, position)
    _at_the_end(clinic.on(life.days[-1]))


def _approved(program: Program, life: Life) -> Clinic:
    program.must("database", "create", "--practice")
    for name, role in STAFF.items():
        program.must("staff", "add", name, "--role", role, "--by", ADMINISTRATOR)
    program.must("machine", "add", SCENARIO / "alder.toml", "--by", AUTHOR)
    program.must("course", "prepare", SCENARIO / DESIGNS[life.key], "--by", AUTHOR)
    before = program.json("today", life.key)
    assert before["status"] == "stop"
    assert before["stop_reasons"] == ["revision 1 of this design is prepared, not approved"]
    program.must("course", "check", life.key, "--by", CHECKER)
    program.must("course", "approve", life.key, "--by", PHYSICIAN, "--with", CHECKER)
    return Clinic(program, life)


def _first_day(clinic: Clinic) -> None:
    life, clinic = clinic.life, clinic.on(clinic.life.days[0])
    view = clinic.today()
    assert (view["fraction"], view["position"], view["shift"]) == (1, "A", "first")
    assert view["fields"][1]["from_field_before"]["words"] == (
        [life.first_table_words] if "moves" in life.first_table_words else []
    )
    screen = " ".join(clinic.program.must("today", life.key).split())
    assert life.first_table_words in screen
    [line] = clinic.program.json("today")["lines"]
    assert (line["course"], line["due"]) == (life.key, "today")
    shown = clinic.program.must("sheet", life.key, "--output", "sheet.pdf")
    assert view["page_code"] in shown
    (clinic.program.folder / "code").write_text(view["page_code"])
    assert (clinic.program.folder / "sheet.pdf").read_bytes().startswith(b"%PDF")


def _treat(clinic: Clinic, number: int, position: str) -> None:
    """Confirm and record one fraction, with what happens to it on the way."""
    life = clinic.life
    shift = number > 1 and life.positions[number - 2] != position
    if number == 2:
        _old_sheet_is_refused(clinic, position)
    if shift and number == life.positions.index("B") + 1:
        _shift_needs_its_position(clinic, position)
    _ready(clinic, position)
    words: tuple[str, ...] = ()
    if number == life.broken[0]:
        _break(clinic, number, position)
        _ready(clinic, position)
    if life.elsewhere and number == life.elsewhere[0]:
        words = ("--position", life.elsewhere[1])
    if life.apart and number == life.apart[0]:
        words = ("--field-position", f"{life.apart[1]}={life.apart[2]}")
    done = clinic.record(*words)
    assert (done["fraction"], done["complete"]) == (number, True)
    assert bool(done["departures"]) == bool(words), done["departures"]
    _next_is(life, number, done)


def _ready(clinic: Clinic, position: str) -> None:
    done = clinic.confirm("--position", position)
    assert done.code == 0, done.err
    assert f"POSITION {position}" in done.out


def _next_is(life: Life, number: int, done: Any) -> None:
    following = (done["next_fraction"], done["next_position"], done["next_date"])
    if number == len(life.positions):
        assert following == (None, None, None)
    else:
        assert following == (number + 1, life.positions[number], life.days[number])


def _old_sheet_is_refused(clinic: Clinic, position: str) -> None:
    code, old = clinic.today()["page_code"], (clinic.program.folder / "code").read_text()
    assert code != old
    refused = clinic.confirm("--position", position, "--sheet", old)
    assert refused.code == 4
    assert f"print a new one ({code})" in refused.fault


def _shift_needs_its_position(clinic: Clinic, position: str) -> None:
    view = clinic.today()
    assert (view["shift"], view["position"]) == ("yes", position)
    refused = clinic.confirm()
    assert refused.code == 4
    assert f"with --position (planned {position})" in refused.fault


def _break(clinic: Clinic, number: int, position: str) -> None:
    _, beam, mu = clinic.life.broken
    part = clinic.record("--meterset", f"{beam}={mu:g}", "--reason", "the beam stopped")
    assert (part["complete"], part["next_fraction"], part["next_position"]) == (
        False,
        number,
        position,
    )
    assert part["next_date"] == clinic.life.days[number - 1]
    view = clinic.today()
    assert (view["fraction"], view["position"], view["part_delivered"]) == (number, position, True)
    beams = {beam["beam"]: beam for field in view["fields"] for beam in field["beams"]}
    assert beams[beam]["to_deliver_mu"] == pytest.approx(beams[beam]["planned_mu"] - mu)
    assert all(other["to_deliver_mu"] == 0 for name, other in beams.items() if name != beam)
    assert clinic.confirm().code == 4


def _at_the_end(clinic: Clinic) -> None:
    program, key = clinic.program, clinic.life.key
    assert clinic.today()["status"] == "complete"
    refused = clinic.confirm()
    assert (refused.code, refused.fault) == (
        4,
        "all 15 prescribed fractions are complete. STOP. Do not treat. Call the physician.",
    )
    assert "None." in program.must("today")
    _departures_are_told(clinic)
    _doses_add_up(clinic)
    _papers_are_written(clinic)
    [course] = program.json("course", "list")
    assert (course["course"], course["state"], course["fractions_complete"]) == (
        key,
        "complete",
        15,
    )
    status = program.json("database", "status")
    assert (status["first_fault"], status["demo"]) == ("", True)
    # Six people, a machine, three for the design, two for each fraction and for the remainder of
    # the broken one, one reason.
    assert status["ledger_entries"] == 6 + 1 + 3 + 2 * 16 + 1


def _departures_are_told(clinic: Clinic) -> None:
    life = clinic.life
    coherent, incoherent = ("other position", "coherent"), ("fields apart", "incoherent")
    kind, grade = coherent if life.elsewhere else incoherent
    number = (life.elsewhere or life.apart or (0,))[0]
    told = clinic.program.json("departures", life.key)
    short = [line for line in told if line["kind"] == "meterset short"]
    assert {line["fraction"] for line in short} == {life.broken[0]}
    [moved] = [line for line in told if line["kind"] != "meterset short"]
    assert (moved["fraction"], moved["kind"], moved["grade"]) == (number, kind, grade)
    clinic.program.must(
        "explain", life.key, moved["number"], "--reason", "label misread", "--by", AUTHOR
    )
    assert all(line["reason"] for line in clinic.program.json("departures", life.key))


def _doses_add_up(clinic: Clinic) -> None:
    program, life = clinic.program, clinic.life
    review = program.json("review", life.key)
    assert review["delivered_fractions"] == 15
    assert sum(line["delivered"] for line in review["shares"]) == len(life.positions)
    assert [line["planned"] for line in review["shares"]] == [5, 5, 5]
    if life.elsewhere:
        assert [line["delivered"] for line in review["shares"]] == [6, 4, 5]
    [sides] = review["sides"]
    assert sides["superior_gy"] == pytest.approx(life.dose_gy)
    assert sides["inferior_gy"] == pytest.approx(life.dose_gy)
    dose = program.json("dose", life.key)
    assert dose == review["dose"]
    assert dose["delivered_fractions"] == dose["fractions"]
    assert dose["caution"] == f"{CAUTION} {DOSE_CAUTION}"
    for line in dose["junctions"][0]["lines"]:
        curves = {curve["name"]: curve for curve in line["curves"]}
        assert curves["delivered"]["figures"] == curves["predicted"]["figures"]
        assert curves["delivered"]["figures"] != curves["planned"]["figures"]


def _papers_are_written(clinic: Clinic) -> None:
    program, key = clinic.program, clinic.life.key
    program.must("review", key, "--output", "review.pdf")
    program.must("sheet", key, "--output", "last.pdf")
    program.must("dose", key, "--picture", "dose.pdf", "--csv", "dose.csv")
    program.must("dose", key, "--picture", "dose.svg")
    for name in ("review.pdf", "last.pdf", "dose.pdf"):
        assert (program.folder / name).read_bytes().startswith(b"%PDF")
    assert "<svg" in (program.folder / "dose.svg").read_text()
    assert len((program.folder / "dose.csv").read_text().splitlines()) > 100
