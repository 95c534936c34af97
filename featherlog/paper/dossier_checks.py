"""The hand check in the dossier: textbook formulas with a box for the checker to tick."""

from __future__ import annotations

from typing import TYPE_CHECKING

from featherlog.junction.phrases import NO_FORMULA
from featherlog.paper import style
from featherlog.paper.day_settings import TICK
from featherlog.paper.fonts import join, safe, strong
from featherlog.paper.layout import section
from featherlog.paper.style import grouped, para
from featherlog.words import figure, signed

if TYPE_CHECKING:
    from collections.abc import Sequence

    from reportlab.platypus import Flowable

    from featherlog.junction.hand_check import HandCheck

_HEADS = ("Pos.", "What", "Numbers", "by formula", "exact", "difference", "")
_PARTS = (22, 164, 186, 52, 48, 50, 16)
_NUMBERS = range(3, 6)
_DECIMALS = 4


def hand_check_table(checks: Sequence[HandCheck], width: float) -> list[Flowable]:
    """Return every check under its formula; all values are before rounding."""
    if not checks:
        return [*section("HAND CHECK"), para(safe(NO_FORMULA))]
    groups = [
        (_formula(formula, group[0]), [_check(check) for check in group])
        for formula, group in _by_formula(checks).items()
    ]
    lead = "Before rounding. The checker works each line by hand and ticks it."
    return [
        *section("HAND CHECK"),
        para(safe(lead)),
        grouped(_HEADS, groups, width, _PARTS, numbers=_NUMBERS),
    ]


def _formula(formula: str, check: HandCheck) -> Flowable:
    source = safe(f"({check.source}; values in {check.unit})")
    return para(join("  ", [strong(formula), source]))


def _by_formula(checks: Sequence[HandCheck]) -> dict[str, list[HandCheck]]:
    groups: dict[str, list[HandCheck]] = {}
    for check in checks:
        groups.setdefault(check.formula, []).append(check)
    return groups


def _check(check: HandCheck) -> list[Flowable]:
    numbers = (
        _value(check.by_formula),
        _value(check.exact),
        signed(check.by_formula - check.exact, _DECIMALS, _DECIMALS),
    )
    return [
        para(strong(check.position)),
        para(safe(check.subject), style.SMALL),
        para(safe(check.numbers), style.SMALL),
        *(para(safe(number), style.VALUE) for number in numbers),
        para(safe(TICK)),
    ]


def _value(value: float) -> str:
    return figure(value, _DECIMALS, _DECIMALS)
