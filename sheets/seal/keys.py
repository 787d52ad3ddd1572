"""Keys of a works: its own authority and the signers that it vouches for, as PKCS#12 files.

The authority's certificate is what the site file trusts; the files stay with those who sign. Dates and serial
numbers are handed in, since nothing here looks at a clock. The keys themselves are drawn by the cryptographic
library, as they must be.

Import this module where a key is needed and not before: the library costs start time.
"""

from __future__ import annotations

from dataclasses import dataclass
from datetime import datetime
from enum import Enum
from typing import Final

from cryptography import x509
from cryptography.hazmat.primitives import hashes, serialization
from cryptography.hazmat.primitives.asymmetric import ec, rsa
from cryptography.hazmat.primitives.serialization import pkcs12
from cryptography.x509.oid import NameOID

from sheets.errors import InputError, Problem, quoted

PrivateKey = ec.EllipticCurvePrivateKey | rsa.RSAPrivateKey

SHORTEST_PASSPHRASE: Final = 8
"""Characters. A key file travels on memory sticks; policy, without a source."""
LONGEST_NAME: Final = 64
"""Characters of a common name. Source: RFC 5280, appendix A.1, ub-common-name."""
SERIAL_BYTES: Final = 20
"""Longest serial number. Source: RFC 5280, 4.1.2.2."""


class KeyKind(Enum):
    """Which kind of key is made."""

    ECDSA_P256 = "ecdsa p-256"
    RSA_3072 = "rsa 3072"


@dataclass(frozen=True, kw_only=True)
class KeyFile:
    """A new key: the file for whom it was made, and the certificate for everybody."""

    p12: bytes
    """PKCS#12, locked with the passphrase."""
    certificate_pem: str


@dataclass(frozen=True, kw_only=True)
class OpenKey:
    """A key file that was unlocked. Open it once and sign often: unlocking is what takes time."""

    private: PrivateKey
    certificate: x509.Certificate


@dataclass(frozen=True, kw_only=True)
class Validity:
    """From when to when a certificate holds; both with their zone."""

    start: datetime
    end: datetime

    def __post_init__(self) -> None:
        for name, value in (("start", self.start), ("end", self.end)):
            if value.tzinfo is None:
                raise ValueError(f"the {name} of a validity needs its zone")
        if self.end <= self.start:
            raise InputError(
                Problem(
                    where="validity of a key",
                    what=f"it would end on {self.end.date()}, which isn't after its start",
                    fix="Give an end that lies after the start.",
                )
            )


def serial_from(chance: bytes) -> int:
    """A serial number from 8 to 20 bytes of chance. Source: RFC 5280, 4.1.2.2: positive, at most 20 bytes."""
    if not 8 <= len(chance) <= SERIAL_BYTES:
        raise ValueError("a serial number is made from 8 to 20 bytes")
    return (int.from_bytes(chance, "big") >> 1) | 1


def common_name(certificate: x509.Certificate) -> str:
    """The name in a certificate, empty if it holds none or several."""
    found = certificate.subject.get_attributes_for_oid(NameOID.COMMON_NAME)
    return str(found[0].value) if len(found) == 1 else ""


def make_authority(
    name: str, *, validity: Validity, serial: int, passphrase: str, kind: KeyKind = KeyKind.ECDSA_P256
) -> KeyFile:
    """A works' own authority, which may vouch for signers and for nothing below them.

    Raises InputError for a name or a passphrase that won't do.
    """
    private = _new_key(kind)
    subject = _subject(name)
    builder = (
        _builder(subject, subject, private, validity, serial)
        .add_extension(x509.BasicConstraints(ca=True, path_length=0), critical=True)
        .add_extension(_usage(authority=True), critical=True)
    )
    return _key_file(builder.sign(private, hashes.SHA256()), private, (), name, passphrase)


