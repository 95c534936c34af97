from __future__ import annotations

import unicodedata

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from pdf_runs import squeezed, whole_text

from featherlog.errors import InputError
from featherlog.paper.fonts import check_glyphs, safe
from featherlog.paper.layout import Furniture, build_pdf
from featherlog.paper.style import para

PRINTABLE = st.one_of(
    st.characters(min_codepoint=0x20, max_codepoint=0x7E),
    st.characters(min_codepoint=0xA1, max_codepoint=0x17F, exclude_characters="\xad"),
    st.characters(min_codepoint=0x391, max_codepoint=0x3C9, exclude_characters="\u03a2"),
    st.sampled_from("−→☐✓–<>&;"),
)


def printed(text: str) -> bytes:
    furniture = Furniture("Proof", None, demo=False, notes=(), marks=())
    return build_pdf(furniture, lambda _: [para(safe(text))], "A4")


@settings(max_examples=60, deadline=None)
@given(st.text(PRINTABLE, min_size=1, max_size=40))
def test_any_printable_text_survives_from_paragraph_to_extracted_text(text: str) -> None:
    expected = squeezed(unicodedata.normalize("NFC", text))
    assert whole_text(printed(text)) == f"ProofPage1of1{expected}"


@pytest.mark.parametrize(
    "text", ["x<y>z", "Finch & Wren <b>", "&lt;", "Zoë Ærø", "α/β = 2", "a<br/>b"]
)
def test_characters_of_markup_are_printed_as_they_stand(text: str) -> None:
    assert squeezed(text) in whole_text(printed(text))


@pytest.mark.parametrize(
    ("text", "named"),
    [
        ("Finch 林", "U+6797 CJK UNIFIED IDEOGRAPH-6797"),
        ("שלום", "U+05E9 HEBREW LETTER SHIN"),
        ("Fin\u200bch", "U+200B ZERO WIDTH SPACE"),
        ("Fin\x07ch", "U+0007 without a name"),
    ],
)
def test_a_character_that_would_not_print_is_refused_by_name(text: str, named: str) -> None:
    with pytest.raises(InputError, match="cannot be printed") as refusal:
        check_glyphs(text)
    assert named in str(refusal.value)


def test_composed_and_decomposed_accents_print_alike() -> None:
    assert safe("Zoe\u0308") == safe("Zo\u00eb")
