"""Holds what a reader found in the code of a page against a file: a code can be pasted over, or copied."""

from __future__ import annotations

import re
from dataclasses import dataclass
from typing import Final

from sheets.errors import quoted
from sheets.pages.code import record_url
from sheets.pages.document import IssueContext
from sheets.seal.signatures_report import Judgement
from sheets.wording.verification import sentences

_PARTS: Final = re.compile(
    r"(?P<address>https?://.{1,200})/r/(?P<record>[^/?&]{1,40})\?d=(?P<content>[^&]{1,40})&v=(?P<revision>.{1,20})"
)


@dataclass(frozen=True, kw_only=True)
class Scanned:
    """What the code of a page says."""

    record: str
    content: str
    """First characters of the content digest."""
    revision: str


def record_of_code(text: str) -> Scanned | None:
    """What a reader found in a code, or None for a text that isn't of its form."""
    found = _PARTS.fullmatch(text.strip())
    if found is None:
        return None
    return Scanned(record=found["record"], content=found["content"], revision=found["revision"])


@dataclass(frozen=True, kw_only=True)
class Mismatch:
    """One part of a code that isn't the file's."""

    part: str
    """address, record, content, revision."""
    scanned: str
    held: str


@dataclass(frozen=True, kw_only=True)
class CodeReport:
    """Whether a code belongs to a file."""

    judgement: Judgement
    reason: str
    """Names its sentence; empty where the mismatches say it."""
    mismatches: tuple[Mismatch, ...] = ()


def judge_code(scanned: str, issue: IssueContext | None, content_digest: str) -> CodeReport:
    """What a reader found in a code, against the issue and the content digest of a file.

    Good only where it is the file's own code, to the letter: a reader gives the bytes, nobody types them.
    """
    if issue is None or not content_digest:
        return CodeReport(judgement=Judgement.NOT_ESTABLISHED, reason="code_without_issue")
    if scanned == record_url(issue, content_digest):
        return CodeReport(judgement=Judgement.GOOD, reason="code_fits")
    theirs = _PARTS.fullmatch(scanned)
    ours = _PARTS.fullmatch(record_url(issue, content_digest))
    if theirs is None or ours is None:
        return CodeReport(judgement=Judgement.BAD, reason="code_of_another_form")
    return CodeReport(
        judgement=Judgement.BAD,
        reason="",
        mismatches=tuple(
            Mismatch(part=part, scanned=quoted(text), held=quoted(ours[part]))
            for part, text in theirs.groupdict().items()
            if text != ours[part]
        ),
    )


def code_lines(report: CodeReport) -> tuple[str, ...]:
    """The same in words."""
    say = sentences().say
    if report.reason:
        return (say(report.reason),)
    return tuple(say(f"code_{one.part}", scanned=one.scanned, held=one.held) for one in report.mismatches)
