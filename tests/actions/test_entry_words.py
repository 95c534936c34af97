"""Every entry in a phrase, whatever it holds."""

from __future__ import annotations

import pytest

from featherlog.actions.entry_words import content_words
from featherlog.store.entry import Kind


@pytest.mark.parametrize(
    ("kind", "content", "words"),
    [
        (Kind.FRACTION_RECORDED, {"fraction": 3, "late": True}, "fraction 3, entered late"),
        (
            Kind.RECORD_CORRECTED,
            {"fraction": 3, "corrects": 41, "reason": "typed wrongly"},
            "fraction 3, entry 41 corrected: typed wrongly",
        ),
        (Kind.DESIGN_RETURNED, {"revision": 2, "reason": "gap"}, "revision 2: gap"),
        (Kind.DESIGN_CHECKED, {"revision": 2}, "revision 2"),
        (Kind.DEPARTURE_EXPLAINED, {"departure": 1, "reason": "misread"}, "departure 1: misread"),
        (
            Kind.DEPARTURE_DECIDED,
            {"departure": 1, "decision": "shares stay"},
            "departure 1: shares stay",
        ),
        (
            Kind.MACHINE_CHANGED,
            {"machine": "Birch", "reason": "service", "signed_by": ["Rowan Finch"], "was": "Alder"},
            "machine Birch, service, was Alder",
        ),
        (
            "a kind of later",
            {
                "agreed": True,
                "counted": 2,
                "gap_cm": -0.5,
                "none": None,
                "place": {"side": "left", "turn_deg": 1.5},
                "seen": ["A", "B"],
            },
            "agreed, counted 2, gap −0.5 cm, place (side left, turn +1.5°), seen A; B",
        ),
    ],
)
def test_what_an_entry_says(kind: str, content: dict[str, object], words: str) -> None:
    assert content_words(kind, content) == words
