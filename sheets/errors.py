"""One family of errors: each says where, what, and what to do about it."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from difflib import get_close_matches
from enum import IntEnum


class ExitStatus(IntEnum):
    """What a command hands back to the shell."""

    GOOD = 0
    REFUSED = 1
    WRONG_INPUT = 2
    NOT_ESTABLISHED = 3
    BUG = 70


GRAVITY = (ExitStatus.BUG, ExitStatus.WRONG_INPUT, ExitStatus.REFUSED, ExitStatus.NOT_ESTABLISHED)
"""Of many files, the gravest status is handed back: this order, first found."""


def gravest(statuses: Iterable[ExitStatus]) -> ExitStatus:
    """The status that many files come to together."""
    kept = set(statuses)
    return next((status for status in GRAVITY if status in kept), ExitStatus.GOOD)


@dataclass(frozen=True, kw_only=True)
class Problem:
    """One thing that is wrong: where it stands, what it is, what to do."""

    where: str
    what: str
    fix: str

    def __str__(self) -> str:
        return f"{self.where}: {self.what}\n    {self.fix}"


class JamnutError(Exception):
    """Root of every error that a user can cause or must hear about.

    Several problems may travel in one error, so that a file is corrected in one go.
    """

    status: ExitStatus = ExitStatus.WRONG_INPUT

    def __init__(self, *problems: Problem) -> None:
        super().__init__("\n".join(str(problem) for problem in problems))
        self.problems = problems


class InputError(JamnutError):
    """A file, an option or a value is wrong or missing (exit status 2)."""

    status = ExitStatus.WRONG_INPUT


class RefusedError(JamnutError):
    """The machine can't be set as it is described (exit status 1)."""

    status = ExitStatus.REFUSED


class NotEstablishedError(JamnutError):
    """No answer within the stated limit: neither yes nor no (exit status 3)."""

    status = ExitStatus.NOT_ESTABLISHED


LONGEST_QUOTE = 60


def quoted(text: str) -> str:
    """A user's words as they may stand in a message: on one line, printable, not endless."""
    short = text if len(text) <= LONGEST_QUOTE else text[: LONGEST_QUOTE - 1] + "…"
    plain = "".join(sign if sign.isprintable() else sign.encode("unicode_escape").decode() for sign in short)
    return f"'{plain}'"


def nearest(wrong: str, right: Iterable[str]) -> str | None:
    """The right word that the wrong one most likely stands for, or None if none is near."""
    by_small = {word.casefold(): word for word in right}
    found = get_close_matches(wrong[:LONGEST_QUOTE].casefold(), by_small, n=1, cutoff=0.6)
    return by_small[found[0]] if found else None
