"""When two written names are one person's."""

from __future__ import annotations

import unicodedata
from collections.abc import Iterable


def folded(name: str) -> str:
    """A name without what people write one way or another: capitals, blanks, composed letters."""
    return " ".join(unicodedata.normalize("NFKC", name).casefold().split())


def same_person(one: str, other: str) -> bool:
    """Whether two names are one person's, whatever their blanks and capitals."""
    return folded(one) == folded(other)


def spelled(name: str, known: Iterable[str]) -> str | None:
    """The spelling of that person among names that are known, or None."""
    return next((one for one in known if same_person(one, name)), None)
