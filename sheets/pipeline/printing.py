"""From a job in words to the content of its pack, its digest and its PDF."""

from __future__ import annotations

from dataclasses import dataclass, replace
from pathlib import Path
from typing import Literal

from sheets.errors import ExitStatus, NotEstablishedError, RefusedError
from sheets.machine.files import write_pdf
from sheets.machine.model import Machine
from sheets.pages.compose.matter import Matter
from sheets.pages.compose.pack import compose
from sheets.pages.document import Document, IssueContext, Layout, SheetKind
from sheets.pages.layout import place
from sheets.pages.press import pdf_bytes, print_pack
from sheets.pipeline.computing import findings_of_job, status_of
from sheets.seal.canonical import canonical_bytes, digest
from sheets.wording.obstacles import refusals


def content(matter: Matter) -> tuple[Document, str]:
    """The content of the pack and its printed digest.

    Raises RefusedError or NotEstablishedError, with what stands against it, where the job doesn't hold.
    """
    _hold(matter)
    document = compose(matter)
    if matter.walkdown is None or not matter.walkdown.touched:
        return document, digest(canonical_bytes(document))
    # Names and dates are no part of the content: the digest is that of the sheets before any walk-down.
    return document, digest(canonical_bytes(compose(replace(matter, walkdown=None))))


def pack(matter: Matter, layout: Layout, issue: IssueContext | None = None) -> bytes:
    """The pack as PDF bytes; a draft without an issue context. Raises as `content` and `place` do."""
    document, printed = content(matter)
    return print_pack(document, layout=layout, digest=printed, issue=issue)


def draft_name(machine: Machine) -> str:
    """Name of a draft's file where none is given."""
    return f"{machine.tag}-draft.pdf"


@dataclass(frozen=True, kw_only=True)
class Written:
    """What a pack command wrote."""

    pages: int
    digest: str


def write_pack(
    matter: Matter, target: Path, *, paper: Literal["A4", "Letter"], only: tuple[str, ...]
) -> Written:
    """Places and draws a draft and moves it into place.

    ``only``: names of the documents to print; the whole pack if there are none. Raises InputError, and
    RefusedError or NotEstablishedError where nothing may be printed.
    """
    document, printed = content(matter)
    kinds = tuple(SheetKind(name) for name in only) or tuple(SheetKind)
    pages = place(document, Layout(paper=paper, kinds=kinds), digest=printed)
    write_pdf(target, pdf_bytes(pages, document))
    return Written(pages=len(pages), digest=printed)


def _hold(matter: Matter) -> None:
    """Nothing is printed for a job that doesn't hold."""
    status = status_of(matter.targets, matter.procedure, matter.replay)
    if status is ExitStatus.GOOD:
        return
    problems = refusals(matter.speaker, findings_of_job(matter))
    raise (RefusedError if status is ExitStatus.REFUSED else NotEstablishedError)(*problems)
