"""When a signature was given: a claim, a time server's word, or the register's; and what the end of a
certificate does to each."""

from __future__ import annotations

import threading
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from datetime import UTC, datetime, timedelta
from functools import cache
from http.server import BaseHTTPRequestHandler, HTTPServer

import pytest
from asn1crypto import cms, tsp
from asn1crypto import keys as asn1_keys
from asn1crypto import x509 as asn1_x509
from cryptography import x509
from cryptography.hazmat.primitives import hashes, serialization
from cryptography.hazmat.primitives.asymmetric import rsa
from cryptography.x509.oid import ExtendedKeyUsageOID, NameOID
from pyhanko.sign.timestamps.dummy_client import DummyTimeStamper
from signing_bench import (
    LONG,
    NOW,
    PEOPLE,
    SIGNED_AT,
    judged,
    signed_once,
    signed_pack,
    signer,
    unsigned_pack,
)

from sheets.errors import NotEstablishedError
from sheets.seal.keys import Validity
from sheets.seal.signatures_bytes import container_bytes, signed_ranges
from sheets.seal.signatures_report import ROLES, Cause, Judgement, SignaturesReport

SHORT = Validity(start=datetime(2026, 1, 1, tzinfo=UTC), end=datetime(2026, 4, 1, tzinfo=UTC))
"""Over before the file is judged."""


@dataclass(frozen=True, kw_only=True)
class TimeServer:
    """A time server's certificate and its answers, by a program that isn't ours."""

    certificate_pem: str
    clock: DummyTimeStamper


@cache
def time_server(at: datetime, *, for_time: bool = True) -> TimeServer:
    private = rsa.generate_private_key(public_exponent=65537, key_size=2048)
    name = x509.Name([x509.NameAttribute(NameOID.COMMON_NAME, "Time Server")])
    purpose = ExtendedKeyUsageOID.TIME_STAMPING if for_time else ExtendedKeyUsageOID.CODE_SIGNING
    certificate = (
        x509.CertificateBuilder()
        .subject_name(name)
        .issuer_name(name)
        .public_key(private.public_key())
        .serial_number(5)
        .not_valid_before(LONG.start)
        .not_valid_after(LONG.end)
        .add_extension(x509.ExtendedKeyUsage([purpose]), critical=True)
        .sign(private, hashes.SHA256())
    )
    der = certificate.public_bytes(serialization.Encoding.DER)
    packed = private.private_bytes(
        serialization.Encoding.DER, serialization.PrivateFormat.PKCS8, serialization.NoEncryption()
    )
    clock = DummyTimeStamper(
        asn1_x509.Certificate.load(der), asn1_keys.PrivateKeyInfo.load(packed), fixed_dt=at
    )
    return TimeServer(
        certificate_pem=certificate.public_bytes(serialization.Encoding.PEM).decode(), clock=clock
    )


@contextmanager
def serving(server: TimeServer) -> Iterator[str]:
    """The server's address on this computer."""

    class Handler(BaseHTTPRequestHandler):
        def do_POST(self) -> None:
            asked = self.rfile.read(int(self.headers["Content-Length"]))
            answer = server.clock.request_tsa_response(tsp.TimeStampReq.load(asked)).dump()
            self.send_response(200)
            self.send_header("Content-Type", "application/timestamp-reply")
            self.send_header("Content-Length", str(len(answer)))
            self.end_headers()
            self.wfile.write(answer)

        def log_message(self, *_: object) -> None:
            """Says nothing."""

    with HTTPServer(("127.0.0.1", 0), Handler) as listening:
        thread = threading.Thread(target=listening.serve_forever)
        thread.start()
        try:
            yield f"http://127.0.0.1:{listening.server_port}/"
        finally:
            listening.shutdown()
            thread.join()


@cache
def pack(server: TimeServer | None) -> bytes:
    """Three signatures by certificates that end before the file is judged."""
    pdf = unsigned_pack()
    for role in ROLES:
        who = signer(PEOPLE[role], validity=SHORT)
        if server is None:
            pdf = signed_once(pdf, role, who)
        else:
            with serving(server) as address:
                pdf = signed_once(pdf, role, who, time_server=address)
    return pdf


def causes(report: SignaturesReport) -> set[Cause]:
    return {reason.cause for one in report.signatures for reason in one.reasons}


SOON = SIGNED_AT.astimezone(UTC) + timedelta(minutes=1)


def test_expired_without_a_proven_time_is_not_established() -> None:
    assert judged(pack(None), now=SOON).judgement is Judgement.GOOD
    report = judged(pack(None))
    assert report.judgement is Judgement.NOT_ESTABLISHED
    assert causes(report) == {Cause.VALIDITY}
    assert "2026-04-01" in report.signatures[0].reasons[0].says


def test_expired_with_a_trusted_time_server_stays_good() -> None:
    server = time_server(SOON)
    report = judged(pack(server), time_trust=[server.certificate_pem])
    assert report.judgement is Judgement.GOOD
    assert [(one.proven, one.proven_by) for one in report.signatures] == [(SOON, "Time Server")] * 3


