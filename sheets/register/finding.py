"""Which revisions a document has, and which one a record id names."""

from __future__ import annotations

from sheets.crockford import as_printed, is_crockford
from sheets.errors import InputError, Problem, quoted
from sheets.register.events import REVISION_KINDS, EventKind, contradiction
from sheets.register.form import RECORD_ID
from sheets.register.revisions import Revision, revisions_from
from sheets.register.store import Register, View


def document_revisions(register: Register, document: str) -> tuple[Revision, ...]:
    """All revisions of a document in their order; none for a document that isn't known."""
    with register.reading() as view:
        return revisions_in(view, document)


def revision_of(register: Register, record_id: str) -> Revision:
    """The revision that a record id names, as printed or as typed. Raises InputError if it names none."""
    with register.reading() as view:
        return found_in(view, record_id)


def revisions_in(view: View, document: str) -> tuple[Revision, ...]:
    """All revisions of a document within a view that is open already."""
    events = view.events(document=document, kinds=REVISION_KINDS)
    return revisions_from(events).get(document, ())


def revision_in(view: View, record_id: str) -> Revision | None:
    """The revision that a record id names, within a view that is open already."""
    if not is_crockford(record_id, RECORD_ID):
        return None
    reserved = list(view.events(record_id=record_id, kinds={EventKind.RESERVED}))
    if not reserved:
        return None
    if len(reserved) > 1:
        raise contradiction(reserved[1].sequence, "it reserves a record id that was given out before")
    return next(one for one in revisions_in(view, reserved[0].document) if one.record_id == record_id)


def found_in(view: View, record_id: str) -> Revision:
    """The same of a record id as printed or as typed. Raises InputError if it names no revision."""
    revision = revision_in(view, as_printed(record_id))
    if revision is None:
        raise InputError(
            Problem(
                where=f"record {quoted(record_id)}",
                what="The register doesn't know this record id.",
                fix="Read it off the paper again, and see that it is the register of that plant.",
            )
        )
    return revision
