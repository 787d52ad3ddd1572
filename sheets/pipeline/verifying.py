"""Judges a pack three ways apart: its signatures, its content, and whether it is current.

Good, bad, or not established; what can't be judged gets no good word. The content is judged by making the
pack again from what travels in it: the same bytes, up to the first signature, say that this engine made it
from this data, pages and all.
"""

from __future__ import annotations

import json
from collections.abc import Iterator, Mapping
from dataclasses import dataclass, replace
from datetime import datetime
from pathlib import Path
from typing import Any

from sheets import ENGINE
from sheets.errors import ExitStatus, InputError, JamnutError, Problem
from sheets.machine.files import bytes_of
from sheets.machine.loading import Sources, load_site
from sheets.pages.attached import attachments_in
from sheets.pages.compose.matter import Matter
from sheets.pages.document import IssueContext, Layout
from sheets.pipeline.attaching import (
    CONTENT_NAME,
    JOB_NAME,
    MACHINE_NAME,
    SITE_NAME,
    WALKDOWN_NAME,
    issue_in,
    layout_of,
)
from sheets.pipeline.codes import CodeReport, code_lines, judge_code
from sheets.pipeline.computing import steps, task_of
from sheets.pipeline.describing import check_sources
from sheets.pipeline.issuing import file_digest
from sheets.pipeline.persons import time_trust_of, trust_of
from sheets.pipeline.printing import Content, printed, whole_content
from sheets.register.currency import Currency, Standing, currency_of
from sheets.register.opening import Place, open_register
from sheets.seal.canonical import digest
from sheets.seal.signatures import judge_signatures
from sheets.seal.signatures_report import Cause, Judgement, Reason, SignatureReport, SignaturesReport, worst
from sheets.wording.plain import Json
from sheets.wording.verification import Judged, sentences, verification_lines

_AFTER_READING = {
    Cause.MISSING,
    Cause.KEY_USAGE,
    Cause.FOREIGN,
    Cause.FORGED,
    Cause.VALIDITY,
    Cause.TIME,
    Cause.TIME_TOKEN,
    Cause.PERSONS,
    Cause.ORDER,
}
"""What may be wrong with a signature although its update brought the signature and nothing else."""


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
    reason: str
    """Names its sentence."""
    currency: Currency | None = None
    """None where no register was within reach, and for a file that is no issued pack."""


@dataclass(frozen=True, kw_only=True)
class Verification:
    """One file, judged."""

    file: Path
    issue: IssueContext | None
    """None in a draft."""
    signatures: SignaturesReport
    content: ContentReport
    currency: CurrencyReport
    code: CodeReport | None
    """None where no code was handed in."""

    @property
    def status(self) -> ExitStatus:
        """Bad anywhere is 1; anything not established is 3."""
        words = {self.signatures.judgement, self.content.judgement, self.currency.judgement}
        if self.code is not None:
            words.add(self.code.judgement)
        if Judgement.BAD in words:
            return ExitStatus.REFUSED
        return ExitStatus.NOT_ESTABLISHED if Judgement.NOT_ESTABLISHED in words else ExitStatus.GOOD


def verify(
    file: Path, *, site_file: Path | None, register_at: Place | None, now: datetime, code: str | None = None
) -> Verification:
    """Judges one file. Trust comes from the site file of whoever verifies, never from the pack itself.

    ``code``: what a reader found in the code of a page, to be held against the file. Raises InputError for a
    file, a site or a register that can't be read at all.
    """
    data = bytes_of(file)
    site = load_site(site_file).site if site_file is not None else None
    folder = site_file.parent if site_file is not None else Path()
    held = attachments_in(data)
    issue = issue_in(held)
    currency = _currency(issue, held, data, register_at)
    signatures = _as_named(
        judge_signatures(
            data,
            trust=trust_of(site, folder),
            time_trust=time_trust_of(site, folder),
            now=now,
            needed=site.signatures.needed if site else ("prepared", "approved"),
            registered=_registered(currency.currency, data),
        ),
        issue,
    )
    said = digest(held[CONTENT_NAME]) if CONTENT_NAME in held else ""
    return Verification(
        file=file,
        issue=issue,
        signatures=signatures,
        content=judge_content(data, held, only_signed=_only_signed(signatures)),
        currency=currency,
        code=None if code is None else judge_code(code, issue, said),
    )


