"""The one font family on paper, and the one door through which text reaches a page."""

from __future__ import annotations

import unicodedata
from functools import cache
from html import escape
from importlib.resources import as_file, files
from typing import NewType

from reportlab.pdfbase.pdfmetrics import registerFont, registerFontFamily
from reportlab.pdfbase.ttfonts import TTFont

from featherlog.errors import InputError

REGULAR = "DejaVu Sans"
BOLD = "DejaVu Sans Bold"
ITALIC = "DejaVu Sans Oblique"
BOLD_ITALIC = "DejaVu Sans Bold Oblique"

_FILES = {
    REGULAR: "DejaVuSans.ttf",
    BOLD: "DejaVuSans-Bold.ttf",
    ITALIC: "DejaVuSans-Oblique.ttf",
    BOLD_ITALIC: "DejaVuSans-BoldOblique.ttf",
}

Markup = NewType("Markup", str)
"""Text that is safe to hand to a Paragraph: escaped, and every character has a glyph."""


@cache
def register() -> frozenset[int]:
    """Register the four styles with reportlab; return the code points that all of them print."""
    fonts = [_load(name, file) for name, file in _FILES.items()]
    for font in fonts:
        registerFont(font)
    registerFontFamily(REGULAR, REGULAR, BOLD, ITALIC, BOLD_ITALIC)
    return frozenset.intersection(*(frozenset(font.face.charToGlyph) for font in fonts))


def _load(name: str, file: str) -> TTFont:
    with as_file(files("featherlog.paper") / "fonts" / file) as path:
        return TTFont(name, str(path))


def check_glyphs(text: str) -> None:
    """Refuse text that would not print as it reads.

    A missing glyph prints blank, and reportlab sets right-to-left script in the wrong order, so
    either could hide or change a name.

    Raises:
        InputError: Names each character that cannot be printed and the text it stands in.
    """
    strangers = dict.fromkeys(character for character in text if not _prints(character))
    if strangers:
        named = ", ".join(_named(character) for character in strangers)
        raise InputError(
            f'The text "{text}" cannot be printed: the font of the papers has no way to show '
            f"{named}; write it in Latin, Greek or Cyrillic letters."
        )


def _prints(character: str) -> bool:
    if character in "\n\t":
        return True
    return (
        ord(character) in register()
        and not unicodedata.category(character).startswith("C")
        and unicodedata.bidirectional(character) not in ("R", "AL")
    )


def _named(character: str) -> str:
    return f"U+{ord(character):04X} {unicodedata.name(character, 'without a name')}"


def plain(text: str) -> str:
    """Return text for a drawing: composed accents, every character with a glyph.

    Raises:
        InputError: As ``check_glyphs``.
    """
    composed = unicodedata.normalize("NFC", text)
    check_glyphs(composed)
    return composed


def safe(text: str) -> Markup:
    """Return text for a Paragraph, with the characters of mark-up escaped.

    Raises:
        InputError: As ``check_glyphs``.
    """
    return Markup(escape(plain(text), quote=False))


def strong(text: str) -> Markup:
    """Return ``safe`` text in bold."""
    return Markup(f"<b>{safe(text)}</b>")


def join(separator: str, parts: tuple[Markup, ...] | list[Markup]) -> Markup:
    """Return pieces of mark-up with plain text between them; empty pieces are left out."""
    return Markup(safe(separator).join(part for part in parts if part))
