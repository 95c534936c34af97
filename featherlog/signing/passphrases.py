"""What a passphrase must be, what key it gives, and how answers slow down after wrong ones."""

from __future__ import annotations

import unicodedata
from dataclasses import dataclass
from typing import Final

from argon2.low_level import Type, hash_secret_raw

from featherlog.errors import InputError

FEWEST_CHARACTERS: Final = 12
LONGEST_WAIT_S: Final = 30
KEY_BYTES: Final = 32


@dataclass(frozen=True, slots=True)
class Cost:
    """How much work one guess at a passphrase takes (the parameters of Argon2id)."""

    passes: int
    memory_kib: int
    lanes: int


STRONG = Cost(passes=3, memory_kib=65_536, lanes=4)
"""RFC 9106, section 4: the recommended option where memory is limited."""

PRACTICE = Cost(passes=1, memory_kib=64, lanes=1)
"""Next to nothing: for practice databases, whose passphrases protect nothing."""


def check_passphrase(passphrase: str) -> None:
    """Pass a new passphrase that is long enough; nothing else is asked of it.

    Raises:
        InputError: it is shorter than 12 characters.
    """
    length = len(_normal(passphrase))
    if length < FEWEST_CHARACTERS:
        raise InputError(
            f"the new passphrase has {length} characters, but must have at least "
            f"{FEWEST_CHARACTERS}; several words are easy to keep, and nothing else is asked of it"
        )


def derive_key(passphrase: str, salt: bytes, cost: Cost) -> bytes:
    """Return the 32 bytes that a passphrase gives by Argon2id (RFC 9106)."""
    return hash_secret_raw(
        _normal(passphrase).encode(),
        salt,
        time_cost=cost.passes,
        memory_cost=cost.memory_kib,
        parallelism=cost.lanes,
        hash_len=KEY_BYTES,
        type=Type.ID,
    )


def wait_s(failures: int) -> int:
    """Return how long the next answer waits after so many wrong passphrases in a row, in s."""
    # The exponent is bounded, as a power of two grows without end.
    return min(LONGEST_WAIT_S, 2 ** (min(failures, 6) - 1)) if failures else 0


def _normal(passphrase: str) -> str:
    # One accented letter can be typed as one character or as two (RFC 8265 asks for this form).
    return unicodedata.normalize("NFC", passphrase)
