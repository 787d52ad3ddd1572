"""Whether a certificate is vouched for by the trust list, and which time of a signature is more than a claim.

The trust list holds the certificates of authorities that issue signers' certificates, or a signer's own. An
authority above these isn't followed: what the works trusts stands in its list. Source: RFC 5280, RFC 3161.
"""

from __future__ import annotations

import hashlib
from collections.abc import Sequence
from dataclasses import dataclass
from datetime import UTC, datetime, timedelta
from typing import Final

from asn1crypto import tsp  # type: ignore[import-untyped]  # the package ships no types
from cryptography import x509
from cryptography.exceptions import InvalidSignature, UnsupportedAlgorithm
from cryptography.x509.oid import ExtendedKeyUsageOID, ExtensionOID

from sheets.errors import InputError, Problem
from sheets.seal.keys import common_name
from sheets.seal.signatures_cms import Container, check_container, read_container
from sheets.seal.signatures_report import Cause, Flaw, Judgement

CLOCKS_APART: Final = timedelta(minutes=5)
"""How far two clocks may differ before one is called wrong; policy, without a source."""

_READ: Final = {
    ExtensionOID.BASIC_CONSTRAINTS,
    ExtensionOID.KEY_USAGE,
    ExtensionOID.EXTENDED_KEY_USAGE,
    ExtensionOID.SUBJECT_KEY_IDENTIFIER,
    ExtensionOID.AUTHORITY_KEY_IDENTIFIER,
}
"""Extensions that are understood here; a critical one beyond them is not established."""


@dataclass(frozen=True, kw_only=True)
class Proof:
    """A time that doesn't hang on the signer's clock."""

    at: datetime
    by: str


def read_trust(certificates_pem: Sequence[str], *, where: str) -> tuple[x509.Certificate, ...]:
    """Certificates of a trust list. Raises InputError for what isn't one."""
    found = []
    for number, text in enumerate(certificates_pem, start=1):
        try:
            found.append(x509.load_pem_x509_certificate(text.encode()))
        except ValueError as error:
            raise InputError(
                Problem(
                    where=f"{where}, entry {number}",
                    what="it isn't a certificate in PEM form",
                    fix="Give the whole text from BEGIN CERTIFICATE to END CERTIFICATE.",
                )
            ) from error
    return tuple(found)


def vouching(certificate: x509.Certificate, trust: Sequence[x509.Certificate]) -> x509.Certificate:
    """The entry of the trust list that vouches for a certificate: its issuer, or itself. Raises Flaw."""
    _check_critical(certificate)
    if certificate in trust:
        return certificate
    namesakes = [one for one in trust if one.subject == certificate.issuer and _may_issue(one)]
    for one in namesakes:
        try:
            certificate.verify_directly_issued_by(one)
        except (ValueError, TypeError, InvalidSignature, UnsupportedAlgorithm):
            continue
        return one
    name, issuer = common_name(certificate), certificate.issuer.rfc4514_string()
    if any(_names_key(certificate, one) for one in namesakes):
        raise Flaw(Cause.FORGED, f"The certificate of {name} claims {issuer}, which didn't issue it.")
    raise Flaw(
        Cause.FOREIGN,
        f"The certificate of {name} is issued by {issuer}, and no such authority with that key is on the "
        "trust list.",
        Judgement.NOT_ESTABLISHED,
    )


def check_others(container: Container, trust: Sequence[x509.Certificate]) -> None:
    """Certificates beside the signer's are such as the trust list vouches for. Raises Flaw."""
    for one in container.others:
        vouching(one, trust)


def check_signing_use(certificate: x509.Certificate) -> None:
    """The certificate is a person's, for signing. Raises Flaw."""
    if _is_authority(certificate):
        raise Flaw(Cause.KEY_USAGE, "The certificate is an authority's, not a person's.")
    try:
        usage = certificate.extensions.get_extension_for_class(x509.KeyUsage).value
    except x509.ExtensionNotFound as error:
        raise Flaw(
            Cause.KEY_USAGE, "The certificate doesn't say what it is for.", Judgement.NOT_ESTABLISHED
        ) from error
    if not (usage.digital_signature or usage.content_commitment):
        raise Flaw(Cause.KEY_USAGE, "The certificate isn't for signing.")


@dataclass(frozen=True, kw_only=True)
class TimeToken:
    """A token that fits the signature beside it; who stands behind it is another question."""

    at: datetime
    container: Container


