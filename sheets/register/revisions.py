"""Revisions of documents, derived from events and kept nowhere else: so they can't disagree with them."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, replace
from datetime import datetime
from enum import Enum
from types import MappingProxyType
from typing import Final

from sheets.register.events import REVISION_KINDS, Event, EventKind, contradiction
from sheets.register.kept import Kept
from sheets.register.saying import value_of


class RevisionState(Enum):
    """Where a revision stands."""

    RESERVED = "reserved"
    """It has a number; its pack isn't finished, or not every signature is there."""
    ISSUED = "issued"
    """The current one: of a document there is at most one."""
    SUPERSEDED = "superseded"
    VOID = "void"
    REJECTED = "rejected"
    WITHDRAWN = "withdrawn"


@dataclass(frozen=True, kw_only=True)
class Signer:
    """One who stands behind an issued pack."""

    meaning: str
    """Prepared, checked, approved."""
    name: str


@dataclass(frozen=True, kw_only=True)
class Signature:
    """That a file was signed: who, with which meaning, and when the register was told."""

    meaning: str
    name: str
    file_digest: str
    """Of the file as it stood with this signature as its last."""
    at: datetime
    sequence: int
    """Of the event that tells it."""


@dataclass(frozen=True, kw_only=True)
class Issue:
    """What was issued."""

    content_digest: str
    file_digest: str
    machine_digest: str
    engine: int
    signers: tuple[Signer, ...]
    ink: bool
    """Signed by hand on paper: the register knows the names only."""
    kept: Kept | None
    """What the pack was made from and what it says; None for an issue that didn't keep it."""
    by: str
    at: datetime
    sequence: int
    """Of the event that tells it."""


@dataclass(frozen=True, kw_only=True)
class Revision:
    """One revision of a document."""

    document: str
    machine: str
    number: int
    """From 1, without gaps: a void or rejected revision keeps its number."""
    record_id: str
    state: RevisionState
    reserved_by: str
    reserved_at: datetime
    reserved_sequence: int
    """Of the event that gave out its number."""
    signatures: tuple[Signature, ...] = ()
    issue: Issue | None = None
    superseded_by: int | None = None
    ended_by: str = ""
    """Who made it void, rejected or withdrew it."""
    ended_at: datetime | None = None
    ended_sequence: int = 0
    """Of the event that ended it; 0 while none did."""
    reason: str = ""


FROM_STATE: Final[Mapping[EventKind, RevisionState]] = MappingProxyType(
    {
        EventKind.SIGNED: RevisionState.RESERVED,
        EventKind.ISSUED: RevisionState.RESERVED,
        EventKind.VOIDED: RevisionState.RESERVED,
        EventKind.REJECTED: RevisionState.RESERVED,
        EventKind.WITHDRAWN: RevisionState.ISSUED,
    }
)
"""In which state a revision must be for each event."""
_ENDS: Final = {
    EventKind.VOIDED: RevisionState.VOID,
    EventKind.REJECTED: RevisionState.REJECTED,
    EventKind.WITHDRAWN: RevisionState.WITHDRAWN,
}


def revisions_from(events: Iterable[Event]) -> dict[str, tuple[Revision, ...]]:
    """Every document's revisions in the order of their numbers, from events in their order.

    Events of other kinds are passed over. Raises InputError for an event that can't follow on those before.
    """
    found: dict[str, list[Revision]] = {}
    owners: dict[str, str] = {}
    for event in events:
        if event.kind not in REVISION_KINDS:
            continue
        kind = EventKind(event.kind)
        revisions = found.setdefault(event.document, [])
        if kind is EventKind.RESERVED:
            if event.record_id in owners:
                raise contradiction(event.sequence, "it reserves a record id that was given out before")
            owners[event.record_id] = event.document
            revisions.append(_reserved(revisions, event))
            continue
        place = next((at for at, one in enumerate(revisions) if one.record_id == event.record_id), None)
        if place is None or revisions[place].machine != event.machine:
            raise contradiction(event.sequence, "it tells of a revision that wasn't reserved")
        revision = revisions[place]
        if revision.state is not FROM_STATE[kind]:
            raise contradiction(
                event.sequence, f"it is '{kind}', of a revision that is {revision.state.value}"
            )
        if kind is EventKind.ISSUED:
            revisions[:] = [_superseded(one, revision.number) for one in revisions]
        revisions[place] = _after(revision, kind, event)
    return {document: tuple(revisions) for document, revisions in found.items()}


