"""Which revisions a document has, and which one a record id names."""

from __future__ import annotations

from sheets.crockford import as_printed, is_crockford
from sheets.errors import InputError, Problem, nearest, quoted
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


def documents_in(view: View) -> dict[str, tuple[Revision, ...]]:
    """Every document with its revisions, by number."""
    found = revisions_from(view.events(kinds=REVISION_KINDS))
    return {document: found[document] for document in sorted(found)}


def document_of(view: View, given: str) -> tuple[Revision, ...]:
    """The revisions of a document: by its number, by a record id, or by the tag of its machine.

    Raises InputError if nothing is known of it, and for a machine with several documents.
    """
    if revisions := revisions_in(view, given):
        return revisions
    if (one := revision_in(view, as_printed(given))) is not None:
        return revisions_in(view, one.document)
    known = documents_in(view)
    of_machine = [document for document, found in known.items() if found[0].machine == given]
    if len(of_machine) == 1:
        return known[of_machine[0]]
    close = nearest(given, (*known, *(found[0].machine for found in known.values())))
    raise InputError(
        Problem(
            where=f"document {quoted(given)}",
            what=f"This machine has {len(of_machine)}: {', '.join(of_machine)}."
            if of_machine
            else "The register knows no document, record or machine of that name.",
            fix="Name one of them."
            if of_machine
            else f"Did you mean {quoted(close)}?"
            if close
            else "Write it as it stands on the sheets.",
        )
    )


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
