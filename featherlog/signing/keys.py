"""Signing keys (Ed25519, RFC 8032), and how a passphrase locks them away.

The private key is encrypted with ChaCha20-Poly1305 (RFC 8439) under a key that the passphrase gives
by Argon2id. The public key is the associated data, so that neither half can be exchanged alone.
"""

from __future__ import annotations

from base64 import b64decode, b64encode
from dataclasses import dataclass
from secrets import token_bytes

from argon2.exceptions import HashingError
from cryptography.exceptions import InvalidSignature, InvalidTag
from cryptography.hazmat.primitives.asymmetric.ed25519 import Ed25519PrivateKey, Ed25519PublicKey
from cryptography.hazmat.primitives.ciphers.aead import ChaCha20Poly1305

from featherlog.signing.passphrases import Cost, check_passphrase, derive_key

_SALT_BYTES, _NONCE_BYTES = 16, 12


@dataclass(frozen=True, slots=True)
class WrappedKey:
    """A person's key as it is stored: all of it may be read, the private half only unlocked.

    ``public``, ``salt``, ``nonce`` and ``locked`` are base64; ``cost`` is what one guess takes.
    """

    public: str
    salt: str
    nonce: str
    locked: str
    cost: Cost


@dataclass(frozen=True, slots=True)
class PrivateKey:
    """An unlocked key. It lives only while one command runs, and is never shown."""

    _key: Ed25519PrivateKey

    @property
    def public(self) -> str:
        """The public half, base64."""
        return _text(self._key.public_key().public_bytes_raw())

    @classmethod
    def from_seed(cls, seed: bytes) -> PrivateKey:
        """Return the key of a seed of 32 bytes."""
        return cls(Ed25519PrivateKey.from_private_bytes(seed))


def new_key(passphrase: str, cost: Cost) -> WrappedKey:
    """Make a new key and lock it; InputError where the passphrase is too short."""
    check_passphrase(passphrase)
    key = Ed25519PrivateKey.generate()
    public = key.public_key().public_bytes_raw()
    salt, nonce = token_bytes(_SALT_BYTES), token_bytes(_NONCE_BYTES)
    cipher = ChaCha20Poly1305(derive_key(passphrase, salt, cost))
    locked = cipher.encrypt(nonce, key.private_bytes_raw(), public)
    return WrappedKey(_text(public), _text(salt), _text(nonce), _text(locked), cost)


def unwrap(key: WrappedKey, passphrase: str) -> PrivateKey | None:
    """Unlock a key; None where the passphrase is wrong or the stored key was changed."""
    try:
        cipher = ChaCha20Poly1305(derive_key(passphrase, b64decode(key.salt), key.cost))
        seed = cipher.decrypt(b64decode(key.nonce), b64decode(key.locked), b64decode(key.public))
    except (InvalidTag, HashingError, ValueError):
        return None
    return PrivateKey.from_seed(seed)


def sign(private: PrivateKey, text: str) -> str:
    """Return the signature of ``text``, base64."""
    return _text(private._key.sign(text.encode()))  # noqa: SLF001 - the key stays inside this module


def verify(public: str, text: str, signature: str) -> bool:
    """Tell whether ``signature`` was made over ``text`` with the private half of ``public``."""
    try:
        key = Ed25519PublicKey.from_public_bytes(b64decode(public, validate=True))
        key.verify(b64decode(signature, validate=True), text.encode())
    except (InvalidSignature, ValueError):
        return False
    return True


def _text(raw: bytes) -> str:
    return b64encode(raw).decode()
