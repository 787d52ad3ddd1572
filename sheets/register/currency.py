"""Whether a paper is the current one: what the register says of a record id or a digest."""

from __future__ import annotations

from dataclasses import dataclass
from enum import Enum

from sheets.crockford import as_printed
from sheets.errors import InputError
from sheets.register.chain import Anchor, ChainVerdict, chain_in
from sheets.register.events import EventKind
from sheets.register.finding import revision_in, revisions_in
from sheets.register.form import is_digest
from sheets.register.revisions import Revision, RevisionState, current
from sheets.register.store import Register, View


class Standing(Enum):
    """What the register says. Only the first is good."""

    CURRENT = "current"
    SUPERSEDED = "superseded"
    WITHDRAWN = "withdrawn"
    VOID = "void"
    REJECTED = "rejected"
    NOT_ISSUED = "reserved and not issued"
    UNKNOWN = "unknown to this register"
    NOT_ESTABLISHED = "not established"
    """The register is broken, so nothing that it says counts."""


@dataclass(frozen=True, kw_only=True)
class Currency:
    """The answer, with all that it rests on."""

    standing: Standing
    revision: Revision | None = None
    """The one asked for. Of a digest that several revisions share, the newest."""
    current: Revision | None = None
    """The current one of the same document: what superseded it, or itself."""
    alike: tuple[Revision, ...] = ()
    """Other revisions with the same content digest."""
    chain: ChainVerdict
    trouble: str = ""
    """What the register contradicts itself in, if its chain holds and it does."""


_STANDINGS = {
    RevisionState.ISSUED: Standing.CURRENT,
    RevisionState.SUPERSEDED: Standing.SUPERSEDED,
    RevisionState.WITHDRAWN: Standing.WITHDRAWN,
    RevisionState.VOID: Standing.VOID,
    RevisionState.REJECTED: Standing.REJECTED,
    RevisionState.RESERVED: Standing.NOT_ISSUED,
}


def currency_of(register: Register, key: str, *anchors: Anchor) -> Currency:
    """What the register says of a record id, or of the content or file digest of an issued pack.

    The whole chain is checked first, since an event that was taken out could have been the one that
    superseded the paper. Key as printed or as typed; one that can't be a record id or digest is unknown.
    """
    with register.reading() as view:
        return currency_in(view, chain_in(view, anchors), key)


def currency_in(view: View, chain: ChainVerdict, key: str) -> Currency:
    """The same within a view that is open already, whose whole chain was judged; ``key`` as there."""
    if not chain.holds:
        return Currency(standing=Standing.NOT_ESTABLISHED, chain=chain)
    try:
        found = _matching(view, key)
        if not found:
            return Currency(standing=Standing.UNKNOWN, chain=chain)
        newest = found[-1]
        return Currency(
            standing=_STANDINGS[newest.state],
            revision=newest,
            current=current(revisions_in(view, newest.document)),
            alike=tuple(found[:-1]),
            chain=chain,
        )
    except InputError as error:
        return Currency(standing=Standing.NOT_ESTABLISHED, chain=chain, trouble=str(error))


def _matching(view: View, key: str) -> list[Revision]:
    """Revisions of that record id or digest, oldest first."""
    printed = as_printed(key)
    by_id = revision_in(view, printed)
    if by_id is not None:
        return [by_id]
    found: dict[int, str] = {}
    for digest in (printed, key.strip().lower()):
        if is_digest(digest):
            for event in view.events(kinds={EventKind.ISSUED}, saying=digest):
                if digest in (event.facts.get("content"), event.facts.get("file")):
                    found[event.sequence] = event.record_id
    revisions = (revision_in(view, found[sequence]) for sequence in sorted(found))
    return [one for one in revisions if one is not None]
