"""Text that a person typed, which the papers will have to print for good."""

from __future__ import annotations

from featherlog.errors import InputError


def printable(what: str, text: str) -> str:
    """Return typed text without spaces at its ends; ``what`` names it in a message.

    The ledger keeps it for ever, so a character that no paper can print is stopped here.

    Raises:
        InputError: it holds line breaks, control characters or characters without a glyph.
    """
    text = text.strip()
    if not text.isprintable():
        raise InputError(f"{what} must be one line without control characters")
    if not text.isascii():
        from featherlog.paper.fonts import check_glyphs  # noqa: PLC0415 - rarely needed, slow

        check_glyphs(text)
    return text


def required(what: str, text: str, why: str) -> str:
    """Return ``printable`` text that is not empty; ``why`` says what it must tell."""
    text = printable(what, text)
    if not text:
        raise InputError(f"{what} is empty, but must say {why}")
    return text


def printable_everywhere(value: object) -> None:
    """Check every text in plain data (text, mappings, lists), as ``printable`` does one."""
    match value:
        case str():
            printable("a text of the file", value)
        case dict():
            for pair in value.items():
                printable_everywhere(pair)
        case list() | tuple():
            for item in value:
                printable_everywhere(item)
