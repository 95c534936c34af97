"""How numbers and codes are written on paper."""

from __future__ import annotations

MINUS = "−"
_POSITIONS = {
    "HFS": "head first, supine",
    "HFP": "head first, prone",
    "FFS": "feet first, supine",
    "FFP": "feet first, prone",
}


def figure(value: float, least: int = 1, most: int = 2) -> str:
    """Return a number with a true minus and at least ``least`` decimals, more only when needed.

    Digits beyond ``most`` are rounding noise; a value that a machine can be set to keeps them all.
    """
    text = f"{value:.{most}f}"
    whole, point, decimals = text.partition(".")
    decimals = decimals.rstrip("0").ljust(least, "0")
    shown = f"{whole}{point}{decimals}" if decimals else whole
    return shown.replace("-", MINUS) if float(shown) else shown.replace("-", "")


def signed_figure(value: float) -> str:
    """Return ``figure`` with its sign always written, and none on zero."""
    text = figure(value)
    return text if text.startswith(MINUS) or not float(text) else f"+{text}"


def meterset(value_mu: float) -> str:
    """Return a meterset without trailing zeros, which could be misread as tenfold."""
    return figure(value_mu, least=0, most=2)


def patient_position(code: str) -> str:
    """Return a DICOM patient position with its meaning, or the bare code where there is none."""
    return f"{code}, {_POSITIONS[code]}" if code in _POSITIONS else code


def head_first(code: str) -> bool | None:
    """Tell whether the head lies toward the gantry; None when the position does not say."""
    return code.startswith("HF") if code in _POSITIONS else None