def read_token(container: Container) -> TimeToken:
    """The token beside a signature, held against the signature's bytes. Raises Flaw.

    Source: RFC 3161, 2.4.2.
    """
    token = read_container(container.time_token, held="tst_info")
    check_container(token, hashlib.new(token.digest_name, token.content).digest())
    try:
        info = tsp.TSTInfo.load(token.content, strict=True)
        imprint = info["message_imprint"]
        algorithm, stamped = imprint["hash_algorithm"]["algorithm"].native, imprint["hashed_message"].native
        at = info["gen_time"].native
    except (ValueError, TypeError, KeyError) as error:
        raise Flaw(Cause.TIME_TOKEN, "The time token can't be read.") from error
    if algorithm not in ("sha256", "sha384", "sha512"):
        raise Flaw(Cause.TIME_TOKEN, "The time token digests by a weak algorithm.", Judgement.NOT_ESTABLISHED)
    if hashlib.new(algorithm, container.signature).digest() != stamped:
        raise Flaw(Cause.TIME_TOKEN, "The time token belongs to another signature.")
    return TimeToken(at=at, container=token)


def proven_time(token: TimeToken, trust: Sequence[x509.Certificate]) -> Proof:
    """The time of a token from a time server on the trust list. Raises Flaw.

    Source: RFC 3161, 2.3: the certificate is for time stamping alone.
    """
    certificate = token.container.certificate
    issuer = vouching(certificate, trust)
    check_others(token.container, trust)
    if not _for_time_alone(certificate):
        raise Flaw(Cause.TIME_TOKEN, "The time token's certificate isn't for time stamping alone.")
    for one in (certificate, issuer):
        if not holds_at(one, token.at):
            raise Flaw(Cause.TIME_TOKEN, "The time token lies outside the validity of its certificate.")
    return Proof(at=token.at, by=common_name(certificate) or "time server")


def check_time(
    chain: Sequence[x509.Certificate], *, claimed: datetime, proof: Proof | None, now: datetime
) -> None:
    """The certificates held when the signature was given, as far as that is proven. Raises Flaw.

    Without a proven time they must hold now: after their end nobody can tell an old signature from one that
    was made with an old clock.
    """
    for one in chain:
        if not holds_at(one, claimed):
            raise Flaw(
                Cause.VALIDITY,
                f"It claims to be given on {claimed.isoformat()}, outside the validity of the certificate of "
                f"{common_name(one)}, {_span(one)}.",
            )
    known = now if proof is None else proof.at
    if claimed > known + CLOCKS_APART:
        raise Flaw(
            Cause.TIME,
            f"It claims to be given on {claimed.isoformat()}, later than {known.isoformat()}, when it was "
            + ("judged." if proof is None else f"there already by {proof.by}."),
            Judgement.NOT_ESTABLISHED,
        )
    for one in chain:
        if not holds_at(one, known):
            at = "now" if proof is None else f"on {known.isoformat()}, the time by {proof.by}"
            raise Flaw(
                Cause.VALIDITY,
                f"The certificate of {common_name(one)} doesn't hold {at}: {_span(one)}."
                + (" No time server and no register says when it was signed." if proof is None else ""),
                Judgement.NOT_ESTABLISHED,
            )


def holds_at(certificate: x509.Certificate, at: datetime) -> bool:
    """Whether a time lies within the validity of a certificate."""
    return certificate.not_valid_before_utc <= at.astimezone(UTC) <= certificate.not_valid_after_utc


def _span(certificate: x509.Certificate) -> str:
    start, end = certificate.not_valid_before_utc, certificate.not_valid_after_utc
    return f"{start.date()} to {end.date()}"


def _is_authority(certificate: x509.Certificate) -> bool:
    try:
        return certificate.extensions.get_extension_for_class(x509.BasicConstraints).value.ca
    except x509.ExtensionNotFound:
        return False


def _may_issue(certificate: x509.Certificate) -> bool:
    try:
        usage = certificate.extensions.get_extension_for_class(x509.KeyUsage).value
    except x509.ExtensionNotFound:
        return _is_authority(certificate)
    return _is_authority(certificate) and usage.key_cert_sign


def _names_key(certificate: x509.Certificate, authority: x509.Certificate) -> bool:
    """Whether a certificate names the authority's key and not only its name: authorities renew their keys."""
    try:
        named = certificate.extensions.get_extension_for_class(x509.AuthorityKeyIdentifier).value
        own = authority.extensions.get_extension_for_class(x509.SubjectKeyIdentifier).value
    except x509.ExtensionNotFound:
        return False
    return named.key_identifier == own.digest


def _for_time_alone(certificate: x509.Certificate) -> bool:
    try:
        found = certificate.extensions.get_extension_for_class(x509.ExtendedKeyUsage)
    except x509.ExtensionNotFound:
        return False
    return found.critical and list(found.value) == [ExtendedKeyUsageOID.TIME_STAMPING]


def _check_critical(certificate: x509.Certificate) -> None:
    unread = [one.oid for one in certificate.extensions if one.critical and one.oid not in _READ]
    if unread:
        raise Flaw(
            Cause.FOREIGN,
            f"The certificate asks for more than is read here ({unread[0].dotted_string}).",
            Judgement.NOT_ESTABLISHED,
        )
