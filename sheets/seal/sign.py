"""Signing: fills one of the three fields of a pack, as an update behind the bytes that are there.

The form is PAdES B-B (B-T with a time server): ETSI.CAdES.detached in a field that stands empty, the first
signature certifying that later ones may fill forms and sign, and nothing else (ISO 32000-1, 12.8.2.2).
Nothing that stood before is written anew; the version of the file stays.

Import this module where something is signed and not before: the library costs half a second.
"""

from __future__ import annotations

import asyncio
import hashlib
import io
from collections.abc import Mapping
from dataclasses import dataclass
from datetime import datetime
from typing import Any, Final

from asn1crypto import algos  # type: ignore[import-untyped]  # the package ships no types
from asn1crypto import x509 as asn1_x509
from cryptography import x509
from cryptography.hazmat.primitives import hashes
from cryptography.hazmat.primitives.asymmetric import ec, padding
from cryptography.hazmat.primitives.serialization import Encoding
from pyhanko.pdf_utils import generic
from pyhanko.pdf_utils.incremental_writer import IncrementalPdfFileWriter
from pyhanko.pdf_utils.reader import PdfFileReader
from pyhanko.sign.fields import MDPPerm, SigSeedSubFilter, enumerate_sig_fields
from pyhanko.sign.signers.cms_embedder import PdfCMSEmbedder, SigIOSetup, SigMDPSetup, SigObjSetup
from pyhanko.sign.signers.pdf_byterange import SignatureObject
from pyhanko.sign.signers.pdf_cms import Signer as CmsSigner
from pyhanko.sign.timestamps import HTTPTimeStamper
from pyhanko.sign.timestamps.common_utils import TimestampRequestError

from sheets.errors import InputError, NotEstablishedError, Problem, RefusedError, quoted
from sheets.seal.keys import OpenKey, common_name, open_key
from sheets.seal.signatures import held_container, held_signatures
from sheets.seal.signatures_bytes import signed_ranges
from sheets.seal.signatures_people import Person, check_needed, clash, person_of
from sheets.seal.signatures_report import ROLES, Flaw
from sheets.seal.signatures_revisions import UNREADABLE

DIGEST: Final = "sha256"
ROOM_BYTES: Final = 1200
"""Kept in the container beside the certificate and the names: attributes, heads, a signature of 512 bytes."""
ROOM_FOR_TIME_BYTES: Final = 12_000
"""Kept for a time token with its certificates."""


class _CachedSigner(CmsSigner):
    """Signs with a key that is already open; only the signer's own certificate goes into the container."""

    def __init__(self, key: OpenKey) -> None:
        self._private = key.private
        der = key.certificate.public_bytes(Encoding.DER)
        scheme = "sha256_ecdsa" if isinstance(key.private, ec.EllipticCurvePrivateKey) else "sha256_rsa"
        super().__init__(
            signing_cert=asn1_x509.Certificate.load(der),
            signature_mechanism=algos.SignedDigestAlgorithm({"algorithm": scheme}),
        )

    async def async_sign_raw(self, data: bytes, digest_algorithm: str, dry_run: bool = False) -> bytes:
        if digest_algorithm != DIGEST or dry_run:
            raise ValueError("signs SHA-256 digests, and in earnest")
        if isinstance(self._private, ec.EllipticCurvePrivateKey):
            return self._private.sign(data, ec.ECDSA(hashes.SHA256()))
        return self._private.sign(data, padding.PKCS1v15(), hashes.SHA256())


class _Update(IncrementalPdfFileWriter):
    """An update that holds the signature and nothing else: no new dates, no chance.

    The library would write the time of its own clock into the metadata and chance into the identifier.
    """

    def _update_meta(self) -> None:
        """Metadata stay as they were signed first."""

    @classmethod
    def _handle_id(cls, prev: PdfFileReader) -> generic.ArrayObject:
        """First half as it was, second from the bytes that are updated. Source: ISO 32000-1, 14.4."""
        prev.stream.seek(0)
        second = hashlib.sha256(prev.stream.read()).digest()[:16]
        first = prev.document_id[0] if "/ID" in prev.trailer else second
        return generic.ArrayObject([generic.ByteStringObject(first), generic.ByteStringObject(second)])


