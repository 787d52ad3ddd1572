"""Judges a pack three ways apart: its signatures, its content, and whether it is current.

Good, bad, or not established; what can't be judged gets no good word. The content is judged by making the
pack again from what travels in it: the same bytes, up to the first signature, say that this engine made it
from this data, pages and all.
"""

from __future__ import annotations

import json
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from datetime import datetime
from pathlib import Path
from typing import Any

from sheets import ENGINE
from sheets.errors import ExitStatus, InputError, JamnutError, Problem
from sheets.machine.loading import Sources, load_site
from sheets.machine.site import Site
from sheets.pages.attached import attachments_in
from sheets.pages.compose.matter import Matter
from sheets.pages.document import IssueContext, Layout
from sheets.pipeline.attaching import (
    CONTENT_NAME,
    ISSUE_NAME,
    JOB_NAME,
    MACHINE_NAME,
    SITE_NAME,
    WALKDOWN_NAME,
    issue_of,
    layout_of,
)
from sheets.pipeline.computing import steps, task_of
from sheets.pipeline.describing import check_sources
from sheets.pipeline.issuing import file_digest
from sheets.pipeline.printing import pack, whole_content
from sheets.register.currency import Currency, Standing, currency_of
from sheets.register.store import open_register
from sheets.seal.canonical import digest
from sheets.seal.signatures import judge_signatures
from sheets.seal.signatures_report import Judgement, SignaturesReport
from sheets.wording.as_json import Json
from sheets.wording.verification import Judged, sentences, verification_lines


@dataclass(frozen=True, kw_only=True)
class ContentReport:
    """Whether a pack was made from the data that travels in it, by this engine."""

    judgement: Judgement
    reason: str
    """Names its sentence."""
    printed: str = ""
    """Digest of the content that travels in the pack."""


@dataclass(frozen=True, kw_only=True)
class CurrencyReport:
    """Whether a pack is the current one, as the register says."""

    judgement: Judgement
    currency: Currency | None
    """None where no register was within reach."""


@dataclass(frozen=True, kw_only=True)
class Verification:
    """One file, judged."""

    file: Path
    signatures: SignaturesReport
    content: ContentReport
    currency: CurrencyReport

    @property
    def status(self) -> ExitStatus:
        """Bad anywhere is 1; anything not established is 3."""
        words = {self.signatures.judgement, self.content.judgement, self.currency.judgement}
        if Judgement.BAD in words:
            return ExitStatus.REFUSED
        return ExitStatus.NOT_ESTABLISHED if Judgement.NOT_ESTABLISHED in words else ExitStatus.GOOD


def verify(file: Path, *, site_file: Path | None, register_file: Path | None, now: datetime) -> Verification:
    """Judges one file. Trust comes from the site file of whoever verifies, never from the pack itself.

    Raises InputError for a file, a site or a register that can't be read at all.
    """
    data = _bytes_of(file)
    site = load_site(site_file).site if site_file is not None else None
    trust = _trust(site, site_file)
    held = attachments_in(data)
    currency = _currency(held, data, register_file)
    registered = _registered(currency.currency, data)
    signatures = judge_signatures(
        data,
        trust=trust,
        now=now,
        needed=site.signatures.needed if site else ("prepared", "approved"),
        registered=registered,
    )
    only_signed = bool(signatures.signatures) and signatures.judgement is not Judgement.BAD
    return Verification(
        file=file,
        signatures=signatures,
        content=judge_content(data, held, only_signed=only_signed),
        currency=currency,
    )


def judge_content(data: bytes, held: Mapping[str, bytes], *, only_signed: bool) -> ContentReport:
    """Makes the pack again from what travels in it, and compares every byte before the first signature.

    ``only_signed``: whatever was added since is known to be signatures and nothing else. Without that, the
    file must be the pack as it was printed, to the last byte.
    """
    missing = {MACHINE_NAME, JOB_NAME, CONTENT_NAME} - set(held)
    if missing:
        return ContentReport(judgement=Judgement.NOT_ESTABLISHED, reason="nothing_travels")
    printed = digest(held[CONTENT_NAME])
    try:
        job = json.loads(held[JOB_NAME])
        if str(job["engine"]) != str(ENGINE):
            return ContentReport(judgement=Judgement.NOT_ESTABLISHED, reason="other_engine", printed=printed)
        made = remade(held, job)
        same_content = whole_content(made).data == held[CONTENT_NAME]
        issue = issue_of(json.loads(held[ISSUE_NAME])) if ISSUE_NAME in held else None
        as_printed = any(
            data == fresh or (only_signed and data.startswith(fresh))
            for fresh in _printed_again(made, layout_of(job), issue)
        )
    except (JamnutError, KeyError, TypeError, ValueError):
        return ContentReport(judgement=Judgement.BAD, reason="not_made_from_this", printed=printed)
    if not same_content:
        return ContentReport(judgement=Judgement.BAD, reason="not_made_from_this", printed=printed)
    if as_printed:
        return ContentReport(judgement=Judgement.GOOD, reason="made_from_this", printed=printed)
    return ContentReport(judgement=Judgement.NOT_ESTABLISHED, reason="other_pages", printed=printed)


def _printed_again(made: Matter, layout: Layout, issue: IssueContext | None) -> Iterator[bytes]:
    """The pack as it would be printed today: to be signed by key, and for ink."""
    yield pack(made, layout, issue)
    if issue is not None:
        yield pack(made, layout, issue, fillable=False)


