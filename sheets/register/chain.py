"""The chain check: every event there, in its place and unchanged, or the first that isn't, by number.

Inside one file the check can't see an end that was cut off, nor a register written anew from some event on:
whoever can write the file can also compute hashes. For both it needs an anchor that was kept elsewhere.
"""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass
from enum import Enum
from typing import Final, Self

from sheets.errors import InputError, Problem, quoted
from sheets.register.events import FIRST, NO_EVENT, EventKind, hash_of
from sheets.register.store import Register, View, event_of

_ANCHOR: Final = re.compile(r"([1-9][0-9]{0,17}):([0-9a-f]{64})", re.ASCII)


@dataclass(frozen=True, kw_only=True)
class Anchor:
    """An event by number and hash: kept outside, it holds all events up to that one."""

    sequence: int
    hash: str

    def __str__(self) -> str:
        return f"{self.sequence}:{self.hash}"

    @classmethod
    def read(cls, text: str) -> Self:
        """An anchor from its text, blanks or not. Raises InputError."""
        found = _ANCHOR.fullmatch("".join(text.split()))
        if found is None:
            raise InputError(
                Problem(
                    where="the anchor",
                    what=f"{quoted(text)} is no anchor.",
                    fix="An anchor is the number of an event, a colon, and 64 hexadecimal digits.",
                )
            )
        return cls(sequence=int(found[1]), hash=found[2])


class Break(Enum):
    """What is wrong with the first event that doesn't hold."""

    MISSING = "no event has this number"
    UNREADABLE = "one of its fields isn't text in UTF-8"
    CHANGED = "its hash isn't the hash of what it says"
    UNLINKED = "it doesn't name the hash of the event before it"
    NOT_OPENED = "a register begins with its opening, and only there"
    CUT = "the register ends before the anchor"
    REWRITTEN = "its hash isn't the one of the anchor"


@dataclass(frozen=True, kw_only=True)
class ChainVerdict:
    """How far the chain holds."""

    last: Anchor | None
    """The last event that holds; as an anchor it is worth something only if the whole chain holds."""
    broken: Break | None = None
    broken_at: int | None = None
    """Number of the first event that doesn't hold."""
    anchored: bool = False
    """Whether an anchor was reached and agrees; without one, a cut end or a rewriting can't be seen."""

    @property
    def holds(self) -> bool:
        """Whether nothing is broken, as far as could be judged."""
        return self.broken is None


def check_chain(register: Register, *anchors: Anchor) -> ChainVerdict:
    """Checks every event, and the anchors that were kept outside. The first broken event is named."""
    with register.reading() as view:
        return chain_in(view, anchors)


def chain_in(view: View, anchors: Sequence[Anchor] = ()) -> ChainVerdict:
    """The same within a view that is open already."""
    wanted: dict[int, set[str]] = {}
    for anchor in anchors:
        wanted.setdefault(anchor.sequence, set()).add(anchor.hash)
    last: Anchor | None = None
    sequence, previous = FIRST - 1, NO_EVENT
    for row in view.rows():
        sequence += 1
        event = event_of(row)
        if row[0] != sequence:
            return ChainVerdict(last=last, broken=Break.MISSING, broken_at=sequence)
        broken = None
        if event is None:
            broken = Break.UNREADABLE
        elif event.hash != hash_of(event):
            broken = Break.CHANGED
        elif event.previous != previous:
            broken = Break.UNLINKED
        elif (event.kind == EventKind.OPENED) != (sequence == FIRST):
            broken = Break.NOT_OPENED
        elif wanted.get(sequence, {event.hash}) != {event.hash}:
            broken = Break.REWRITTEN
        if broken is not None or event is None:
            return ChainVerdict(last=last, broken=broken, broken_at=sequence)
        previous = event.hash
        last = Anchor(sequence=sequence, hash=previous)
    if last is None:
        return ChainVerdict(last=None, broken=Break.MISSING, broken_at=FIRST)
    if any(number > sequence for number in wanted):
        return ChainVerdict(last=last, broken=Break.CUT, broken_at=sequence + 1)
    return ChainVerdict(last=last, anchored=bool(wanted))
