"""Paper that hangs somewhere: numbered copies of a pack, and setting tags, each until it comes down."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import date
from typing import ClassVar

from sheets.register.events import EventKind
from sheets.register.finding import revisions_in
from sheets.register.revisions import Revision, current
from sheets.register.saying import Said, Told, told
from sheets.register.store import View


@dataclass(frozen=True, kw_only=True)
class CopyHung(Said):
    """A copy of the event's record, at a place."""

    KIND: ClassVar[EventKind] = EventKind.COPY_HUNG

    copy: int
    """Its number among the copies of the document, from 1; no number is used again."""
    where: str
    by: str
    on: date


@dataclass(frozen=True, kw_only=True)
class CopyTakenDown(Said):
    """A copy that no longer hangs there."""

    KIND: ClassVar[EventKind] = EventKind.COPY_TAKEN_DOWN

    copy: int
    by: str
    on: date
    note: str = ""


@dataclass(frozen=True, kw_only=True)
class TagPosted(Said):
    """A setting tag at the machine; the one before it for the same adjuster came off."""

    KIND: ClassVar[EventKind] = EventKind.TAG_POSTED

    adjuster: str
    where: str
    as_left: str
    """The line that it prints."""
    reading: int
    """Event of the reading as left that it shows."""
    by: str
    on: date


@dataclass(frozen=True, kw_only=True)
class Copy:
    """A copy as it follows from all events."""

    hung: Told[CopyHung]
    revision: Revision
    """The revision that it is of."""
    down: Told[CopyTakenDown] | None
    old: bool
    """Of a revision that isn't the current one."""

    @property
    def hangs(self) -> bool:
        return self.down is None

    @property
    def to_take_down(self) -> bool:
        """It still hangs and isn't of the current revision: open until somebody takes it down."""
        return self.hangs and self.old


def copies(view: View, document: str) -> tuple[Copy, ...]:
    """All copies of a document by their number."""
    revisions = revisions_in(view, document)
    by_id = {one.record_id: one for one in revisions}
    newest = current(revisions)
    down = {one.said.copy: one for one in told(view, CopyTakenDown, document=document)}
    return tuple(
        Copy(
            hung=one,
            revision=by_id[one.record_id],
            down=down.get(one.said.copy),
            old=newest is None or one.record_id != newest.record_id,
        )
        for one in told(view, CopyHung, document=document)
    )


def tags(view: View, *, machine: str) -> dict[str, Told[TagPosted]]:
    """The tag that hangs for each adjuster of a machine."""
    return {one.said.adjuster: one for one in told(view, TagPosted, machine=machine)}
