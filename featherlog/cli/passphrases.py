"""Where a passphrase comes from: a file that its owner alone can read, or a hidden prompt.

Never from an argument or the environment, which every user of the computer can read.
"""

from __future__ import annotations

import os
import stat
import sys
from getpass import getpass
from typing import TYPE_CHECKING, TypedDict

from featherlog.actions.desk import Signer
from featherlog.errors import InputError, NotFoundError

if TYPE_CHECKING:
    from pathlib import Path

# A passphrase of many words is short; a file of another kind need not be read to its end.
_LONGEST_BYTES = 4096


class Signers(TypedDict):
    """Who signs, as the actions name them."""

    by: Signer
    verified_by: Signer | None


def signer(name: str, file: Path | None) -> Signer:
    """Return the person of ``--by``."""
    return Signer(name, lambda: _passphrase(name, file, "--passphrase-file"))


def second(name: str, file: Path | None) -> Signer:
    """Return the person of ``--with``."""
    return Signer(name, lambda: _passphrase(name, file, "--with-passphrase-file"))


def signers(by: str, by_file: Path | None, other: str | None, other_file: Path | None) -> Signers:
    """Return who signs; a second person only where one is named."""
    verified_by = None if other is None else second(other, other_file)
    return {"by": signer(by, by_file), "verified_by": verified_by}


def new_owner(name: str, file: Path | None) -> Signer:
    """Return a person who chooses a new passphrase; typed twice where it is typed."""
    return Signer(name, lambda: _new_passphrase(name, file))


def _passphrase(name: str, file: Path | None, option: str) -> str:
    return _read(file) if file else _asked(f"Passphrase of {name}: ", name, option)


def _new_passphrase(name: str, file: Path | None) -> str:
    if file:
        return _read(file)
    option = "--new-passphrase-file"
    first = _asked(f"New passphrase of {name} (at least 12 characters): ", name, option)
    if _asked("The same again: ", name, option) != first:
        raise InputError("the two passphrases differ; nothing was written")
    return first


def _asked(prompt: str, name: str, option: str) -> str:
    if not sys.stdin.isatty():
        raise InputError(
            f"there is no terminal to ask for the passphrase of {name}: name a file that holds it "
            f"with {option}"
        )
    try:
        return getpass(prompt, stream=sys.stderr)
    except EOFError:
        raise InputError(f"no passphrase of {name} was given") from None


def _read(file: Path) -> str:
    try:
        with file.open("rb") as stream:
            mode = stat.S_IMODE(os.fstat(stream.fileno()).st_mode)
            if mode & (stat.S_IRWXG | stat.S_IRWXO):
                raise InputError(
                    f"{file}: others can use this passphrase file (mode {mode:04o}); make it "
                    "private with chmod 600"
                )
            raw = stream.read(_LONGEST_BYTES + 1)
    except FileNotFoundError:
        raise NotFoundError(f"{file}: there is no such file") from None
    except OSError as error:
        raise InputError(f"{file}: cannot be read ({error.strerror})") from None
    return _one_line(file, raw)


def _one_line(file: Path, raw: bytes) -> str:
    try:
        lines = raw.decode().splitlines()
    except UnicodeDecodeError:
        lines = []
    if len(lines) != 1 or not lines[0] or len(raw) > _LONGEST_BYTES:
        raise InputError(f"{file}: must hold a passphrase, one line of text in UTF-8")
    return lines[0]
