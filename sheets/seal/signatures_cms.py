"""The container of a signature: read, built anew and compared, then held against its certificate.

Most of a container is not covered by the signature in it: version, lists of algorithms, further certificates.
So it is accepted only if it is the very container that would be written from what was read.
Sources: RFC 5652 (container), RFC 5035 (signing certificate), RFC 6211 (algorithm protection),
ETSI EN 319 142-1 (what a signature in a PDF holds).
"""

from __future__ import annotations

import hashlib
from dataclasses import dataclass
from itertools import product
from typing import Any, Final, Literal

from asn1crypto import cms  # type: ignore[import-untyped]  # the package ships no types
from cryptography import x509
from cryptography.exceptions import InvalidSignature, UnsupportedAlgorithm
from cryptography.hazmat.primitives import hashes
from cryptography.hazmat.primitives.asymmetric import ec, padding, rsa
from cryptography.hazmat.primitives.serialization import Encoding

from sheets.seal.signatures_der import (
    INTEGER_1,
    INTEGER_3,
    NULL,
    OCTETS,
    SEQUENCE,
    SET,
    TAGGED_0,
    TAGGED_1,
    oid,
    tlv,
)
from sheets.seal.signatures_report import Cause, Flaw, Judgement

Held = Literal["data", "tst_info"]
"""What a container is about: bytes outside of it, or a time that it holds."""

_HASHES: Final[dict[str, hashes.HashAlgorithm]] = {
    "sha256": hashes.SHA256(),
    "sha384": hashes.SHA384(),
    "sha512": hashes.SHA512(),
}
_DIGEST_OIDS: Final = {f"sha{bits}": f"2.16.840.1.101.3.4.2.{n}" for n, bits in enumerate((256, 384, 512), 1)}
_DIGESTS: Final = {
    tlv(SEQUENCE, oid(dotted), end): name
    for (name, dotted), end in product(_DIGEST_OIDS.items(), (b"", NULL))
}
"""Digest algorithms allowed, by their bytes. Source: RFC 5754, 2: parameters absent, NULL accepted."""
_SCHEMES: Final = {
    **{tlv(SEQUENCE, oid(f"1.2.840.10045.4.3.{n}")): ("ec", name) for n, name in enumerate(_HASHES, 2)},
    **{
        tlv(SEQUENCE, oid(f"1.2.840.113549.1.1.{n}"), NULL): ("rsa", name)
        for n, name in enumerate(_HASHES, 11)
    },
    tlv(SEQUENCE, oid("1.2.840.113549.1.1.1"), NULL): ("rsa", ""),
}
"""Signature schemes allowed, by their bytes. Source: RFC 5754, 3."""
_CURVES: Final = (ec.SECP256R1, ec.SECP384R1, ec.SECP521R1)
_SHORTEST_RSA: Final = 2048

_SIGNED_DATA: Final = oid("1.2.840.113549.1.7.2")
_DATA: Final = oid("1.2.840.113549.1.7.1")
_TIME_INFO: Final = oid("1.2.840.113549.1.9.16.1.4")
_TIME_TOKEN: Final = oid("1.2.840.113549.1.9.16.2.14")

_KNOWN: Final = {
    "content_type",
    "message_digest",
    "signing_certificate",
    "signing_certificate_v2",
    "cms_algorithm_protection",
    "signing_time",
}


@dataclass(frozen=True, kw_only=True)
class Container:
    """What a container says, after it was found to be written as it must be."""

    certificate: x509.Certificate
    others: tuple[x509.Certificate, ...]
    """Further certificates in it; not yet judged."""
    digest_name: str
    attributes: dict[str, Any]
    attributes_der: bytes
    """As they are signed."""
    signature: bytes
    content: bytes
    """A time's own bytes; empty for a signature over a file."""
    time_token: bytes
    """Empty if there is none."""


def read_container(packed: bytes, *, held: Held) -> Container:
    """Read a container and compare it with itself written anew. Raises Flaw."""
    try:
        container, written = _read(packed, held)
    except (ValueError, TypeError, KeyError, IndexError, OverflowError) as error:
        raise Flaw(Cause.CONTAINER, "The container can't be read.") from error
    if written != packed:
        raise Flaw(Cause.CONTAINER, "The container isn't as it would be written.")
    _check_binding(container, held)
    return container


