"""RFC 9106 (Biryukov et al., 2021), section 5.3, Argon2id; and the reference code's own test.

The RFC's vector takes a secret and associated data, which a passphrase key does not use: it goes to
the library's lowest function. The second (password "password", salt "somesalt", 2 passes, 64 MiB,
1 lane) is from the reference implementation's test file, **from memory**, and goes through ours.
"""

from __future__ import annotations

from argon2.low_level import ARGON2_VERSION, Type, core, ffi

from featherlog.signing.passphrases import Cost, derive_key

RFC_TAG = "0d640df58d78766c08c037a34a8b53c9d01ef0452d75b65eb52520e96b01e659"
REFERENCE_TAG = "09316115d5cf24ed5a15a31a3ba326e5cf32edc24702987c02b6566f61913cf7"


def test_the_rfc_vector() -> None:
    parts = {"pwd": b"\1" * 32, "salt": b"\2" * 16, "secret": b"\3" * 8, "ad": b"\4" * 12}
    kept = {name: ffi.new("uint8_t[]", value) for name, value in parts.items()}
    sizes = {f"{name}len": len(value) for name, value in parts.items()}
    out = ffi.new("uint8_t[]", 32)
    context = ffi.new(
        "argon2_context *",
        {
            "version": ARGON2_VERSION,
            "out": out,
            "outlen": 32,
            **kept,
            **sizes,
            "t_cost": 3,
            "m_cost": 32,
            "lanes": 4,
            "threads": 1,
            "allocate_cbk": ffi.NULL,
            "free_cbk": ffi.NULL,
            "flags": 0,
        },
    )
    assert core(context, Type.ID.value) == 0
    assert bytes(ffi.buffer(out, 32)).hex() == RFC_TAG


def test_the_reference_implementation() -> None:
    cost = Cost(passes=2, memory_kib=65_536, lanes=1)
    assert derive_key("password", b"somesalt", cost).hex() == REFERENCE_TAG
