"""Where each piece of text stands on a PDF page, read back from the page's own operators."""

from __future__ import annotations

from dataclasses import dataclass
from io import BytesIO
from typing import Any

from pypdf import PageObject, PdfReader


@dataclass(frozen=True)
class Run:
    """One shown string: left, right and baseline in points, and its printed size."""

    left: float
    right: float
    baseline: float
    size: float

    @property
    def top(self) -> float:
        return self.baseline + 0.7 * self.size


def squeezed(text: str) -> str:
    """Return text without any white space, as line breaks fall where the layout puts them."""
    return "".join(text.split())


def page_texts(data: bytes) -> list[str]:
    return [squeezed(page.extract_text()) for page in PdfReader(BytesIO(data)).pages]


def whole_text(data: bytes) -> str:
    return "".join(page_texts(data))


def font_files(data: bytes) -> dict[str, bool]:
    """Return each font's name and whether it is embedded."""
    found: dict[str, bool] = {}
    for page in PdfReader(BytesIO(data)).pages:
        resources: Any = page["/Resources"]
        for entry in resources["/Font"].values():
            font = entry.get_object()
            descriptor = font.get("/FontDescriptor")
            found[font["/BaseFont"]] = descriptor is not None and "/FontFile2" in descriptor
    return found


class _Reader:
    def __init__(self, page: PageObject) -> None:
        resources: Any = page["/Resources"]
        self.fonts = {name: font.get_object() for name, font in resources["/Font"].items()}
        self.font, self.size, self.advance = "", 0.0, 0.0
        self.runs: list[Run] = []

    def operand(self, operator: bytes, arguments: Any, cm: Any, tm: Any) -> None:
        if operator == b"Tf":
            self.font, self.size = arguments[0], float(arguments[1])
        elif operator in (b"Tm", b"Td", b"T*", b"BT"):
            self.advance = 0.0
        elif operator == b"Tj":
            self._show(bytes(_raw(arguments[0])), cm, tm)

    def _show(self, codes: bytes, cm: Any, tm: Any) -> None:
        widths, first = self.fonts[self.font]["/Widths"], self.fonts[self.font]["/FirstChar"]
        wide = sum(widths[code - first] for code in codes) * self.size / 1000
        left = tm[4] + cm[4] + self.advance
        self.advance += wide
        if codes.strip():
            scale = abs(cm[3] * tm[3])
            self.runs.append(Run(left, left + wide, tm[5] + cm[5], self.size * scale))


def _raw(text: Any) -> bytes:
    return text if isinstance(text, bytes) else text.original_bytes


def page_runs(data: bytes) -> list[list[Run]]:
    """Return the text runs of each page."""
    pages = []
    for page in PdfReader(BytesIO(data)).pages:
        reader = _Reader(page)
        page.extract_text(visitor_operand_before=reader.operand)
        pages.append(reader.runs)
    return pages


def overlapping(runs: list[Run], slack: float = 0.4) -> list[tuple[Run, Run]]:
    """Return pairs of runs whose boxes overlap by more than ``slack`` points both ways."""
    return [
        (one, other)
        for index, one in enumerate(runs)
        for other in runs[index + 1 :]
        if min(one.right, other.right) - max(one.left, other.left) > slack
        and min(one.top, other.top) - max(one.baseline, other.baseline) > slack
    ]
