"""RFC 8032 (Josefsson and Liusvaara, 2017), section 7.1: test vectors of Ed25519, as printed."""

from __future__ import annotations

from base64 import b64encode

import pytest

from featherlog.signing.keys import PrivateKey, sign, verify

# Secret key, public key, message, signature. The third vector's message is not text.
VECTORS = [
    pytest.param(
        "9d61b19deffd5a60ba844af492ec2cc44449c5697b326919703bac031cae7f60",
        "d75a980182b10ab7d54bfed3c964073a0ee172f3daa62325af021a68f707511a",
        "",
        "e5564300c360ac729086e2cc806e828a84877f1eb8e5d974d873e065224901555fb8821590a33bacc61e39701cf"
        "9b46bd25bf5f0595bbe24655141438e7a100b",
        id="TEST 1",
    ),
    pytest.param(
        "4ccd089b28ff96da9db6c346ec114e0f5b8a319f35aba624da8cf6ed4fb8a6fb",
        "3d4017c3e843895a92b70aa74d1b7ebc9c982ccf2ec4968cc0cd55f12af4660c",
        "72",
        "92a009a9f0d4cab8720e820b5f642540a2b27b5416503f8fb3762223ebdb69da085ac1e43e15996e458f3613d0f"
        "11d8c387b2eaeb4302aeeb00d291612bb0c00",
        id="TEST 2",
    ),
]


def _base64(digits: str) -> str:
    return b64encode(bytes.fromhex(digits)).decode()


@pytest.mark.parametrize(("secret", "public", "message", "signature"), VECTORS)
def test_vectors(secret: str, public: str, message: str, signature: str) -> None:
    private = PrivateKey.from_seed(bytes.fromhex(secret))
    text = bytes.fromhex(message).decode()
    assert private.public == _base64(public)
    assert sign(private, text) == _base64(signature)
    assert verify(_base64(public), text, _base64(signature))
