"""What may be said of a signature, and of a file's signatures together: good, bad, not established."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from datetime import datetime
from enum import Enum
from typing import Final

ROLES: Final = ("prepared", "checked", "approved")
"""The three signatures in the order in which they are given; their fields are named so."""
ALWAYS_NEEDED: Final = frozenset({"prepared", "approved"})
"""Nobody approves what they prepared: this can't be waived, so these two are needed everywhere."""


class Judgement(Enum):
    """Three words, of which the third is no milder form of the first."""

    GOOD = "good"
    BAD = "bad"
    NOT_ESTABLISHED = "not established"


class Cause(Enum):
    """Why a signature isn't good."""

    UNSIGNED = "unsigned"
    MISSING = "signature missing"
    TRAILING = "bytes after the last signature"
    COVERAGE = "bytes that no signature covers"
    CONTAINER = "container isn't as it was written"
    DIGEST = "file changed after the signature"
    SIGNATURE = "signature doesn't fit its certificate"
    ALGORITHM = "algorithm not allowed"
    ATTRIBUTES = "signed attributes"
    KEY_USAGE = "certificate isn't for signing"
    FOREIGN = "certificate not trusted"
    FORGED = "certificate claims an authority that didn't issue it"
    VALIDITY = "outside the validity of the certificate"
    TIME = "time not established"
    TIME_TOKEN = "time token"
    PERSONS = "one person in two roles"
    ORDER = "order of the signatures"
    REVISION = "a later revision changed more than its signature"
    FORM = "not the form of a signed pack"
    UNREADABLE = "file can't be read"
    LATER = "changed since"


@dataclass(frozen=True, kw_only=True)
class Reason:
    """One reason against a good word."""

    cause: Cause
    judgement: Judgement
    """Bad or not established."""
    says: str


class Flaw(Exception):  # noqa: N818  # carried inside verification only, where it becomes a reason
    """Ends the judging of one thing with its reason."""

    def __init__(self, cause: Cause, says: str, judgement: Judgement = Judgement.BAD) -> None:
        super().__init__(says)
        self.reason = Reason(cause=cause, judgement=judgement, says=says)


@dataclass(frozen=True, kw_only=True)
class SignatureReport:
    """One signature: who, as what, vouched for by whom, when, and how far that holds."""

    meaning: str
    """Name of its field; empty where the file couldn't be read that far."""
    person: str
    """Name in the certificate; empty where there is none to read."""
    certificate: str
    """SHA-256 of the certificate in hexadecimal; empty likewise."""
    trusted_by: str
    """Authority of the trust list that vouches for the certificate; empty if none does."""
    claimed: datetime | None
    """By the signer's own clock: a claim."""
    proven: datetime | None
    """Existed at the latest then, by a time server or the register."""
    proven_by: str
    judgement: Judgement
    reasons: tuple[Reason, ...]


@dataclass(frozen=True, kw_only=True)
class SignaturesReport:
    """All signatures of a file, and the word on them together."""

    judgement: Judgement
    reasons: tuple[Reason, ...]
    """What concerns the file and not one signature."""
    signatures: tuple[SignatureReport, ...]


def worst(reasons: Iterable[Reason]) -> Judgement:
    """Good only where nothing speaks against it."""
    found = {reason.judgement for reason in reasons}
    return next(
        (word for word in (Judgement.BAD, Judgement.NOT_ESTABLISHED) if word in found), Judgement.GOOD
    )