def check_container(container: Container, digest: bytes) -> None:
    """The signed digest is that of the bytes, and the signature fits the certificate. Raises Flaw."""
    if container.attributes["message_digest"] != digest:
        raise Flaw(Cause.DIGEST, "What it covers was changed after it was signed.")
    public = container.certificate.public_key()
    algorithm = _HASHES[container.digest_name]
    try:
        if isinstance(public, ec.EllipticCurvePublicKey):
            public.verify(container.signature, container.attributes_der, ec.ECDSA(algorithm))
        elif isinstance(public, rsa.RSAPublicKey):
            public.verify(container.signature, container.attributes_der, padding.PKCS1v15(), algorithm)
        else:
            raise _not_allowed()
    except InvalidSignature as error:
        raise Flaw(Cause.SIGNATURE, "The signature doesn't fit the key in its certificate.") from error


def _read(packed: bytes, held: Held) -> tuple[Container, bytes]:
    info = cms.ContentInfo.load(packed, strict=True)
    if info["content_type"].native != "signed_data":
        raise Flaw(Cause.CONTAINER, "The container holds no signature.")
    body = info["content"]
    if len(body["signer_infos"]) != 1:
        raise Flaw(Cause.CONTAINER, f"The container holds {len(body['signer_infos'])} signatures, not one.")
    signer = body["signer_infos"][0]
    certificates = [choice.chosen for choice in body["certificates"]]
    sid = signer["sid"].chosen
    wanted = (sid["issuer"].dump(), sid["serial_number"].native)
    fitting = [one for one in certificates if (one.issuer.dump(), one.serial_number) == wanted]
    if len(fitting) != 1:
        raise Flaw(Cause.CONTAINER, "The container doesn't hold the one certificate of its signature.")
    (own,) = fitting

    digest_der, scheme_der = signer["digest_algorithm"].dump(), signer["signature_algorithm"].dump()
    certificate = _certificate(own.dump())
    digest_name = _allowed(digest_der, scheme_der, certificate.public_key())
    tagged = signer["signed_attrs"].dump()
    attributes = _attributes(signer["signed_attrs"], digest_der, scheme_der)
    token = _token(signer["unsigned_attrs"]) if signer["unsigned_attrs"] else b""
    content = body["encap_content_info"]["content"].contents if held == "tst_info" else b""
    signature = signer["signature"].native

    token_der = (tlv(TAGGED_1, tlv(SEQUENCE, _TIME_TOKEN, tlv(SET, token))),) if token else ()
    about = (
        tlv(SEQUENCE, _DATA)
        if held == "data"
        else tlv(SEQUENCE, _TIME_INFO, tlv(TAGGED_0, tlv(OCTETS, content)))
    )
    identity = tlv(SEQUENCE, own.issuer.dump(), own["tbs_certificate"]["serial_number"].dump())
    signer_der = tlv(
        SEQUENCE, INTEGER_1, identity, digest_der, tagged, scheme_der, tlv(OCTETS, signature), *token_der
    )
    written = tlv(
        SEQUENCE,
        _SIGNED_DATA,
        tlv(
            TAGGED_0,
            tlv(
                SEQUENCE,
                INTEGER_1 if held == "data" else INTEGER_3,
                tlv(SET, digest_der),
                about,
                tlv(TAGGED_0, *(one.dump() for one in certificates)),
                tlv(SET, signer_der),
            ),
        ),
    )
    container = Container(
        certificate=certificate,
        others=tuple(_certificate(one.dump()) for one in certificates if one is not own),
        digest_name=digest_name,
        attributes=attributes,
        attributes_der=bytes((SET,)) + tagged[1:],
        signature=signature,
        content=content,
        time_token=token,
    )
    return container, written


def _certificate(der: bytes) -> x509.Certificate:
    """A certificate of which everything that is asked later can be read. Raises Flaw."""
    try:
        certificate = x509.load_der_x509_certificate(der)
        for read in ("subject", "issuer", "extensions", "not_valid_before_utc", "not_valid_after_utc"):
            getattr(certificate, read)
        certificate.public_key()
    except (
        ValueError,
        OverflowError,
        UnsupportedAlgorithm,
        x509.InvalidVersion,
        x509.DuplicateExtension,
        x509.UnsupportedGeneralNameType,
    ) as error:
        raise Flaw(Cause.CONTAINER, "A certificate in the container can't be read.") from error
    return certificate


