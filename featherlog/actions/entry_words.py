"""What a course's entries say, in a phrase each, for people who look back over them."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from featherlog.store.entry import Kind
from featherlog.words import signed

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping

    from featherlog.store.entry import Entry

_UNITS = {"cm": " cm", "deg": "°", "mu": " MU", "percent": " %", "hours": " h", "gy": " Gy"}
# What a person said, which needs no name before it.
_SPOKEN = ("reason", "note", "decision", "text", "words")
# What only the program needs.
_SILENT = ("signed_by", "after", "next_date", "next_fraction", "next_position", "state_hash")


def entry_words(entry: Entry) -> str:
    """Return what an entry says in a phrase: which fraction, revision or departure, and why."""
    return content_words(entry.kind, entry.content)


def content_words(kind: str, content: Mapping[str, Any]) -> str:
    """Return what an entry of a kind says with its content; see ``entry_words``."""
    return _PHRASES.get(kind, _anything)(content)


def _fraction(content: Mapping[str, Any]) -> str:
    late = ", entered late" if content.get("late") else ""
    return f"fraction {content['fraction']}{late}"


def _confirmation(content: Mapping[str, Any]) -> str:
    """Return the fraction with everything that was read back before it."""
    read = [
        f"{one['name']} read as {signed(one['read_cm'])} cm (planned {signed(one['planned_cm'])})"
        for one in content.get("readings", ())
    ]
    read += [
        f"{one['side']} gap at {one['junction']} {signed(one['gap_cm'], 2)} cm"
        for one in content.get("gaps", ())
    ]
    return ", ".join([_fraction(content), *read])


def _correction(content: Mapping[str, Any]) -> str:
    corrects = f"fraction {content['fraction']}, entry {content['corrects']} corrected"
    return f"{corrects}: {content['reason']}" if content.get("reason") else corrects


def _revision(content: Mapping[str, Any]) -> str:
    reason = content.get("reason")
    return f"revision {content['revision']}" + (f": {reason}" if reason else "")


def _departure(content: Mapping[str, Any]) -> str:
    said = content.get("decision") or content.get("reason", "")
    return f"departure {content['departure']}: {said}"


def _anything(content: Mapping[str, Any]) -> str:
    """Return every value with its name, in the content's order."""
    said = (
        _value(name, value)
        for name, value in content.items()
        if name not in _SILENT and value not in (None, "", [], {})
    )
    return ", ".join(said)


def _value(name: str, value: object) -> str:
    plain = name.replace("_", " ")
    match value:
        case bool():
            return plain if value else f"not {plain}"
        case int() | float():
            quantity, _, unit = name.rpartition("_")
            known = quantity and unit in _UNITS
            measured = f"{quantity.replace('_', ' ')} {signed(value)}{_UNITS.get(unit, '')}"
            return measured if known else f"{plain} {value:g}"
        case dict():
            return f"{plain} ({_anything(value)})"
        case list():
            return f"{plain} " + "; ".join(_value("", one).strip() for one in value)
    return str(value) if name in _SPOKEN else f"{plain} {value}"


_PHRASES: dict[str, Callable[[Mapping[str, Any]], str]] = {
    Kind.FRACTION_CONFIRMED: _confirmation,
    Kind.FRACTION_RECORDED: _fraction,
    Kind.RECORD_CORRECTED: _correction,
    Kind.DESIGN_PREPARED: _revision,
    Kind.DESIGN_CHECKED: _revision,
    Kind.DESIGN_APPROVED: _revision,
    Kind.DESIGN_RETURNED: _revision,
    Kind.DEPARTURE_EXPLAINED: _departure,
    Kind.DEPARTURE_DECIDED: _departure,
}
