"""What is done to a revision, each an event: reserve, sign, commit, void, reject, withdraw.

A revision is named by its record id. Every act reads the document's revisions and writes within one turn, so
two programs never hold the same revision.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from datetime import datetime
from typing import Final

from sheets.crockford import in_crockford
from sheets.errors import Problem, RefusedError, quoted
from sheets.register.events import REVISION_KINDS, Entry, EventKind
from sheets.register.finding import found_in, revisions_in
from sheets.register.form import LONGEST_REASON, RECORD_ID, digest_text, name_text
from sheets.register.kept import Kept
from sheets.register.revisions import (
    FROM_STATE,
    Revision,
    RevisionState,
    Signer,
    current,
    open_one,
    revisions_from,
)
from sheets.register.saying import data_of
from sheets.register.store import Register, Writer

_ID_BYTES: Final = 7
_DRAWS: Final = 8
"""Of 2⁵⁰ ids none is met twice by chance; as often as this only from a source that isn't random."""
LEFT_OVER: Final = "reserved and not committed"

RandomBytes = Callable[[int], bytes]
"""Gives that many random bytes: from the operating system in a command, anything in a test."""


@dataclass(frozen=True, kw_only=True)
class Reservation:
    """A revision's number and record id, held until it is committed or ends otherwise."""

    document: str
    machine: str
    number: int
    record_id: str
    before: Revision | None
    """The current revision, which a commit will supersede."""
    voided: Revision | None
    """A reserved one that was still open, and is void now."""


def reserve(
    register: Register, *, document: str, machine: str, by: str, when: datetime, random_bytes: RandomBytes
) -> Reservation:
    """Reserves the next revision of a document; one that is still open becomes void.

    Raises RefusedError if the document belongs to another machine, and InputError for a text that can't stand
    in an event.
    """
    name_text("document number", document)
    name_text("machine tag", machine)
    with register.writing() as writer:
        revisions = revisions_in(writer, document)
        if revisions and revisions[-1].machine != machine:
            raise RefusedError(
                Problem(
                    where=f"document {quoted(document)}",
                    what=f"It is of machine {quoted(revisions[-1].machine)}, not of {quoted(machine)}.",
                    fix="Give each machine its own document number; after a new tag, too.",
                )
            )
        voided = open_one(revisions)
        if voided is not None:
            _append(writer, voided, EventKind.VOIDED, who=by, when=when, data={"reason": LEFT_OVER})
        record_id = _new_id(writer, random_bytes)
        writer.append(
            Entry(
                when=when,
                who=by,
                kind=EventKind.RESERVED,
                machine=machine,
                document=document,
                record_id=record_id,
                data={"revision": len(revisions) + 1},
            )
        )
    return Reservation(
        document=document,
        machine=machine,
        number=len(revisions) + 1,
        record_id=record_id,
        before=current(revisions),
        voided=voided,
    )


def sign_event(
    register: Register, record_id: str, *, who: str, meaning: str, file_digest: str, when: datetime
) -> Revision:
    """Records that a file was signed, so that the time can be judged when a certificate has expired.

    Raises RefusedError if the revision isn't open or was signed with this meaning before.
    """
    name_text("meaning of a signature", meaning)
    data = {"file": digest_text("digest of the signed file", file_digest), "meaning": meaning}
    with register.writing() as writer:
        revision = _open(writer, record_id, EventKind.SIGNED)
        if any(one.meaning == meaning for one in revision.signatures):
            raise _refused(
                revision, f"It carries a signature '{meaning}' already.", "Reject it and issue anew."
            )
        return _append(writer, revision, EventKind.SIGNED, who=who, when=when, data=data)


