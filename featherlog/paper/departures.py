"""Departures as they are listed on every paper."""

from __future__ import annotations

from typing import TYPE_CHECKING

from featherlog.paper.fonts import join, safe, strong
from featherlog.paper.style import para
from featherlog.views.review_words import STATUS, departure_notes

if TYPE_CHECKING:
    from reportlab.platypus import Paragraph

    from featherlog.views.common import DepartureLine


def departure_line(line: DepartureLine) -> Paragraph:
    """Return one departure: number, fraction, kind and grade in bold, then what happened.

    Its figures, the department's thresholds that it reaches and the decision on it follow.
    """
    reason = f" (reason: {line.reason})" if line.reason else ""
    title = strong(f"No. {line.number}, fraction {line.fraction}, {line.kind} ({line.grade}):")
    notes = "; ".join(departure_notes(line))
    said = f"{line.detail}{reason}{'; ' + notes if notes else ''}. {STATUS[line.status]}."
    return para(join(" ", [title, safe(said)]))
