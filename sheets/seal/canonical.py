"""Canonical content and its digest: what the sheets say, as bytes that any machine makes alike."""

from __future__ import annotations

import hashlib
from dataclasses import fields, is_dataclass
from enum import Enum
from typing import Final

import rfc8785

from sheets.crockford import CROCKFORD as CROCKFORD
from sheets.crockford import in_crockford
from sheets.quantities import number

PRINTED: Final = 16
"""Characters of a digest that are printed: 80 bits."""

Json = None | bool | int | str | list["Json"] | dict[str, "Json"]


def plain(value: object) -> Json:
    """A document value as JSON without floats: a number stands as its decimal digits.

    Raises TypeError for a type that documents don't hold.
    """
    if value is None or isinstance(value, bool | int | str):
        return value
    if isinstance(value, float):
        return number(value)
    if isinstance(value, Enum):
        return plain(value.value)
    if isinstance(value, list | tuple):
        return [plain(item) for item in value]
    if is_dataclass(value) and not isinstance(value, type):
        body: dict[str, Json] = {field.name: plain(getattr(value, field.name)) for field in fields(value)}
        return {"is": type(value).__name__, **body}
    raise TypeError(f"{type(value).__name__} has no canonical form")


def canonical_bytes(value: object) -> bytes:
    """RFC 8785 form of a document value."""
    return rfc8785.dumps(plain(value))


def digest(data: bytes) -> str:
    """First 80 bits of SHA-256 in 16 characters of Crockford's base32. Source: FIPS 180-4 for the hash."""
    return in_crockford(hashlib.sha256(data).digest(), PRINTED)
