"""No junk at any key gives anything but a refusal in words."""

from __future__ import annotations

import datetime as dt
import math
from pathlib import Path
from typing import Any

import pytest
from hypothesis import example, given
from hypothesis import strategies as st

from featherlog.errors import InputError
from featherlog.exchange.design_file import parse_design
from featherlog.exchange.machine_file import parse_machine, read_machine
from featherlog.exchange.toml_lines import key_lines

_HERE = Path(__file__).parent
DESIGN = (_HERE / "good_design.toml").read_text(encoding="utf-8")
TURNED = (_HERE / "good_turned_design.toml").read_text(encoding="utf-8")
MACHINE_TEXT = (_HERE / "good_machine.toml").read_text(encoding="utf-8")
MACHINE = read_machine(_HERE / "good_machine.toml")


def _toml(value: Any) -> str:
    """Write any value as TOML."""
    if isinstance(value, list):
        return f"[{', '.join(map(_toml, value))}]"
    if isinstance(value, dict):
        return f"{{ {', '.join(f'{_toml(key)} = {_toml(item)}' for key, item in value.items())} }}"
    match value:
        case bool():
            return str(value).lower()
        case int() if value > 0:
            return hex(value)
        case str():
            return '"' + "".join(f"\\U{ord(letter):08x}" for letter in value) + '"'
    return value.isoformat() if isinstance(value, dt.date | dt.time) else repr(value)


_PLAIN = (
    st.booleans()
    | st.integers(-(2**63), 2**63)
    | st.integers(0, 30)
    | st.just(10**400)
    | st.floats()
    | st.text(st.characters(exclude_categories=["Cs"]), max_size=8)
    | st.sampled_from(
        ["A", "AP upper", "thigh", "blocks", "couch", "half-beam", "6 MV", "rotated", "split", "DE"]
    )
    | st.dates()
    | st.datetimes()
    | st.times()
)
JUNK = st.recursive(
    _PLAIN,
    lambda inner: (
        st.lists(inner, max_size=4)
        | st.dictionaries(
            st.sampled_from(["name", "depth_cm", "thigh", "held", "reach_cm", ""]),
            inner,
            max_size=3,
        )
    ),
    max_leaves=6,
)


def _value_lines(text: str) -> list[int]:
    return [n for n, line in enumerate(text.splitlines()) if " = " in line]


def _with_junk(text: str, line: int, junk: Any) -> str:
    lines = text.splitlines()
    lines[line] = f"{lines[line].split(' = ')[0]} = {_toml(junk)}"
    return "\n".join(lines)


def _refusal(read: Any, text: str) -> InputError | None:
    try:
        read(text)
    except InputError as refusal:
        return refusal
    return None


def _read_or_refused(read: Any, text: str) -> bool:
    """Tell whether a text is read, or refused in printable sentences; else the error escapes."""
    refusal = _refusal(read, text)
    faults = ("fine",) if refusal is None else refusal.faults
    return bool(faults) and all(fault.isprintable() for fault in faults)


def _design(text: str) -> None:
    parse_design(text, "design.toml", MACHINE)


def _machine(text: str) -> None:
    parse_machine(text, "machine.toml")


@given(line=st.sampled_from(_value_lines(DESIGN)), junk=JUNK)
@example(line=_value_lines(DESIGN)[10], junk=math.nan)
def test_junk_in_a_design_is_read_or_refused(line: int, junk: Any) -> None:
    assert _read_or_refused(_design, _with_junk(DESIGN, line, junk))


@given(line=st.sampled_from(_value_lines(TURNED)), junk=JUNK)
def test_junk_in_a_design_with_a_turned_field_is_read_or_refused(line: int, junk: Any) -> None:
    assert _read_or_refused(_design, _with_junk(TURNED, line, junk))


@given(line=st.sampled_from(_value_lines(MACHINE_TEXT)), junk=JUNK)
def test_junk_in_a_machine_is_read_or_refused(line: int, junk: Any) -> None:
    assert _read_or_refused(_machine, _with_junk(MACHINE_TEXT, line, junk))


@given(
    start=st.integers(0, len(DESIGN)),
    length=st.integers(0, 400),
    between=st.text(st.sampled_from("[]{}=\"'#\n\\ a1,.-")),
)
def test_a_torn_design_is_read_or_refused(start: int, length: int, between: str) -> None:
    torn = DESIGN[:start] + between + DESIGN[start + length :]
    assert _read_or_refused(_design, torn)


@pytest.mark.parametrize("text", [DESIGN, TURNED, MACHINE_TEXT])
def test_every_key_is_found_on_its_own_line(text: str) -> None:
    lines = text.splitlines()
    for path, line in key_lines(text).items():
        key = next(part for part in reversed(path) if isinstance(part, str))
        assert key in lines[line - 1]