def _only_signed(signatures: SignaturesReport) -> bool:
    """Whether all that was added since the file was printed is known to be signatures, good or not."""
    every = (*signatures.reasons, *(reason for one in signatures.signatures for reason in one.reasons))
    return bool(signatures.signatures) and all(reason.cause in _AFTER_READING for reason in every)


def _as_named(signatures: SignaturesReport, issue: IssueContext | None) -> SignaturesReport:
    """The signatures, each held against the person whom the sheets name for it."""
    names = dict(issue.signers) if issue is not None else {}
    reports = tuple(_held_to_name(one, names.get(one.meaning)) for one in signatures.signatures)
    every = (*signatures.reasons, *(reason for one in reports for reason in one.reasons))
    return replace(signatures, judgement=worst(every), signatures=reports)


def _held_to_name(report: SignatureReport, name: str | None) -> SignatureReport:
    if not report.meaning or report.person == name:
        return report
    reason = Reason(
        cause=Cause.PERSONS,
        judgement=Judgement.BAD,
        says=f"It is signed by {report.person}; the sheets name {name or 'nobody'} as {report.meaning}.",
    )
    return replace(report, judgement=Judgement.BAD, reasons=(*report.reasons, reason))


def judge_content(data: bytes, held: Mapping[str, bytes], *, only_signed: bool) -> ContentReport:
    """Makes the pack again from what travels in it, and compares every byte before the first signature.

    ``only_signed``: whatever was added since is known to be signatures and nothing else. Without that, the
    file must be the pack as it was printed, to the last byte.
    """
    missing = {MACHINE_NAME, JOB_NAME, CONTENT_NAME} - set(held)
    if missing:
        return ContentReport(judgement=Judgement.NOT_ESTABLISHED, reason="nothing_travels")
    said = digest(held[CONTENT_NAME])
    try:
        job = json.loads(held[JOB_NAME])
        if str(job["engine"]) != str(ENGINE):
            return ContentReport(judgement=Judgement.NOT_ESTABLISHED, reason="other_engine", printed=said)
        made = remade(held, job)
        again = whole_content(made)
        as_printed = again.data == held[CONTENT_NAME] and any(
            data == fresh or (only_signed and data.startswith(fresh))
            for fresh in _printed_again(again, made, layout_of(job), issue_in(held))
        )
    except (JamnutError, AttributeError, KeyError, TypeError, ValueError, RecursionError):
        # What travels in the file is anybody's: whatever it breaks, this engine doesn't make this of it.
        return ContentReport(judgement=Judgement.BAD, reason="not_made_from_this", printed=said)
    if again.data != held[CONTENT_NAME]:
        return ContentReport(judgement=Judgement.BAD, reason="not_made_from_this", printed=said)
    if as_printed:
        return ContentReport(judgement=Judgement.GOOD, reason="made_from_this", printed=said)
    return ContentReport(judgement=Judgement.NOT_ESTABLISHED, reason="other_pages", printed=said)


def _printed_again(
    again: Content, made: Matter, layout: Layout, issue: IssueContext | None
) -> Iterator[bytes]:
    """The pack as it would be printed today: to be signed by key, and for ink."""
    yield printed(again, made, layout, issue)
    if issue is not None:
        yield printed(again, made, layout, issue, fillable=False)


def remade(held: Mapping[str, bytes], job: Mapping[str, Any]) -> Matter:
    """The job of a pack, computed again from the files that travel in it. Raises as the stages do."""
    described = check_sources(
        Sources(machine=held[MACHINE_NAME], site=held.get(SITE_NAME), walkdown=held.get(WALKDOWN_NAME))
    )
    return steps(described, task_of(described, job["task"], job["part"] or None))


def remade_with_content(data: bytes) -> tuple[Matter, Content]:
    """The job of a pack and its content. Raises InputError where it isn't what was made."""
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
    made = remade(held, json.loads(held[JOB_NAME]))
    return made, whole_content(made)


