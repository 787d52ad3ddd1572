"""Passwords: kept as Argon2id hashes (RFC 9106), compared in the same time for a name that nobody has."""

from __future__ import annotations

from functools import lru_cache
from typing import Final

from argon2 import PasswordHasher
from argon2.exceptions import InvalidHashError, VerificationError
from argon2.profiles import RFC_9106_LOW_MEMORY

_HASHER: Final = PasswordHasher.from_parameters(RFC_9106_LOW_MEMORY)


def password_hash(password: str) -> str:
    """The hash of a ``password``, with its salt and parameters."""
    return _HASHER.hash(password)


def password_fits(kept: str, password: str) -> bool:
    """Whether a ``password`` has that hash; for an empty ``kept`` no password has, after the same time."""
    try:
        return _HASHER.verify(kept or _nobody(), password) and bool(kept)
    except (VerificationError, InvalidHashError):
        return False


@lru_cache(maxsize=1)
def _nobody() -> str:
    """A hash that stands in for a name that isn't known."""
    return _HASHER.hash("nobody")
