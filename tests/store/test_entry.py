"""The text that a hash is taken of, and signatures as they are stored."""

from __future__ import annotations

import json

import pytest
from hypothesis import given
from hypothesis import strategies as st

from featherlog.store.entry import _flat, canonical, read_signatures

TEXTS = st.text(st.characters(exclude_categories=["Cs"]))
FLAT = st.dictionaries(st.sampled_from("abcdef"), TEXTS | st.none() | st.integers(0, 2**53 - 1))
SIGNATURE = {"who": "Ash Plover", "role": "therapist", "key": "k", "signature": "s"}


@given(FLAT)
def test_the_quick_canonical_text_is_that_of_rfc_8785(value: dict[str, object]) -> None:
    assert _flat(value) == canonical(value)


def test_stored_signatures_are_read() -> None:
    found = read_signatures(canonical([SIGNATURE]))
    assert found is not None
    assert [one.who for one in found] == ["Ash Plover"]
    assert read_signatures("[]") == ()


@pytest.mark.parametrize(
    "text",
    [
        "",
        "{}",
        "7",
        "[1]",
        "[{}]",
        json.dumps([SIGNATURE]),
        canonical([SIGNATURE | {"more": "x"}]),
        canonical([SIGNATURE]).replace("Ash", r"\u0041sh"),
    ],
)
def test_signatures_written_in_another_way_are_not(text: str) -> None:
    assert read_signatures(text) is None
