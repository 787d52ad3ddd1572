"""What stands in a signed file and what each later signature added: its own field and nothing else.

Every signature covers the file as it was when it was given, so that state can be read again as a file of its
own. Two states that follow one another are compared object by object, by the table of contents that the later
one appended. Source: ISO 32000-1, 7.5.6 (updates) and 12.8 (signatures).
"""

from __future__ import annotations

import io
import re
import zlib
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from datetime import datetime, timedelta, timezone
from typing import Any, Final

from pyhanko.pdf_utils import generic
from pyhanko.pdf_utils.misc import PdfError
from pyhanko.pdf_utils.reader import PdfFileReader
from pyhanko.pdf_utils.xref import ObjStreamRef
from pyhanko.sign.fields import enumerate_sig_fields

from sheets.seal.signatures_bytes import SignedRange
from sheets.seal.signatures_report import ROLES, Cause, Flaw, Judgement

UNREADABLE: Final = (
    PdfError,
    ValueError,
    TypeError,
    KeyError,
    IndexError,
    AttributeError,
    AssertionError,
    OverflowError,
    RecursionError,
    zlib.error,
)
"""What the library raises over a file that was made to be hard to read."""

_DATE: Final = re.compile(r"D:(\d{4})(\d\d)(\d\d)(\d\d)(\d\d)(\d\d)(?:Z|([+-])(\d\d)'(\d\d)'?)")
_SIGNATURE_KEYS: Final = {
    "/Type",
    "/Filter",
    "/SubFilter",
    "/Contents",
    "/ByteRange",
    "/M",
    "/Name",
    "/Reason",
}
_FORM_FILLING: Final = 2
"""Later signatures may fill forms and sign. Source: ISO 32000-1, table 254."""

Shape = Mapping[str, bytes]


@dataclass(frozen=True, kw_only=True)
class FilledField:
    """One signed field as the file holds it."""

    name: str
    claimed: datetime
    person: str
    """As the file says; the certificate must say the same."""
    flaw: Flaw | None
    """Why the update that brought it isn't one that brings a signature alone."""


def filled_fields(
    pdf: bytes, ranges: tuple[SignedRange, ...], *, searching: bool = True
) -> tuple[FilledField, ...]:
    """The signed fields in the order of `ranges`, each judged by what its update changed.

    `searching`: also look through the whole file for objects that are asked for and not there, the dearest
    of the questions.
    Raises Flaw where the file can't be read, or isn't a pack with these signatures and no others.
    """
    try:
        states = [PdfFileReader(io.BytesIO(pdf[: one.end])) for one in ranges]
        return tuple(_fields(states, ranges, pdf, searching))
    except UNREADABLE as error:
        raise Flaw(Cause.UNREADABLE, "The file can't be read as a PDF.") from error


def _fields(
    states: list[PdfFileReader], ranges: tuple[SignedRange, ...], pdf: bytes, searching: bool
) -> Iterator[FilledField]:
    known: set[str] = set()
    referenced = _referenced(states[0]) if searching and len(states) > 1 else set()
    for index, (state, signed) in enumerate(zip(states, ranges, strict=True)):
        if state.encrypted:
            raise Flaw(Cause.FORM, "The file is encrypted.", Judgement.NOT_ESTABLISHED)
        filled = {
            name: (reference.reference, value.get_object())
            for name, value, reference in enumerate_sig_fields(state, filled_status=True)
        }
        fresh = filled.keys() - known
        if len(fresh) != 1 or not known <= filled.keys() or len(filled) != index + 1:
            raise Flaw(Cause.FORM, "The signatures in the file aren't those of its fields, one an update.")
        (name,) = fresh
        known.add(name)
        reference, signature = filled[name]
        flaw = None
        try:
            claimed, person = _check_dictionary(state, name, signature, signed, pdf, first=index == 0)
            if index:
                referenced |= _check_update(states[index - 1], state, reference, referenced)
        except Flaw as found:
            if found.reason.cause is not Cause.REVISION:
                raise
            flaw = found
        yield FilledField(name=name, claimed=claimed, person=person, flaw=flaw)