@dataclass(frozen=True, kw_only=True)
class Signer:
    """Somebody who signs, with the key open."""

    person: Person
    certificate: x509.Certificate
    cms: _CachedSigner


@dataclass(frozen=True, kw_only=True)
class SigningField:
    """One field of a file: its size for the stamp, and who signed it."""

    width: float
    """Points."""
    height: float
    """Points."""
    signed: bool


def open_signer(p12: bytes, passphrase: str, *, where: str = "key file", when: datetime) -> Signer:
    """Unlock a signer's key file.

    Raises InputError if it can't be; RefusedError if its certificate doesn't hold at `when`.
    """
    key = open_key(p12, passphrase, where=where)
    certificate = key.certificate
    if not certificate.not_valid_before_utc <= when <= certificate.not_valid_after_utc:
        raise RefusedError(
            Problem(
                where=where,
                what=f"the certificate of {quoted(common_name(certificate))} holds from "
                f"{certificate.not_valid_before_utc.date()} to {certificate.not_valid_after_utc.date()}",
                fix="Make a new key for the person.",
            )
        )
    return Signer(person=person_of(certificate), certificate=certificate, cms=_CachedSigner(key))


def signing_fields(pdf: bytes) -> Mapping[str, SigningField]:
    """The signature fields of a file by name. Raises InputError for a file that can't be read."""
    return _fields(_reader(pdf))


def _reader(pdf: bytes) -> PdfFileReader:
    try:
        return PdfFileReader(io.BytesIO(pdf))
    except UNREADABLE as error:
        raise _unreadable() from error


def _fields(reader: PdfFileReader) -> Mapping[str, SigningField]:
    fields = {}
    try:
        for name, value, reference in enumerate_sig_fields(reader):
            left, bottom, right, top = (float(edge) for edge in reference.get_object()["/Rect"])
            fields[name] = SigningField(
                width=abs(right - left), height=abs(top - bottom), signed=value is not None
            )
    except UNREADABLE as error:
        raise _unreadable() from error
    return fields


def _unreadable() -> InputError:
    return InputError(
        Problem(
            where="file to sign",
            what="it can't be read as a PDF with fields for signatures",
            fix="Give the pack as it was written.",
        )
    )


def sign_field(
    pdf: bytes,
    *,
    field: str,
    signer: Signer,
    when: datetime,
    stamp: bytes,
    needed: tuple[str, ...] = ROLES,
    time_server: str | None = None,
) -> bytes:
    """The file with one field more signed.

    `field` is what the signature means: prepared, checked or approved. `when` is the signer's own clock with
    its zone, as the stamp shows it; `stamp` is a page of the size of the field. `needed` are the signatures
    that the works asks for. `time_server` is the address of a server after RFC 3161, asked over the network.

    Raises RefusedError for who mustn't sign this, or a file whose signatures don't hold; InputError for a
    field that isn't there; NotEstablishedError if the time server gives no time.
    """
    check_needed(needed)
    if when.tzinfo is None:
        raise ValueError("the time of a signature needs its zone")
    reader = _reader(pdf)
    _check_turn(pdf, reader, field, signer.person, needed, when)
    writer = _Update(reader.stream, prev=reader)
    first = not signed_ranges(pdf)

    embedder = PdfCMSEmbedder().write_cms(field_name=field, writer=writer, existing_fields_only=True)
    widget = next(embedder).get_object()
    page = PdfFileReader(io.BytesIO(stamp))
    appearance = writer.import_page_as_xobject(page)
    widget["/AP"] = generic.DictionaryObject({generic.pdf_name("/N"): appearance})  # type: ignore[no-untyped-call]  # untyped in the library
    placeholder = SignatureObject(
        subfilter=SigSeedSubFilter.PADES,
        timestamp=when,
        name=signer.person.name,
        reason=field,
        bytes_reserved=_reserved(signer, timed=time_server is not None),
    )
    certify = SigMDPSetup(md_algorithm=DIGEST, certify=True, docmdp_perms=MDPPerm.FILL_FORMS)
    embedder.send(SigObjSetup(sig_placeholder=placeholder, mdp_setup=certify if first else None))
    prepared, output = embedder.send(SigIOSetup(md_algorithm=DIGEST))
    embedder.send(_container(signer.cms, prepared.document_digest, time_server))
    signed = bytes(output.getvalue())
    _check_made(signed, field)
    return signed


