"""Keys open for their passphrase alone, and signatures hold for their text and key alone."""

from __future__ import annotations

import unicodedata
from dataclasses import replace

import pytest
from hypothesis import given
from hypothesis import strategies as st

from featherlog.errors import InputError
from featherlog.signing.keys import PrivateKey, WrappedKey, new_key, sign, unwrap, verify
from featherlog.signing.passphrases import PRACTICE, STRONG, Cost, wait_s

PASSPHRASE = "four birds in a larch"  # noqa: S105 - of no person
KEY = new_key(PASSPHRASE, PRACTICE)
OTHER = new_key(PASSPHRASE, PRACTICE)


def opened(key: WrappedKey = KEY) -> PrivateKey:
    private = unwrap(key, PASSPHRASE)
    assert private is not None
    return private


def test_a_key_opens_with_its_passphrase() -> None:
    assert opened().public == KEY.public


@pytest.mark.parametrize("guess", ["", PASSPHRASE + " ", PASSPHRASE.title()])
def test_a_key_stays_shut_for_any_other(guess: str) -> None:
    assert unwrap(KEY, guess) is None


@pytest.mark.parametrize("part", ["public", "salt", "nonce", "locked", "cost"])
def test_no_part_of_a_stored_key_can_be_exchanged(part: str) -> None:
    other = Cost(2, 64, 1) if part == "cost" else getattr(OTHER, part)
    assert unwrap(replace(KEY, **{part: other}), PASSPHRASE) is None


def test_two_keys_of_one_passphrase_share_nothing() -> None:
    assert len({KEY.public, OTHER.public, KEY.salt, OTHER.salt, KEY.nonce, OTHER.nonce}) == 6


def test_an_accented_letter_counts_as_one_however_it_is_typed() -> None:
    composed, taken_apart = (unicodedata.normalize(form, "é" * 12) for form in ("NFC", "NFD"))
    assert unwrap(new_key(taken_apart, PRACTICE), composed) is not None


@pytest.mark.parametrize("short", ["", "eleven char", "é" * 11])
def test_a_short_passphrase_is_refused_with_the_rule(short: str) -> None:
    with pytest.raises(InputError, match=rf"has {len(short)} characters, but .* at least 12"):
        new_key(short, PRACTICE)


def test_the_real_cost_is_the_recommended_one() -> None:
    """RFC 9106, section 4, second option: 3 passes, 4 lanes, 64 MiB."""
    assert (STRONG.passes, STRONG.memory_kib, STRONG.lanes) == (3, 64 * 1024, 4)


@given(st.text())
def test_a_signature_holds_for_its_text(text: str) -> None:
    private = opened()
    assert verify(private.public, text, sign(private, text)) is True


def test_a_signature_holds_for_no_other_text_or_key() -> None:
    signature = sign(opened(), "entry")
    assert not verify(KEY.public, "entry ", signature)
    assert not verify(OTHER.public, "entry", signature)


@pytest.mark.parametrize("nonsense", ["", "?", "AAAA", "é"])
def test_nonsense_is_no_signature_and_no_key(nonsense: str) -> None:
    assert not verify(KEY.public, "entry", nonsense)
    assert not verify(nonsense, "entry", sign(opened(), "entry"))


def test_a_key_is_never_shown() -> None:
    assert PASSPHRASE not in repr(KEY)
    assert "0x" in repr(opened())


def test_answers_slow_down_up_to_half_a_minute() -> None:
    assert [wait_s(failures) for failures in range(8)] == [0, 1, 2, 4, 8, 16, 30, 30]
    assert wait_s(10**9) == 30
