"""Crockford's base32: how record ids and printed digests are written, and read back as typed by hand."""

from __future__ import annotations

from typing import Final

CROCKFORD: Final = "0123456789ABCDEFGHJKMNPQRSTVWXYZ"
"""No I, L, O or U, so that nobody misreads it."""
_MISREAD: Final = str.maketrans({"I": "1", "L": "1", "O": "0", "-": None, " ": None})


def in_crockford(data: bytes, characters: int) -> str:
    """The first ``5 * characters`` bits of ``data``, five a sign. Raises ValueError if there are fewer."""
    spare = 8 * len(data) - 5 * characters
    if spare < 0:
        raise ValueError(f"{len(data)} bytes are too few for {characters} characters")
    bits = int.from_bytes(data, "big") >> spare
    return "".join(CROCKFORD[(bits >> 5 * place) & 31] for place in reversed(range(characters)))


def as_printed(typed: str) -> str:
    """What a person typed off the paper, as it is printed: capitals, without gaps, I and L for 1, O for 0."""
    return typed.upper().translate(_MISREAD)


def is_crockford(text: str, characters: int) -> bool:
    """Whether a text is that many signs of the alphabet, as printed."""
    return len(text) == characters and set(text) <= set(CROCKFORD)