def _check_made(signed: bytes, field: str) -> None:
    """What was just written is read again: a time token, for one, comes from elsewhere."""
    try:
        held_container(signed, signed_ranges(signed)[-1])
    except Flaw as flaw:
        raise NotEstablishedError(
            Problem(
                where=f"signature as {field}",
                what=f"it couldn't be judged later: {flaw.reason.says}",
                fix="Sign with a key that `jamnut keys` made; take another time server, or none.",
            )
        ) from flaw


def _container(signer: _CachedSigner, digest: bytes, time_server: str | None) -> Any:
    timestamper = None if time_server is None else HTTPTimeStamper(time_server)
    try:
        return asyncio.run(signer.async_sign(digest, DIGEST, use_pades=True, timestamper=timestamper))
    except TimestampRequestError as error:
        raise NotEstablishedError(
            Problem(
                where=f"time server {quoted(str(time_server))}",
                what="it gave no time",
                fix="Look whether it can be reached, or sign without a time server.",
            )
        ) from error


def _reserved(signer: Signer, *, timed: bool) -> int:
    """Hexadecimal digits kept for the container."""
    certificate = signer.certificate
    inside = len(certificate.public_bytes(Encoding.DER)) + len(certificate.issuer.public_bytes()) + ROOM_BYTES
    return 2 * (inside + (ROOM_FOR_TIME_BYTES if timed else 0))


def _check_turn(
    pdf: bytes, reader: PdfFileReader, field: str, person: Person, needed: tuple[str, ...], when: datetime
) -> None:
    """Whether this person may sign this field now. Raises RefusedError or InputError."""
    try:
        held = held_signatures(pdf, searching=False)
    except Flaw as flaw:
        raise _refused(
            field, flaw.reason.says, "Sign the pack as it was written by the last signer."
        ) from flaw
    given = [one.field.name for one in held]
    fields = _fields(reader)
    if field not in fields or field not in ROLES:
        raise InputError(
            Problem(
                where="file to sign",
                what=f"it has no field {quoted(field)} for a signature",
                fix="Sign a pack that was issued for signatures; its fields are "
                f"{', '.join(role for role in ROLES if role in fields) or 'none'}.",
            )
        )
    flaws = [one.field.flaw.reason.says for one in held if one.field.flaw is not None]
    if flaws:
        raise _refused(field, flaws[0], "Issue the pack anew; this one was changed.")
    same = clash(field, person, ((one.field.name, one.person) for one in held))
    if same:
        raise _refused(field, same, "Another person signs.")
    awaited = [role for role in needed[: needed.index(field)] if role not in given] if field in needed else []
    if awaited:
        raise _refused(field, f"it isn't signed as {awaited[0]} yet", f"Sign as {awaited[0]} first.")
    if any(ROLES.index(role) >= ROLES.index(field) for role in given):
        raise _refused(field, f"it is signed as {given[-1]} already", "Issue a new revision.")
    if held and when < held[-1].field.claimed:
        what = f"it was signed as {given[-1]} on {held[-1].field.claimed.isoformat()}, which is later"
        raise _refused(field, what, "Set the clock of this computer.")


def _refused(field: str, what: str, fix: str) -> RefusedError:
    return RefusedError(Problem(where=f"signature as {field}", what=what, fix=fix))