def _check_dictionary(
    state: PdfFileReader,
    name: str,
    signature: generic.DictionaryObject,
    signed: SignedRange,
    pdf: bytes,
    *,
    first: bool,
) -> tuple[datetime, str]:
    """The signature's own entries: when it claims to have been given, and by whom. Raises Flaw."""
    if name not in ROLES:
        raise _not_a_pack(f"The field {name!r} isn't one of {', '.join(ROLES)}.")
    if signature.keys() != (_SIGNATURE_KEYS | ({"/Reference"} if first else set())):
        raise _not_a_pack(f"The signature {name} holds other entries than a pack's.")
    spans = [0, signed.gap_start, signed.gap_end, signed.end - signed.gap_end]
    gap = bytes.fromhex(pdf[signed.gap_start + 1 : signed.gap_end - 1].decode("ascii"))
    if list(signature["/ByteRange"]) != spans or _bytes(signature["/Contents"]) != gap:
        raise Flaw(Cause.COVERAGE, f"The signature {name} covers other bytes than it says.")
    if (signature["/Type"], signature["/SubFilter"]) != ("/Sig", "/ETSI.CAdES.detached"):
        raise _not_a_pack(f"The signature {name} is of another form.")
    if signature["/Reason"] != name:
        raise Flaw(Cause.FORM, f"The signature {name} says that it means {str(signature['/Reason'])!r}.")
    if first and not (
        _permission(signature) == _FORM_FILLING
        and set(state.root["/Perms"]) == {"/DocMDP"}
        and state.root["/Perms"]["/DocMDP"] is signature
    ):
        raise _not_a_pack("The first signature doesn't say what may be added later.")
    claimed = _date(str(signature["/M"]))
    return claimed, str(signature["/Name"])


def _permission(signature: generic.DictionaryObject) -> int:
    (entry,) = signature["/Reference"]
    if entry["/TransformMethod"] != "/DocMDP":
        return 0
    return int(entry["/TransformParams"]["/P"])


def _check_update(
    older: PdfFileReader,
    newer: PdfFileReader,
    field: generic.Reference,
    referenced: set[tuple[int, int]],
) -> set[tuple[int, int]]:
    """What an update brought is the next signature and no more; gives what its objects refer to. Raises Flaw.

    `referenced` is what any earlier object refers to: an object that was asked for before it was there
    could show what nobody saw when signing.
    """
    if newer.total_revisions != older.total_revisions + 1 or newer.trailer["/Prev"] != older.last_startxref:
        raise _changed("it isn't one update of the state before")
    last = newer.total_revisions - 1
    if newer.xrefs.refs_freed_in_revision(last):
        raise _changed("it takes objects away")
    for key in ("/Root", "/Info"):
        if _raw(newer.trailer, key) != _raw(older.trailer, key):
            raise _changed(f"it replaces {key} of the file")
    if newer.document_id[0] != older.document_id[0]:
        raise _changed("it claims to be another file")
    size = int(older.trailer["/Size"])
    found: set[tuple[int, int]] = set()
    fresh: set[tuple[int, int]] = set()
    for reference in newer.xrefs.explicit_refs_in_revision(last):
        number = (reference.idnum, reference.generation)
        after = _object(newer, reference)
        found |= set(_references(after))
        if reference.idnum >= size:
            if number in referenced:
                raise _changed(f"it gives object {reference.idnum}, which was asked for before it was there")
            if isinstance(after, generic.StreamObject) and after.get("/Type") == "/ObjStm":
                raise _changed("it packs objects")
            if reference not in newer.xrefs.xref_stream_refs:
                fresh.add(number)
            continue
        _check_changed(older, after, reference, field)
    if not fresh <= _reached(newer, field):
        raise _changed("it adds objects that don't belong to the signature")
    return found


def _reached(state: PdfFileReader, field: generic.Reference) -> set[tuple[int, int]]:
    """All objects that a field's signature and appearance refer to, near or far."""
    widget = _object(state, field)
    waiting = [item for key in ("/V", "/AP") for item in _references(widget.raw_get(key))]
    found: set[tuple[int, int]] = set()
    while waiting:
        number = waiting.pop()
        if number not in found:
            found.add(number)
            waiting.extend(_references(_object(state, generic.Reference(*number, state))))
    return found