def current(revisions: Sequence[Revision]) -> Revision | None:
    """The issued one of a document's revisions, if there is one."""
    return next((one for one in revisions if one.state is RevisionState.ISSUED), None)


def open_one(revisions: Sequence[Revision]) -> Revision | None:
    """The reserved one of a document's revisions, if there is one."""
    return next((one for one in revisions if one.state is RevisionState.RESERVED), None)


def _reserved(before: Sequence[Revision], event: Event) -> Revision:
    if open_one(before) is not None:
        raise contradiction(event.sequence, "it reserves a revision while another is open")
    if before and before[-1].machine != event.machine:
        raise contradiction(event.sequence, "its document belongs to another machine")
    number = event.facts.get("revision")
    if number is True or number != len(before) + 1:
        raise contradiction(event.sequence, f"it reserves revision {number} after {len(before)}")
    return Revision(
        document=event.document,
        machine=event.machine,
        number=len(before) + 1,
        record_id=event.record_id,
        state=RevisionState.RESERVED,
        reserved_by=event.who,
        reserved_at=event.when,
        reserved_sequence=event.sequence,
    )


def _superseded(revision: Revision, by: int) -> Revision:
    if revision.state is not RevisionState.ISSUED:
        return revision
    return replace(revision, state=RevisionState.SUPERSEDED, superseded_by=by)


def _after(revision: Revision, kind: EventKind, event: Event) -> Revision:
    if kind is EventKind.SIGNED:
        return replace(revision, signatures=(*revision.signatures, _signature(event)))
    if kind is EventKind.ISSUED:
        return replace(revision, state=RevisionState.ISSUED, issue=_issue(event))
    return replace(
        revision,
        state=_ENDS[kind],
        ended_by=event.who,
        ended_at=event.when,
        ended_sequence=event.sequence,
        reason=_text(event, event.facts, "reason"),
    )


def _signature(event: Event) -> Signature:
    facts = event.facts
    return Signature(
        meaning=_text(event, facts, "meaning"),
        name=event.who,
        file_digest=_text(event, facts, "file"),
        at=event.when,
        sequence=event.sequence,
    )


def _issue(event: Event) -> Issue:
    facts = event.facts
    engine, ink, signers = facts.get("engine"), facts.get("ink"), facts.get("signers")
    if not isinstance(engine, int) or not isinstance(ink, bool) or not isinstance(signers, list):
        raise contradiction(event.sequence, "its data aren't those of an issue")
    return Issue(
        content_digest=_text(event, facts, "content"),
        file_digest=_text(event, facts, "file"),
        machine_digest=_text(event, facts, "machine"),
        engine=engine,
        signers=tuple(_signer(event, one) for one in signers),
        ink=ink,
        kept=_kept(event, facts.get("kept")),
        by=event.who,
        at=event.when,
        sequence=event.sequence,
    )


def _kept(event: Event, data: object) -> Kept | None:
    if data is None:
        return None
    try:
        if isinstance(data, dict):
            return value_of(Kept, data)
    except ValueError as error:
        raise contradiction(event.sequence, f"what it keeps can't be read: {error}") from None
    raise contradiction(event.sequence, "what it keeps can't be read")


def _signer(event: Event, one: object) -> Signer:
    if not isinstance(one, dict):
        raise contradiction(event.sequence, "its data aren't those of an issue")
    return Signer(meaning=_text(event, one, "meaning"), name=_text(event, one, "name"))


def _text(event: Event, facts: Mapping[str, object], name: str) -> str:
    text = facts.get(name)
    if not isinstance(text, str):
        raise contradiction(event.sequence, f"its '{name}' isn't text")
    return text
