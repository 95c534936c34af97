"""What a look at the database's health found."""

from __future__ import annotations

from dataclasses import dataclass

OK, WARN, FAIL = "OK", "WARN", "FAIL"


@dataclass(frozen=True, slots=True)
class HealthLine:
    """One thing looked at; ``todo`` is what to do, empty where ``grade`` is OK."""

    name: str
    grade: str
    found: str
    todo: str = ""


@dataclass(frozen=True, slots=True)
class HealthView:
    """Every line, in the order looked at; ``grade`` is the worst of them."""

    database: str
    grade: str
    lines: tuple[HealthLine, ...]
