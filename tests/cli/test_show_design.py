"""The physicist's screen of a design: what it says, within its width."""

from __future__ import annotations

from typing import TYPE_CHECKING

from program import SCENARIO, Program

from featherlog.cli.output import WIDTH
from featherlog.exchange.template import DESIGN_TEMPLATE, MACHINE_TEMPLATE

if TYPE_CHECKING:
    from pathlib import Path

    import pytest


def screen(
    tmp_path: Path,
    monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
    design: str,
    machine: str,
) -> str:
    """Return the screen of a design that is only solved."""
    for name, text in (("design.toml", design), ("machine.toml", machine)):
        (tmp_path / name).write_text(text, encoding="utf-8")
    done = Program("sqlite:///none.db", tmp_path).here(
        monkeypatch, capsys, "solve", "design.toml", "--machine", "machine.toml"
    )
    assert (done.code, done.err) == (0, "")
    assert max(map(len, done.out.splitlines())) <= WIDTH
    return " ".join(done.out.split())


def test_both_extremes_and_the_change_by_settings_off(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    text = screen(tmp_path, monkeypatch, capsys, DESIGN_TEMPLATE, MACHINE_TEMPLATE)
    # Opposed pairs of 14 and 15 cm, 8 cm from their match: 0.29 × 8 either way.
    assert "entrance skin +10.0 −8.0 +2.320 +2.320, −2.320" in text
    # Two jaws off by 0.1 cm each, 100 cm and at most 108 cm from the source.
    assert (
        "changes of the mismatch as set, off by tolerance: jaws: ±0.20 cm at match depth, ±0.22 cm"
        in text
    )
    assert "jaws, all angles, moved tables: ±" in text


def test_angles_against_the_neighbour_as_set(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    design, machine = (
        (SCENARIO / name).read_text(encoding="utf-8") for name in ("spine.toml", "alder.toml")
    )
    text = screen(tmp_path, monkeypatch, capsys, design, machine)
    assert (
        "left lateral, before rounding: collimator −7.6226, couch +4.9335 degrees; against the "
        "neighbour as set: collimator −7.6040, couch +4.9542 degrees"
    ) in text


def test_a_geometry_without_formulas_says_so(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    oblique = DESIGN_TEMPLATE.replace("gantry_deg = 0.0 ", "gantry_deg = 20.0 ").replace(
        "gantry_deg = 0.0\n", "gantry_deg = 20.0\n"
    )
    oblique = oblique.replace("gantry_deg = 180.0\n", "gantry_deg = 200.0\n")
    text = screen(tmp_path, monkeypatch, capsys, oblique, MACHINE_TEMPLATE)
    heading = "Hand check, before rounding: textbook formula beside the exact value"
    assert f"{heading} No textbook formula applies to this geometry" in text