def _currency(
    issue: IssueContext | None, held: Mapping[str, bytes], data: bytes, register_at: Place | None
) -> CurrencyReport:
    """What the register says of this record; one that it doesn't know may stand in another register."""
    if issue is None:
        return CurrencyReport(judgement=Judgement.NOT_ESTABLISHED, reason="no_issue")
    if register_at is None:
        return CurrencyReport(judgement=Judgement.NOT_ESTABLISHED, reason="no_register")
    with open_register(register_at, read_only=True) as register:
        found = currency_of(register, issue.record_id)
    if found.standing is Standing.NOT_ESTABLISHED:
        return CurrencyReport(judgement=Judgement.NOT_ESTABLISHED, reason="broken_register", currency=found)
    if found.revision is None:
        return CurrencyReport(judgement=Judgement.NOT_ESTABLISHED, reason="unknown_record", currency=found)
    if found.standing is not Standing.CURRENT:
        return CurrencyReport(judgement=Judgement.BAD, reason="standing", currency=found)
    issued = found.revision.issue
    same = (
        issued is not None
        and CONTENT_NAME in held
        and issued.content_digest == digest(held[CONTENT_NAME])
        and issued.file_digest == file_digest(data)
    )
    return CurrencyReport(
        judgement=Judgement.GOOD if same else Judgement.BAD,
        reason="standing" if same else "other_file",
        currency=found,
    )


def _registered(currency: Currency | None, data: bytes) -> datetime | None:
    """When the register recorded this very file, if it did."""
    revision = currency.revision if currency is not None else None
    if revision is None or revision.issue is None or revision.issue.file_digest != file_digest(data):
        return None
    return revision.issue.at


def verify_text(one: Verification) -> Iterator[str]:
    """Three words apart, each with what it rests on."""
    return verification_lines(str(one.file), tuple(_parts(one)))


def verify_json(one: Verification) -> dict[str, Json]:
    """The same as data."""
    parts: dict[str, Json] = {
        judged.part: {"word": judged.word, "lines": list[Json](judged.lines)} for judged in _parts(one)
    }
    record: Json = None
    if one.issue is not None:
        record = {
            "record_id": one.issue.record_id,
            "revision": one.issue.revision,
            "digest": one.content.printed or None,
        }
    return {"format": 1, "file": str(one.file), "status": int(one.status), "record": record, **parts}


def verify_failed_json(file: Path, error: JamnutError) -> dict[str, Json]:
    """As data, a file that couldn't be judged at all."""
    problems: list[Json] = [
        {"where": problem.where, "what": problem.what, "fix": problem.fix} for problem in error.problems
    ]
    return {"format": 1, "file": str(file), "status": int(error.status), "problems": problems}


def _parts(one: Verification) -> Iterator[Judged]:
    say = sentences().say
    yield Judged(
        part="signatures", word=one.signatures.judgement.value, lines=tuple(_signature_lines(one.signatures))
    )
    yield Judged(
        part="content",
        word=one.content.judgement.value,
        lines=(say(one.content.reason, digest=one.content.printed),),
    )
    yield Judged(part="currency", word=one.currency.judgement.value, lines=(_currency_line(one.currency),))
    if one.code is not None:
        yield Judged(part="code", word=one.code.judgement.value, lines=code_lines(one.code))


def _signature_lines(signatures: SignaturesReport) -> Iterator[str]:
    say = sentences().say
    for report in signatures.signatures:
        yield say(
            "signature",
            meaning=report.meaning or say("some_signature"),
            person=report.person or say("nobody_named"),
            authority=report.trusted_by,
            claimed=f"{report.claimed:%Y-%m-%d %H:%M %z}" if report.claimed else "",
            proven=f"{report.proven:%Y-%m-%d %H:%M %z}" if report.proven else "",
            by=report.proven_by,
        )
        yield from (f"    {reason.judgement.value}: {reason.says}" for reason in report.reasons)
    yield from (f"{reason.judgement.value}: {reason.says}" for reason in signatures.reasons)


def _currency_line(report: CurrencyReport) -> str:
    say, found = sentences().say, report.currency
    if found is None or found.revision is None:
        return say(report.reason, trouble=found.trouble if found else "")
    if report.reason == "other_file":
        return say("other_file")
    return say(
        "standing",
        document=found.revision.document,
        revision=str(found.revision.number),
        standing=found.standing.value,
        why=found.revision.reason,
        current=str(found.current.number) if found.current else "",
    )