def _check_changed(
    older: PdfFileReader, after: Any, reference: generic.Reference, field: generic.Reference
) -> None:
    """An object of the state before may change by what a signature needs, and by no more. Raises Flaw."""
    before = _object(older, reference)
    form = older.root.raw_get("/AcroForm")
    if reference.idnum == field.idnum:
        free, must_be_new = {"/V", "/AP"}, "/V"
    elif isinstance(form, generic.IndirectObject) and reference.idnum == form.idnum:
        free, must_be_new = {"/SigFlags"}, ""
    else:
        raise _changed(f"it changes object {reference.idnum}")
    plain = isinstance(before, generic.DictionaryObject) and not isinstance(before, generic.StreamObject)
    if not plain or type(before) is not type(after):
        raise _changed(f"it changes the kind of object {reference.idnum}")
    if _shape(before, without=free) != _shape(after, without=free) or must_be_new in before:
        raise _changed(f"it changes object {reference.idnum} by more than a signature")


def _referenced(state: PdfFileReader) -> set[tuple[int, int]]:
    """All objects that any object of a state refers to, whether they are there or not."""
    found: set[tuple[int, int]] = set()
    streams: set[int] = set()
    for revision in range(state.total_revisions):
        for reference in state.xrefs.explicit_refs_in_revision(revision):
            place = state.xrefs[reference]
            if isinstance(place, ObjStreamRef):
                streams.add(place.obj_stream_id)
            else:
                found |= set(_references(_object(state, reference)))
    for number in streams:
        for packed in _packed(state, generic.Reference(number, 0, state)):
            found |= set(_references(packed))
    return found


def _packed(state: PdfFileReader, reference: generic.Reference) -> Iterator[generic.PdfObject]:
    """All objects of an object stream in one pass; the library unpacks the stream for each anew.

    Source: ISO 32000-1, 7.5.7.
    """
    stream = _object(state, reference)
    data, first = stream.data, int(stream["/First"])
    for offset in data[:first].split()[1 : 2 * int(stream["/N"]) : 2]:
        yield generic.read_object(io.BytesIO(data[first + int(offset) :]), reference)


def _references(value: generic.PdfObject) -> Iterator[tuple[int, int]]:
    waiting = [value]
    while waiting:
        one = waiting.pop()
        if isinstance(one, generic.IndirectObject):
            yield (one.idnum, one.generation)
        elif isinstance(one, generic.DictionaryObject):
            waiting.extend(one.values())
        elif isinstance(one, generic.ArrayObject):
            waiting.extend(list.__iter__(one))


def _object(state: PdfFileReader, reference: generic.Reference) -> Any:
    """An object as it was in a state, whatever state the reference was met in."""
    return state.get_object(reference)  # type: ignore[no-untyped-call]  # untyped in the library


def _shape(value: generic.DictionaryObject, *, without: set[str]) -> Shape:
    return {str(key): _written(item) for key, item in dict.items(value) if key not in without}


def _written(value: generic.PdfObject) -> bytes:
    buffer = io.BytesIO()
    value.write_to_stream(buffer, None)
    return buffer.getvalue()


def _raw(trailer: Any, key: str) -> bytes:
    return _written(trailer.raw_get(key)) if key in trailer else b""


def _bytes(value: Any) -> bytes:
    return bytes(value.original_bytes if isinstance(value, generic.TextStringObject) else value)


def _date(text: str) -> datetime:
    """A date of a PDF with its zone. Source: ISO 32000-1, 7.9.4."""
    match = _DATE.fullmatch(text)
    if match is None:
        raise _not_a_pack("A signature gives no date and time with zone.")
    year, month, day, hour, minute, second = (int(part) for part in match.groups()[:6])
    sign, hours, minutes = match.groups()[6:]
    offset = timedelta(hours=int(hours or 0), minutes=int(minutes or 0)) * (-1 if sign == "-" else 1)
    return datetime(year, month, day, hour, minute, second, tzinfo=timezone(offset))


def _changed(how: str) -> Flaw:
    return Flaw(Cause.REVISION, f"The update with this signature brought more than it: {how}.")


def _not_a_pack(says: str) -> Flaw:
    return Flaw(Cause.FORM, says, Judgement.NOT_ESTABLISHED)
