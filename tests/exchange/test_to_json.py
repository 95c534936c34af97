"""JSON holds what the view holds, as computed."""

from __future__ import annotations

import json
from dataclasses import dataclass
from datetime import date

from featherlog.exchange.to_json import to_json
from featherlog.junction.machine import Jaw


@dataclass(frozen=True)
class Inner:
    move_cm: float
    jaw_cm: dict[Jaw, float]


@dataclass(frozen=True)
class View:
    name: str
    start: date
    missing: str | None
    inner: tuple[Inner, ...]


VIEW = View("Kärnä − 1", date(2026, 3, 2), None, (Inner(-0.0, {Jaw.Y1: 1 / 3}),))


def test_values_are_unrounded_and_keys_are_field_names() -> None:
    assert json.loads(to_json(VIEW)) == {
        "name": "Kärnä − 1",
        "start": "2026-03-02",
        "missing": None,
        "inner": [{"move_cm": 0.0, "jaw_cm": {"Y1": 1 / 3}}],
    }


def test_the_text_is_indented_keeps_letters_and_has_no_minus_zero() -> None:
    text = to_json(VIEW)
    assert text.startswith('{\n  "name": "Kärnä − 1",\n')
    assert text.endswith("}\n")
    assert "-0.0" not in text
