"""Verification: what the signatures in a PDF are worth. Good, bad, or not established with the reason.

From the cheap to the dear: the bytes that are covered, the containers, the fields and what each update
changed, then trust, time and persons. Whatever fails first is named, and nothing gets a good word that wasn't
judged to the end. That a certificate was called back by its authority isn't looked up anywhere.

Import this module where a file is verified and not before: the library costs half a second.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from datetime import datetime
from typing import Final

from cryptography import x509
from cryptography.hazmat.primitives import hashes

from sheets.seal.keys import common_name
from sheets.seal.signatures_bytes import SignedRange, check_ranges, container_bytes, signed_ranges
from sheets.seal.signatures_cms import Container, check_container, read_container
from sheets.seal.signatures_people import Person, check_needed, clash, person_of
from sheets.seal.signatures_report import (
    ROLES,
    Cause,
    Flaw,
    Judgement,
    Reason,
    SignatureReport,
    SignaturesReport,
    worst,
)
from sheets.seal.signatures_revisions import FilledField, filled_fields
from sheets.seal.signatures_trust import (
    CLOCKS_APART,
    Proof,
    TimeToken,
    check_others,
    check_signing_use,
    check_time,
    proven_time,
    read_token,
    read_trust,
    vouching,
)

_UNSIGNED: Final = Reason(
    cause=Cause.UNSIGNED,
    judgement=Judgement.NOT_ESTABLISHED,
    says="The file carries no electronic signature; ink can't be judged here.",
)
_LATER: Final = Reason(
    cause=Cause.LATER,
    judgement=Judgement.NOT_ESTABLISHED,
    says="What it covers is unchanged, but the file around it isn't as it was signed.",
)


@dataclass(frozen=True, kw_only=True)
class HeldSignature:
    """A signature that fits its bytes and its field. Who vouches for it is another question."""

    field: FilledField
    container: Container
    token: TimeToken | None
    person: Person


@dataclass(frozen=True, kw_only=True)
class _Trusting:
    """Whom and what the judging goes by."""

    signers: tuple[x509.Certificate, ...]
    time_servers: tuple[x509.Certificate, ...]
    registered: Proof | None
    now: datetime


def held_signatures(pdf: bytes, *, searching: bool = True) -> tuple[HeldSignature, ...]:
    """All signatures of a file, each fitting its bytes and its field; none if it is unsigned.

    `searching` as in `filled_fields`; who signs may leave it out, who judges may not.
    Raises Flaw at the first that doesn't. What an update changed beside its signature stays a flaw of the
    field.
    """
    ranges = signed_ranges(pdf)
    check_ranges(pdf, ranges)
    containers = [held_container(pdf, one) for one in ranges]
    fields = filled_fields(pdf, ranges, searching=searching) if ranges else ()
    held = []
    for (container, token), field in zip(containers, fields, strict=True):
        person = person_of(container.certificate)
        if person.name != field.person:
            raise Flaw(Cause.FORM, f"The signature {field.name} is said to be by another person.")
        held.append(HeldSignature(field=field, container=container, token=token, person=person))
    return tuple(held)


def held_container(pdf: bytes, signed: SignedRange) -> tuple[Container, TimeToken | None]:
    """The container in a gap and the time token in it, each fitting what it covers. Raises Flaw."""
    container = read_container(container_bytes(pdf, signed), held="data")
    check_container(container, signed.digest(pdf, container.digest_name))
    return container, read_token(container) if container.time_token else None


def judge_signatures(
    pdf: bytes,
    *,
    trust: Sequence[str],
    now: datetime,
    needed: tuple[str, ...] = ROLES,
    time_trust: Sequence[str] = (),
    registered: datetime | None = None,
) -> SignaturesReport:
    """What the signatures of a PDF are worth.

    `trust` and `time_trust` are certificates in PEM form: of the authorities that issue signers'
    certificates, and of those behind time servers. `needed` are the signatures that the works asks for.
    `registered` is when the register recorded this very file, if it did; `now` is the time of judging, with
    its zone. Raises InputError for a trust list that can't be read.
    """
    check_needed(needed)
    trusting = _Trusting(
        signers=read_trust(trust, where="trust list"),
        time_servers=read_trust(time_trust, where="trust list of time servers"),
        registered=None if registered is None else Proof(at=registered, by="the register"),
        now=now,
    )
    try:
        held = held_signatures(pdf)
    except Flaw as flaw:
        return _broken(pdf, flaw.reason)
    if not held:
        return SignaturesReport(judgement=_UNSIGNED.judgement, reasons=(_UNSIGNED,), signatures=())
    reports = tuple(_judged(one, held[:index], trusting) for index, one in enumerate(held))
    given = {one.field.name for one in held}
    missing = tuple(
        Reason(
            cause=Cause.MISSING,
            judgement=Judgement.NOT_ESTABLISHED,
            says=f"The signature {role} isn't there, and the works asks for it.",
        )
        for role in needed
        if role not in given
    )
    every = (*missing, *(reason for report in reports for reason in report.reasons))
    return SignaturesReport(judgement=worst(every), reasons=missing, signatures=reports)


def _judged(one: HeldSignature, before: Sequence[HeldSignature], trusting: _Trusting) -> SignatureReport:
    """One signature by trust, time and persons; every reason against it, not only the first."""
    reasons: list[Reason] = [] if one.field.flaw is None else [one.field.flaw.reason]
    chain = [one.container.certificate]
    proof = None
    try:
        chain.append(vouching(one.container.certificate, trusting.signers))
        check_others(one.container, trusting.signers)
        check_signing_use(one.container.certificate)
    except Flaw as flaw:
        reasons.append(flaw.reason)
    try:
        proof = trusting.registered
        if one.token is not None:
            stamped = proven_time(one.token, trusting.time_servers)
            proof = stamped if proof is None or stamped.at < proof.at else proof
        check_time(chain, claimed=one.field.claimed, proof=proof, now=trusting.now)
    except Flaw as flaw:
        reasons.append(flaw.reason)
    reasons.extend(_against_earlier(one, before))
    digest = one.container.certificate.fingerprint(hashes.SHA256()).hex()
    return SignatureReport(
        meaning=one.field.name,
        person=one.person.name,
        certificate=digest,
        trusted_by=common_name(chain[1]) if len(chain) > 1 else "",
        claimed=one.field.claimed,
        proven=None if proof is None else proof.at,
        proven_by="" if proof is None else proof.by,
        judgement=worst(reasons),
        reasons=tuple(reasons),
    )


def _against_earlier(one: HeldSignature, before: Sequence[HeldSignature]) -> Iterator[Reason]:
    """What doesn't go with the signatures before: the person, the order, the time."""
    same = clash(one.field.name, one.person, ((other.field.name, other.person) for other in before))
    if same:
        yield Reason(cause=Cause.PERSONS, judgement=Judgement.BAD, says=same)
    if not before:
        return
    last = before[-1].field
    if ROLES.index(one.field.name) < ROLES.index(last.name):
        yield Reason(
            cause=Cause.ORDER,
            judgement=Judgement.BAD,
            says=f"It was signed as {one.field.name} after {last.name}.",
        )
    if one.field.claimed + CLOCKS_APART < last.claimed:
        yield Reason(
            cause=Cause.ORDER,
            judgement=Judgement.NOT_ESTABLISHED,
            says=f"It claims an earlier time than {last.name}, which was there before it.",
        )


def _broken(pdf: bytes, reason: Reason) -> SignaturesReport:
    """A file whose bytes don't hold: of each signature only whether what it covers is unchanged."""
    reports = []
    for signed in signed_ranges(pdf):
        person, certificate, own = "", "", _LATER
        try:
            container, _ = held_container(pdf, signed)
        except Flaw as flaw:
            own = flaw.reason
        else:
            person = common_name(container.certificate)
            certificate = container.certificate.fingerprint(hashes.SHA256()).hex()
        reports.append(
            SignatureReport(
                meaning="",
                person=person,
                certificate=certificate,
                trusted_by="",
                claimed=None,
                proven=None,
                proven_by="",
                judgement=own.judgement,
                reasons=(own,),
            )
        )
    return SignaturesReport(judgement=reason.judgement, reasons=(reason,), signatures=tuple(reports))