def make_signer(
    authority: OpenKey,
    person: str,
    *,
    validity: Validity,
    serial: int,
    passphrase: str,
    kind: KeyKind = KeyKind.ECDSA_P256,
) -> KeyFile:
    """A person's key, vouched for by the authority of the works.

    Raises InputError for a name or a passphrase that won't do, or a validity beyond the authority's.
    """
    vouching = authority.certificate
    if validity.start < vouching.not_valid_before_utc or validity.end > vouching.not_valid_after_utc:
        raise InputError(
            Problem(
                where=f"key of {quoted(person)}",
                what="its validity goes beyond that of the authority, "
                f"{vouching.not_valid_before_utc.date()} to {vouching.not_valid_after_utc.date()}",
                fix="Give dates within these, or make a new authority.",
            )
        )
    private = _new_key(kind)
    issuing = x509.AuthorityKeyIdentifier.from_issuer_public_key(authority.private.public_key())
    builder = (
        _builder(_subject(person), vouching.subject, private, validity, serial)
        .add_extension(x509.BasicConstraints(ca=False, path_length=None), critical=True)
        .add_extension(_usage(authority=False), critical=True)
        .add_extension(issuing, critical=False)
    )
    certificate = builder.sign(authority.private, hashes.SHA256())
    return _key_file(certificate, private, (vouching,), person, passphrase)


def open_key(p12: bytes, passphrase: str, *, where: str = "key file") -> OpenKey:
    """Unlock a key file. Raises InputError if it can't be, or holds no key of a kind that is used here."""
    try:
        private, certificate, _ = pkcs12.load_key_and_certificates(p12, passphrase.encode())
    except ValueError as error:
        raise InputError(
            Problem(
                where=where,
                what="it doesn't open: the passphrase is wrong, or it isn't a PKCS#12 file",
                fix="Give the file that was made with the key, and its passphrase.",
            )
        ) from error
    if not isinstance(private, PrivateKey) or certificate is None:
        raise InputError(
            Problem(
                where=where,
                what="it holds no ECDSA or RSA key with its certificate",
                fix="Give a file with both, such as `jamnut keys` makes.",
            )
        )
    return OpenKey(private=private, certificate=certificate)


def _new_key(kind: KeyKind) -> PrivateKey:
    if kind is KeyKind.RSA_3072:
        return rsa.generate_private_key(public_exponent=65537, key_size=3072)
    return ec.generate_private_key(ec.SECP256R1())


def _subject(name: str) -> x509.Name:
    tidy = " ".join(name.split())
    if not tidy or len(tidy) > LONGEST_NAME or not tidy.isprintable():
        raise InputError(
            Problem(
                where="name in a key",
                what=f"{quoted(name)} isn't 1 to {LONGEST_NAME} printable characters",
                fix="Give the name as it shall stand on the sheets.",
            )
        )
    return x509.Name([x509.NameAttribute(NameOID.COMMON_NAME, tidy)])


def _builder(
    subject: x509.Name, issuer: x509.Name, private: PrivateKey, validity: Validity, serial: int
) -> x509.CertificateBuilder:
    public = private.public_key()
    return (
        x509.CertificateBuilder()
        .subject_name(subject)
        .issuer_name(issuer)
        .public_key(public)
        .serial_number(serial)
        .not_valid_before(validity.start)
        .not_valid_after(validity.end)
        .add_extension(x509.SubjectKeyIdentifier.from_public_key(public), critical=False)
    )


def _usage(*, authority: bool) -> x509.KeyUsage:
    """What a key may do. Source: RFC 5280, 4.2.1.3; contentCommitment is there called nonRepudiation, too."""
    return x509.KeyUsage(
        digital_signature=not authority,
        content_commitment=not authority,
        key_cert_sign=authority,
        crl_sign=authority,
        key_encipherment=False,
        data_encipherment=False,
        key_agreement=False,
        encipher_only=False,
        decipher_only=False,
    )


def _key_file(
    certificate: x509.Certificate,
    private: PrivateKey,
    chain: tuple[x509.Certificate, ...],
    name: str,
    passphrase: str,
) -> KeyFile:
    if len(passphrase) < SHORTEST_PASSPHRASE:
        raise InputError(
            Problem(
                where=f"passphrase for {quoted(name)}",
                what=f"it has fewer than {SHORTEST_PASSPHRASE} characters",
                fix="Give a longer one; several words do well.",
            )
        )
    lock = serialization.BestAvailableEncryption(passphrase.encode())
    packed = pkcs12.serialize_key_and_certificates(name.encode(), private, certificate, chain, lock)
    pem = certificate.public_bytes(serialization.Encoding.PEM).decode("ascii")
    return KeyFile(p12=packed, certificate_pem=pem)
