"""What a good machine file becomes, where that is not plainly what is written."""

from __future__ import annotations

from datetime import date
from pathlib import Path

from featherlog.exchange.machine_file import parse_machine
from featherlog.junction.machine import AngleForm, AngleScale, DisplayScale

TEXT = (Path(__file__).parent / "good_machine.toml").read_text(encoding="utf-8")
MACHINE = parse_machine(TEXT, "machine.toml")


def test_closed_dates_are_in_order_and_each_there_once() -> None:
    assert MACHINE.closed_dates == (date(2026, 3, 12), date(2026, 5, 15))


def test_a_consoles_scale_is_read_with_the_sense_as_a_sign() -> None:
    assert MACHINE.display == DisplayScale(
        gantry=AngleScale(180.0, -1, AngleForm.FULL_CIRCLE),
        collimator=AngleScale(0.0, 1, AngleForm.SIGNED),
        couch=AngleScale(0.0, -1, AngleForm.SIGNED),
        jaws_outward=True,
    )


def test_a_console_without_a_scale_shows_iec_61217() -> None:
    assert parse_machine(TEXT[: TEXT.index("[display]")], "machine.toml").display is None