def commit(
    register: Register,
    record_id: str,
    *,
    content_digest: str,
    file_digest: str,
    machine_digest: str,
    engine: int,
    signers: Sequence[Signer],
    by: str,
    when: datetime,
    ink: bool = False,
    kept: Kept | None = None,
) -> Revision:
    """Makes a reserved revision the current one; the one before it is superseded.

    ``engine`` is the number of the engine that made the content. ``signers`` are those of the recorded
    signatures, in any order; for ``ink`` those who will sign on paper, and no signature is recorded.
    ``kept`` is what the pack was made from and what it says; without it no reading can be judged.

    Raises RefusedError if the revision isn't open, or signers and recorded signatures differ: then nothing is
    issued, and the file must not be left where it could be taken for issued.
    """
    for signer in signers:
        name_text("meaning of a signature", signer.meaning)
        name_text("name of a signer", signer.name)
    data = {
        "content": digest_text("digest of the content", content_digest),
        "engine": engine,
        "file": digest_text("digest of the file", file_digest),
        "ink": ink,
        "machine": digest_text("digest of the machine file", machine_digest),
        "signers": [{"meaning": one.meaning, "name": one.name} for one in signers],
        **({} if kept is None else {"kept": data_of(kept)}),
    }
    with register.writing() as writer:
        revision = _open(writer, record_id, EventKind.ISSUED)
        recorded = sorted((one.meaning, one.name) for one in revision.signatures)
        if recorded != ([] if ink else sorted((one.meaning, one.name) for one in signers)):
            raise _refused(
                revision,
                "The signers aren't those whose signatures were recorded.",
                "Record each signature, or reject the revision and issue anew.",
            )
        if not signers:
            raise _refused(
                revision, "Nobody stands behind it.", "Name who prepared, checked and approved it."
            )
        return _append(writer, revision, EventKind.ISSUED, who=by, when=when, data=data)


def void(register: Register, record_id: str, *, reason: str, by: str, when: datetime) -> Revision:
    """Ends a reserved revision that can't be finished. Raises RefusedError if it isn't open."""
    return _end(register, record_id, EventKind.VOIDED, reason=reason, by=by, when=when)


def reject(register: Register, record_id: str, *, reason: str, by: str, when: datetime) -> Revision:
    """Ends a reserved revision that somebody won't sign. Raises RefusedError if it isn't open."""
    return _end(register, record_id, EventKind.REJECTED, reason=reason, by=by, when=when)


def withdraw(register: Register, record_id: str, *, reason: str, by: str, when: datetime) -> Revision:
    """Takes back the current revision; none is current then. Raises RefusedError if it isn't that."""
    return _end(register, record_id, EventKind.WITHDRAWN, reason=reason, by=by, when=when)


def void_left_over(
    register: Register, *, reserved_before: datetime, by: str, when: datetime
) -> tuple[Revision, ...]:
    """Makes void every revision still open without a signature that was reserved before a time.

    The time spares those that another program is at work on; a signed one waits for its next signer and
    can be rejected.
    """
    with register.writing() as writer:
        derived = revisions_from(list(writer.events(kinds=REVISION_KINDS)))
        left = [
            revision
            for revisions in derived.values()
            if (revision := open_one(revisions)) is not None
            and not revision.signatures
            and revision.reserved_at < reserved_before
        ]
        return tuple(
            _append(writer, one, EventKind.VOIDED, who=by, when=when, data={"reason": LEFT_OVER})
            for one in left
        )


def _open(writer: Writer, record_id: str, kind: EventKind) -> Revision:
    """The revision, if such an event may follow. Raises RefusedError if not."""
    revision = found_in(writer, record_id)
    if revision.state is not FROM_STATE[kind]:
        since = (
            f" since {revision.ended_at:%Y-%m-%d} ({quoted(revision.reason)})" if revision.ended_at else ""
        )
        raise _refused(
            revision,
            f"It is {revision.state.value}{since}, so it can't be {kind.value}.",
            "Issue a new revision."
            if revision.state is not RevisionState.RESERVED
            else "Commit it first, or reject it.",
        )
    return revision


def _refused(revision: Revision, what: str, fix: str) -> RefusedError:
    where = f"revision {revision.number} of document {quoted(revision.document)}"
    return RefusedError(Problem(where=where, what=what, fix=fix))


def _end(
    register: Register, record_id: str, kind: EventKind, *, reason: str, by: str, when: datetime
) -> Revision:
    name_text("reason", reason, longest=LONGEST_REASON)
    with register.writing() as writer:
        revision = _open(writer, record_id, kind)
        return _append(writer, revision, kind, who=by, when=when, data={"reason": reason})


def _append(
    writer: Writer,
    revision: Revision,
    kind: EventKind,
    *,
    who: str,
    when: datetime,
    data: Mapping[str, object],
) -> Revision:
    """Writes an event of a revision, and gives the revision as it follows from all events then."""
    writer.append(
        Entry(
            when=when,
            who=who,
            kind=kind,
            machine=revision.machine,
            document=revision.document,
            record_id=revision.record_id,
            data=data,
        )
    )
    return revisions_in(writer, revision.document)[revision.number - 1]


def _new_id(writer: Writer, random_bytes: RandomBytes) -> str:
    for _ in range(_DRAWS):
        record_id = in_crockford(random_bytes(_ID_BYTES), RECORD_ID)
        if next(writer.events(record_id=record_id), None) is None:
            return record_id
    raise ValueError("the random bytes that were handed in repeat themselves")