def _allowed(digest_der: bytes, scheme_der: bytes, public: object) -> str:
    """Name of the digest, if digest, scheme and key are on the lists and agree. Raises Flaw."""
    digest_name = _DIGESTS.get(digest_der)
    kind, scheme_digest = _SCHEMES.get(scheme_der, ("", ""))
    if digest_name is None or not kind or scheme_digest not in ("", digest_name):
        raise _not_allowed()
    if kind == "ec" and isinstance(public, ec.EllipticCurvePublicKey) and isinstance(public.curve, _CURVES):
        return digest_name
    if kind == "rsa" and isinstance(public, rsa.RSAPublicKey) and public.key_size >= _SHORTEST_RSA:
        return digest_name
    raise _not_allowed()


def _not_allowed() -> Flaw:
    return Flaw(
        Cause.ALGORITHM,
        "It wasn't made with an allowed algorithm: SHA-256, 384 or 512 with ECDSA on P-256, 384 or 521, or "
        f"RSA of at least {_SHORTEST_RSA} bits.",
        Judgement.NOT_ESTABLISHED,
    )


def _attributes(found: Any, digest_der: bytes, scheme_der: bytes) -> dict[str, Any]:
    """Signed attributes by name, each there once. Raises Flaw."""
    attributes: dict[str, Any] = {}
    for one in found:
        name = one["type"].native
        if name in attributes or len(one["values"]) != 1:
            raise Flaw(Cause.ATTRIBUTES, f"The signed attribute {name} is there more than once.")
        if name not in _KNOWN:
            raise Flaw(
                Cause.ATTRIBUTES,
                f"The signed attribute {name} isn't known, so what it asks for isn't either.",
                Judgement.NOT_ESTABLISHED,
            )
        value = one["values"][0]
        if name == "cms_algorithm_protection":
            mechanism = value["signature_algorithm"]
            same_digest = value["digest_algorithm"].dump() == digest_der
            if not same_digest or tlv(SEQUENCE, mechanism.contents) != scheme_der:
                raise Flaw(Cause.ATTRIBUTES, "It was signed as made with other algorithms.")
        attributes[name] = value if name.startswith("signing_certificate") else value.native
    return attributes


def _token(unsigned: Any) -> bytes:
    """The one time token beside the signature. Raises Flaw."""
    if [one["type"].native for one in unsigned] != ["signature_time_stamp_token"]:
        raise Flaw(Cause.CONTAINER, "Beside the signature stands more than one time token.")
    (values,) = (one["values"] for one in unsigned)
    if len(values) != 1:
        raise Flaw(Cause.CONTAINER, "More than one time token stands beside the signature.")
    return bytes(values[0].dump())


def _check_binding(container: Container, held: Held) -> None:
    """The signed attributes name what is signed and by which certificate. Raises Flaw."""
    attributes = container.attributes
    if attributes.get("content_type") != held or not isinstance(attributes.get("message_digest"), bytes):
        raise Flaw(Cause.ATTRIBUTES, "The signed attributes don't say what was signed.")
    if held == "tst_info" and container.time_token:
        raise Flaw(Cause.CONTAINER, "A time token stands within a time token.")
    der = container.certificate.public_bytes(Encoding.DER)
    try:
        if "signing_certificate_v2" in attributes:
            first = attributes["signing_certificate_v2"]["certs"][0]
            name, named = first["hash_algorithm"]["algorithm"].native, first["cert_hash"].native
            if name not in _HASHES:
                raise _not_allowed()
        elif held == "tst_info" and "signing_certificate" in attributes:
            # RFC 3161 asks for SHA-1 here; what the token's signature covers is digested with another.
            name, named = "sha1", attributes["signing_certificate"]["certs"][0]["cert_hash"].native
        else:
            raise Flaw(Cause.ATTRIBUTES, "The signed attributes don't name the certificate.")
    except (ValueError, TypeError, KeyError, IndexError) as error:
        raise Flaw(Cause.CONTAINER, "The signed attributes can't be read.") from error
    if hashlib.new(name, der).digest() != named:
        raise Flaw(Cause.ATTRIBUTES, "The certificate isn't the one that was named when signing.")
