"""How an event's parts are written: canonical JSON, UTC times, digests, and texts that fit on one line."""

from __future__ import annotations

import json
from collections.abc import Mapping
from datetime import UTC, datetime
from typing import Final

from sheets.crockford import is_crockford
from sheets.errors import InputError, Problem, quoted

RECORD_ID: Final = 10
"""Characters of a record id."""
DIGEST: Final = 16
"""Characters of a digest as printed."""
LONGEST_NAME: Final = 200
LONGEST_REASON: Final = 2000
GREATEST_INTEGER: Final = 2**53 - 1
"""Beyond it a reader that keeps numbers as IEEE 754 doubles would lose digits (RFC 8785, 3.2.2.3)."""


def canonical(value: object) -> str:
    """JSON in the form of RFC 8785, of texts, whole numbers, truth values, null, lists and mappings.

    Mapping keys are ASCII: so sorting by code point is the sorting by UTF-16 unit that RFC 8785 asks for.
    Raises ValueError for anything else, floats and lone surrogates among it.
    """
    _check(value)
    return json.dumps(value, ensure_ascii=False, sort_keys=True, separators=(",", ":"), allow_nan=False)


def _check(value: object) -> None:
    if value is None or isinstance(value, bool):
        return
    if isinstance(value, int):
        if abs(value) > GREATEST_INTEGER:
            raise ValueError(f"{value} is too large a number for canonical JSON")
    elif isinstance(value, str):
        value.encode()  # raises UnicodeEncodeError, a ValueError, for a lone surrogate
    elif isinstance(value, list | tuple):
        for item in value:
            _check(item)
    elif isinstance(value, Mapping):
        for key, item in value.items():
            if not (isinstance(key, str) and key.isascii()):
                raise ValueError(f"{key!r} is no key of canonical JSON here")
            _check(item)
    else:
        raise ValueError(f"{type(value).__name__} has no canonical form here")  # noqa: TRY004 - one error for all


def utc_text(when: datetime) -> str:
    """A time in UTC, always with microseconds. Raises ValueError for a time without a zone."""
    if when.utcoffset() is None:
        raise ValueError("a time of the register carries its zone")
    return when.astimezone(UTC).isoformat(timespec="microseconds").replace("+00:00", "Z")


def name_text(what: str, text: str, *, longest: int = LONGEST_NAME) -> str:
    """A name, number or reason as it may stand in an event: one line, printable, neither empty nor endless.

    ``what`` names it in the message. Raises InputError.
    """
    fix = f"Give the {what} on one line."
    if not text.strip():
        wrong = "is empty"
    elif text != text.strip():
        wrong, fix = f"{quoted(text)} begins or ends with a blank", "Take that blank away."
    elif len(text) > longest:
        wrong = f"{quoted(text)} has {len(text)} characters; at most {longest} fit"
    elif not text.isprintable():
        wrong = f"{quoted(text)} holds a character that can't be printed"
    else:
        return text
    raise InputError(Problem(where=what, what=f"The {what} {wrong}.", fix=fix))


def is_digest(text: str) -> bool:
    """Whether a text is a digest: 16 characters as printed, or SHA-256 as 64 small hexadecimal digits."""
    return is_crockford(text, DIGEST) or (len(text) == 64 and set(text) <= set("0123456789abcdef"))


def digest_text(what: str, text: str) -> str:
    """A digest as it may stand in an event. Raises InputError."""
    if is_digest(text):
        return text
    raise InputError(
        Problem(
            where=what,
            what=f"{quoted(text)} is no digest.",
            fix="A digest has 16 characters as printed on the sheets, or 64 hexadecimal digits.",
        )
    )
