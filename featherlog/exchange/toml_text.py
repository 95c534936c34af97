"""The text of a TOML file: read from disk, and parsed with its syntax faults in words."""

from __future__ import annotations

import re
import tomllib
from typing import TYPE_CHECKING, Any

from featherlog.errors import InputError, NotFoundError

if TYPE_CHECKING:
    from pathlib import Path


def read_text(path: Path) -> str:
    """Return the text of a file in UTF-8, a byte order mark left out.

    Raises:
        NotFoundError: where there is no such file.
        InputError: where it cannot be read, or is not UTF-8 text.
    """
    try:
        return path.read_text(encoding="utf-8-sig")
    except FileNotFoundError:
        raise NotFoundError(f"{path}: there is no such file") from None
    except UnicodeDecodeError as error:
        byte = error.start + 1
        raise InputError(f"{path}: byte {byte} is not text in UTF-8; save it as UTF-8") from None
    except OSError as error:
        raise InputError(f"{path}: cannot be read ({error.strerror})") from None


def document(text: str, name: str) -> dict[str, Any]:
    """Parse the TOML text of a file called ``name``.

    Raises:
        InputError: naming the line where the text stops being TOML.
    """
    try:
        return tomllib.loads(text)
    except RecursionError:
        raise InputError(f"{name}: is not valid TOML, brackets are nested too deeply") from None
    except ValueError as error:
        raise InputError(_syntax_fault(name, str(error))) from None


def _syntax_fault(name: str, message: str) -> str:
    """Put the parser's line to the front: ``design.toml line 3: is not valid TOML, …``."""
    place = re.search(r" \(at line (\d+), column (\d+)\)$", message)
    if place is None:
        return f"{name}: is not valid TOML, {message}"
    said = message[:1].lower() + message[1 : place.start()]
    return f"{name} line {place[1]}: is not valid TOML, {said} (column {place[2]})"