def remade(held: Mapping[str, bytes], job: Mapping[str, Any]) -> Matter:
    """The job of a pack, computed again from the files that travel in it. Raises as the stages do."""
    described = check_sources(
        Sources(machine=held[MACHINE_NAME], site=held.get(SITE_NAME), walkdown=held.get(WALKDOWN_NAME))
    )
    return steps(described, task_of(described, job["task"], job["part"] or None))


def remade_with_digest(data: bytes) -> tuple[Matter, str]:
    """The job of a pack and the digest of its content. Raises InputError where it isn't what was made."""
    held = attachments_in(data)
    report = judge_content(data, held, only_signed=True)  # signing judges what was added since
    if report.judgement is not Judgement.GOOD:
        raise InputError(
            Problem(
                where="file",
                what="It can't be made again, to the byte, from what travels in it.",
                fix="See what jamnut verify says of it, and issue it anew.",
            )
        )
    return remade(held, json.loads(held[JOB_NAME])), report.printed


def _currency(held: Mapping[str, bytes], data: bytes, register_file: Path | None) -> CurrencyReport:
    """What the register says of this record; a file that it doesn't know of is never current."""
    if register_file is None or ISSUE_NAME not in held:
        return CurrencyReport(judgement=Judgement.NOT_ESTABLISHED, currency=None)
    issue = issue_of(json.loads(held[ISSUE_NAME]))
    with open_register(register_file, read_only=True) as register:
        found = currency_of(register, issue.record_id)
    if found.standing is Standing.NOT_ESTABLISHED:
        return CurrencyReport(judgement=Judgement.NOT_ESTABLISHED, currency=found)
    issued = found.revision.issue if found.revision else None
    current = (
        found.standing is Standing.CURRENT
        and issued is not None
        and issued.content_digest == digest(held[CONTENT_NAME])
        and (issued.file_digest == file_digest(data))
    )
    return CurrencyReport(judgement=Judgement.GOOD if current else Judgement.BAD, currency=found)


def _registered(currency: Currency | None, data: bytes) -> datetime | None:
    """When the register recorded this very file, if it did."""
    revision = currency.revision if currency is not None else None
    if revision is None or revision.issue is None or revision.issue.file_digest != file_digest(data):
        return None
    return revision.issue.at


def _trust(site: Site | None, site_file: Path | None) -> Sequence[str]:
    """Certificates that the verifying site trusts, from the files that its site file names."""
    if site is None or site_file is None:
        return ()
    found = []
    for name in site.signatures.trust:
        certificate = site_file.parent / name
        try:
            found.append(certificate.read_text(encoding="ascii"))
        except (OSError, UnicodeDecodeError):
            raise InputError(
                Problem(
                    where=f"{site_file.name}, signatures, trust",
                    what=f"The certificate {name} can't be read.",
                    fix="Name a PEM file beside the site file.",
                )
            ) from None
    return found


def _bytes_of(file: Path) -> bytes:
    try:
        return file.read_bytes()
    except OSError as error:
        raise InputError(
            Problem(
                where=str(file),
                what=f"The file can't be read: {error.strerror}.",
                fix="Look at the name of the file and whether you may read it.",
            )
        ) from None


def verify_text(one: Verification) -> Iterator[str]:
    """Three words apart, each with what it rests on."""
    return verification_lines(str(one.file), _parts(one))


def verify_json(one: Verification) -> dict[str, Json]:
    """The same as data."""
    parts: dict[str, Json] = {
        judged.part: {"word": judged.word, "lines": list[Json](judged.lines)} for judged in _parts(one)
    }
    return {"file": str(one.file), "status": int(one.status), **parts}


def _parts(one: Verification) -> tuple[Judged, ...]:
    return (
        Judged(part="signatures", word=one.signatures.judgement.value, lines=tuple(_signature_lines(one))),
        Judged(
            part="content",
            word=one.content.judgement.value,
            lines=(sentences().say(one.content.reason, digest=one.content.printed),),
        ),
        Judged(part="currency", word=one.currency.judgement.value, lines=(_currency_line(one),)),
    )


def _signature_lines(one: Verification) -> Iterator[str]:
    say = sentences().say
    for report in one.signatures.signatures:
        yield say(
            "signature",
            meaning=report.meaning,
            person=report.person,
            authority=report.trusted_by,
            claimed=f"{report.claimed:%Y-%m-%d %H:%M %z}" if report.claimed else "",
            proven=f"{report.proven:%Y-%m-%d %H:%M %z}" if report.proven else "",
            by=report.proven_by,
        )
        yield from (f"    {reason.judgement.value}: {reason.says}" for reason in report.reasons)
    yield from (f"{reason.judgement.value}: {reason.says}" for reason in one.signatures.reasons)


def _currency_line(one: Verification) -> str:
    say, found = sentences().say, one.currency.currency
    if found is None:
        return say("no_register")
    if found.standing is Standing.NOT_ESTABLISHED:
        return say("broken_register", trouble=found.trouble)
    if found.revision is None:
        return say("unknown_record")
    if found.standing is Standing.CURRENT and one.currency.judgement is not Judgement.GOOD:
        return say("other_file")
    return say(
        "standing",
        document=found.revision.document,
        revision=str(found.revision.number),
        standing=found.standing.value,
        current=str(found.current.number) if found.current else "",
    )
