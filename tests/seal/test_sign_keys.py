"""Key files: what another program reads in them, and what they refuse."""

from __future__ import annotations

import subprocess
import sys
from datetime import UTC, datetime, timedelta
from pathlib import Path

import pytest
from cryptography import x509
from cryptography.hazmat.primitives.serialization import Encoding
from signing_bench import LONG, PASSPHRASE, WORKS, YEARS, authority, signer
from test_sign import run, tool

from sheets.errors import InputError
from sheets.seal.keys import KeyKind, Validity, make_authority, make_signer, open_key, serial_from


@pytest.mark.parametrize(
    ("kind", "said"),
    [(KeyKind.ECDSA_P256, "ASN1 OID: prime256v1"), (KeyKind.RSA_3072, "Public-Key: (3072 bit)")],
)
def test_openssl_reads_and_verifies_a_signer_s_certificate(kind: KeyKind, said: str, tmp_path: Path) -> None:
    made = make_signer(
        authority(WORKS)[1], "Ωmega Žižka", validity=YEARS, serial=77, passphrase=PASSPHRASE, kind=kind
    )
    (tmp_path / "one.p12").write_bytes(made.p12)
    (tmp_path / "one.pem").write_text(made.certificate_pem, encoding="ascii")
    (tmp_path / "authority.pem").write_text(authority(WORKS)[0].certificate_pem, encoding="ascii")
    text = run(tool("openssl"), "x509", "-in", str(tmp_path / "one.pem"), "-noout", "-text")
    assert said in text
    assert "X509v3 Key Usage: critical\n                Digital Signature, Non Repudiation\n" in text
    assert "CA:FALSE" in text
    assert "Serial Number: 77" in text
    assert "Not Before: Jan  1 00:00:00 2026 GMT" in text
    run(
        tool("openssl"), "verify", "-x509_strict", "-attime", str(int(YEARS.start.timestamp()) + 60),
        "-CAfile", str(tmp_path / "authority.pem"), str(tmp_path / "one.pem"),
    )  # fmt: skip
    opened = run(
        tool("openssl"),
        "pkcs12",
        "-in",
        str(tmp_path / "one.p12"),
        "-passin",
        f"pass:{PASSPHRASE}",
        "-nokeys",
    )
    assert opened.count("BEGIN CERTIFICATE") == 2


def test_authority_vouches_for_signers_and_no_further_authority() -> None:
    certificate = x509.load_pem_x509_certificate(authority(WORKS)[0].certificate_pem.encode())
    limits = certificate.extensions.get_extension_for_class(x509.BasicConstraints)
    usage = certificate.extensions.get_extension_for_class(x509.KeyUsage)
    assert limits.critical
    assert (limits.value.ca, limits.value.path_length) == (True, 0)
    assert usage.critical
    assert usage.value.key_cert_sign
    assert not usage.value.digital_signature
    certificate.verify_directly_issued_by(certificate)


def test_certificates_differ_by_key_and_serial_alone() -> None:
    """Dates and serial numbers are handed in; nothing of the clock gets in."""
    one, other = (
        open_key(
            make_signer(
                authority(WORKS)[1], "Preparer One", validity=YEARS, serial=serial, passphrase=PASSPHRASE
            ).p12,
            PASSPHRASE,
        ).certificate
        for serial in (5, 6)
    )
    assert (one.not_valid_before_utc, one.not_valid_after_utc) == (YEARS.start, YEARS.end)
    assert (one.subject, one.serial_number, other.serial_number) == (other.subject, 5, 6)
    assert one.public_key() != other.public_key()
    assert len(signer("Preparer One").certificate.public_bytes(Encoding.DER)) > 300


def test_serial_numbers_are_positive_and_short_enough() -> None:
    """Source: RFC 5280, 4.1.2.2: positive, at most 20 octets as a signed integer."""
    assert serial_from(b"\xff" * 20).bit_length() <= 159
    assert serial_from(b"\0" * 8) > 0
    assert serial_from(b"\x01" * 20) != serial_from(b"\x02" * 20)
    for length in (7, 21):
        with pytest.raises(ValueError, match="8 to 20"):
            serial_from(b"1" * length)


def test_wrong_passphrase_and_wrong_file_are_refused_by_name() -> None:
    made, _ = authority(WORKS)
    for p12, phrase in ((made.p12, "lapped spool"), (b"no key", PASSPHRASE), (b"", "")):
        with pytest.raises(InputError, match=r"chief\.p12: it doesn't open"):
            open_key(p12, phrase, where="chief.p12")


@pytest.mark.parametrize("name", ["", "  ", "x" * 65, "two\x07bells"])
def test_names_that_cannot_stand_in_a_certificate(name: str) -> None:
    with pytest.raises(InputError, match="printable characters"):
        make_authority(name, validity=LONG, serial=1, passphrase=PASSPHRASE)


def test_short_passphrase_is_refused() -> None:
    with pytest.raises(InputError, match="fewer than 8"):
        make_authority("Works", validity=LONG, serial=1, passphrase="7 signs")


def test_validity_that_cannot_be() -> None:
    with pytest.raises(InputError, match="isn't after its start"):
        Validity(start=YEARS.end, end=YEARS.start)
    with pytest.raises(ValueError, match="zone"):
        Validity(start=datetime(2026, 1, 1), end=YEARS.end)
    beyond = Validity(start=datetime(2026, 1, 1, tzinfo=UTC), end=LONG.end + timedelta(days=1))
    with pytest.raises(InputError, match="beyond that of the authority"):
        make_signer(authority(WORKS)[1], "Preparer One", validity=beyond, serial=3, passphrase=PASSPHRASE)


def test_commands_start_without_the_signing_library(root: Path) -> None:
    """It takes half a second, and a draft needs none of it."""
    script = (
        "import sys, sheets.cli, sheets.pipeline\n"
        "print([name for name in sys.modules if name in ('pyhanko', 'asn1crypto', 'cryptography')])"
    )
    done = subprocess.run(
        [sys.executable, "-c", script], cwd=root, capture_output=True, text=True, check=True
    )
    assert done.stdout.strip() == "[]"
