"""RFC 8785 and FIPS 180-4 vectors through the canonical form and its digest."""

from __future__ import annotations

import base64
import json
import struct
from dataclasses import dataclass

import pytest
import rfc8785

from sheets.seal.canonical import CROCKFORD, canonical_bytes, digest


@dataclass(frozen=True, kw_only=True)
class Sample:
    """The members of the sample object of RFC 8785, 3.2.2, that need no float."""

    numbers: tuple[int, ...]
    string: str
    literals: tuple[bool | None, ...]


def test_members_literals_and_strings_as_the_rfc_prints_them() -> None:
    """RFC 8785, 3.2.2 and 3.2.3: the order of the members was seen; the string is from memory."""
    given = Sample(numbers=(333333333, 4), string='€$\x0f\nA\'B"\\\\"/', literals=(None, True, False))
    expected = (
        '{"is":"Sample","literals":[null,true,false],"numbers":[333333333,4],'
        '"string":"€$\\u000f\\nA\'B\\"\\\\\\\\\\"/"}'
    )
    assert canonical_bytes(given) == expected.encode()


@pytest.mark.parametrize("whole", [2**53 - 1, -(2**53) + 1, 0])
def test_whole_numbers_that_are_safe_pass(whole: int) -> None:
    """RFC 8785 by way of I-JSON (RFC 7493): whole numbers up to 2^53 − 1. Seen."""
    assert canonical_bytes(whole) == str(whole).encode()


@pytest.mark.parametrize("whole", [2**53, -(2**53)])
def test_whole_numbers_that_are_not_safe_are_refused(whole: int) -> None:
    with pytest.raises(rfc8785.IntegerDomainError):
        canonical_bytes(whole)


@pytest.mark.parametrize(
    ("bits", "printed"),
    [
        ("4340000000000001", "9007199254740994"),
        ("4340000000000002", "9007199254740996"),
        ("444b1ae4d6e2ef50", "1e+21"),
        ("3eb0c6f7a0b5ed8d", "0.000001"),
        ("3eb0c6f7a0b5ed8c", "9.999999999999997e-7"),
        ("8000000000000000", "0"),
    ],
)
def test_the_library_below_writes_numbers_as_the_rfc_prints_them(bits: str, printed: str) -> None:
    """RFC 8785, appendix B. Seen. In our own form those stand as text, by a rule of its own."""
    (value,) = struct.unpack(">d", bytes.fromhex(bits))
    assert rfc8785.dumps(value) == printed.encode()
    assert isinstance(json.loads(canonical_bytes(value)), str)


def test_digest_alphabet_leaves_out_what_is_misread() -> None:
    """Crockford's base32: digits, then letters without I, L, O and U; J is 18, Z is 31. From memory."""
    assert len(CROCKFORD) == 32
    assert "".join(sorted(set(CROCKFORD))) == CROCKFORD
    assert not set(CROCKFORD) & set("ILOU")
    assert (CROCKFORD.index("A"), CROCKFORD.index("J"), CROCKFORD.index("Z")) == (10, 18, 31)


@pytest.mark.parametrize(
    ("message", "first_80_bits"),
    [
        (b"abc", "ba7816bf8f01cfea4141"),
        (b"", "e3b0c44298fc1c149afb"),
        (b"abcdbcdecdefdefgefghfghighijhijkijkljklmklmnlmnomnopnopq", "248d6a61d20638b8e5c0"),
    ],
)
def test_digest_of_published_messages(message: bytes, first_80_bits: str) -> None:
    """SHA-256 examples to FIPS 180-4, from memory; letters by RFC 4648 base32, its alphabet exchanged."""
    rfc_4648 = base64.b32encode(bytes.fromhex(first_80_bits)).decode()
    exchanged = rfc_4648.translate(
        str.maketrans("ABCDEFGHIJKLMNOPQRSTUVWXYZ234567", "0123456789ABCDEFGHJKMNPQRSTVWXYZ")
    )
    assert digest(message) == exchanged
