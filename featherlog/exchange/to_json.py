"""Any view as JSON: unrounded values, units in the keys."""

from __future__ import annotations

from typing import Any

import msgspec


def to_json(view: object) -> str:
    """Return a view as indented JSON text with a final line break.

    Values are as computed, except that minus zero is written as zero.
    """
    plain = _without_minus_zero(msgspec.to_builtins(view))
    return msgspec.json.format(msgspec.json.encode(plain), indent=2).decode() + "\n"


def _without_minus_zero(value: Any) -> Any:  # noqa: ANN401 - JSON holds values of any type
    match value:
        case float():
            return value + 0.0
        case dict():
            return {key: _without_minus_zero(item) for key, item in value.items()}
        case list() | tuple():
            return [_without_minus_zero(item) for item in value]
    return value
