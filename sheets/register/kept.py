"""What the register keeps of an issued pack, so that years later nothing has to be guessed."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Final

from sheets.register.rows import Row
from sheets.register.saying import LONG

_FILE: Final = {LONG: True}


@dataclass(frozen=True, kw_only=True)
class Kept:
    """What a pack was made from, what it says, and why it was issued."""

    rows: tuple[Row, ...]
    """Of its record sheet: what readings are judged by."""
    task: str
    part: str = ""
    """The part that was replaced, where the task is that."""
    paper: str
    reason: str = ""
    """Why it takes the place of the revision before; empty for the first."""
    reviewer: str = ""
    """Who judged what changed."""
    changes: tuple[str, ...] = ()
    """What changed since the revision before: targets, parts, steps, one line each."""
    unit: str
    """In which pressures are printed."""
    zero_limit: str
    """The highest reading that counts as zero, digits in ``unit``."""
    machine: str = field(metadata=_FILE)
    """The machine file as it stood."""
    site: str = field(default="", metadata=_FILE)
    walkdown: str = field(default="", metadata=_FILE)
    content: str = field(metadata=_FILE)
    """What the sheets say, as the content digest is taken from it."""