def test_expired_with_a_register_event_stays_good() -> None:
    report = judged(pack(None), registered=SOON)
    assert report.judgement is Judgement.GOOD
    assert {(one.proven, one.proven_by) for one in report.signatures} == {(SOON, "the register")}


def test_registered_after_the_end_proves_nothing() -> None:
    report = judged(pack(None), registered=SHORT.end + timedelta(days=1))
    assert report.judgement is Judgement.NOT_ESTABLISHED
    assert causes(report) == {Cause.VALIDITY}


def test_time_server_that_nobody_trusts_proves_nothing() -> None:
    server = time_server(SOON)
    report = judged(pack(server))
    assert report.judgement is Judgement.NOT_ESTABLISHED
    assert causes(report) == {Cause.FOREIGN}
    assert {one.proven for one in report.signatures} == {None}


def test_certificate_for_something_else_gives_no_time() -> None:
    server = time_server(SOON, for_time=False)
    report = judged(pack(server), time_trust=[server.certificate_pem])
    assert report.judgement is Judgement.BAD
    assert causes(report) == {Cause.TIME_TOKEN}


def test_claim_later_than_what_is_proven_is_not_established() -> None:
    early = SOON - timedelta(days=3)
    report = judged(pack(None), registered=early)
    assert report.judgement is Judgement.NOT_ESTABLISHED
    assert causes(report) == {Cause.TIME}
    server = time_server(early)
    report = judged(pack(server), time_trust=[server.certificate_pem])
    assert report.judgement is Judgement.NOT_ESTABLISHED
    assert causes(report) == {Cause.TIME}


def test_claim_in_the_future_is_not_established() -> None:
    report = judged(signed_pack(), now=SIGNED_AT - timedelta(days=1))
    assert report.judgement is Judgement.NOT_ESTABLISHED
    assert causes(report) == {Cause.TIME}


def test_claim_outside_the_certificate_s_validity_is_bad() -> None:
    who = signer("Preparer One", validity=SHORT)
    pdf = signed_once(unsigned_pack(), "prepared", who, when=SHORT.end + timedelta(days=2))
    report = judged(pdf)
    assert report.judgement is Judgement.BAD
    assert causes(report) == {Cause.VALIDITY}


def test_every_fifteenth_digit_of_a_time_token_changed() -> None:
    """A token stands beside what is signed, so nothing but its own rules covers it."""
    server = time_server(SOON)
    pdf = pack(server)
    last = signed_ranges(pdf)[-1]
    digits = 2 * len(container_bytes(pdf, last))
    for position in range(last.gap_start + 1 + digits // 3, last.gap_start + 1 + digits, 15):
        changed = pdf[:position] + bytes((pdf[position] ^ 1,)) + pdf[position + 1 :]
        report = judged(changed, time_trust=[server.certificate_pem])
        assert report.judgement is not Judgement.GOOD, position


def test_token_of_another_signature_gives_no_time() -> None:
    server = time_server(SOON)
    pdf = pack(server)
    first, last = (cms.ContentInfo.load(container_bytes(pdf, signed_ranges(pdf)[index])) for index in (0, -1))
    (theirs,), (own,) = first["content"]["signer_infos"], last["content"]["signer_infos"]
    own["unsigned_attrs"] = theirs["unsigned_attrs"]
    gap = signed_ranges(pdf)[-1]
    room = gap.gap_end - gap.gap_start - 2
    text = last.dump(force=True).hex().upper().ljust(room, "0").encode()
    report = judged(
        pdf[: gap.gap_start + 1] + text + pdf[gap.gap_end - 1 :], time_trust=[server.certificate_pem]
    )
    assert report.judgement is Judgement.BAD
    assert report.reasons[0].says == "The time token belongs to another signature."


def refuses(answer: Callable[[BaseHTTPRequestHandler], None]) -> type[BaseHTTPRequestHandler]:
    class Handler(BaseHTTPRequestHandler):
        def do_POST(self) -> None:
            answer(self)

        def log_message(self, *_: object) -> None:
            """Says nothing."""

    return Handler


def test_no_answer_from_the_time_server_is_named() -> None:
    with HTTPServer(("127.0.0.1", 0), refuses(lambda one: one.send_error(500))) as listening:
        address = f"http://127.0.0.1:{listening.server_port}/"
        thread = threading.Thread(target=listening.handle_request)
        thread.start()
        with pytest.raises(NotEstablishedError, match="gave no time"):
            signed_once(unsigned_pack(), "prepared", signer("Preparer One"), time_server=address)
        thread.join()
    with pytest.raises(NotEstablishedError, match="gave no time"):
        signed_once(unsigned_pack(), "prepared", signer("Preparer One"), time_server=address)


def test_now_is_handed_in() -> None:
    assert judged(signed_pack(), now=NOW).judgement is Judgement.GOOD
