"""From a job in words to the content of its pack, its digest and its PDF."""

from __future__ import annotations

from collections.abc import Sequence
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
from sheets.pipeline.attaching import attachments_of
from sheets.pipeline.computing import findings_of_job, status_of
from sheets.pipeline.replacing import keep_issued
from sheets.seal.canonical import canonical_bytes, digest
from sheets.wording.obstacles import refusals


@dataclass(frozen=True, kw_only=True)
class Content:
    """What a pack says."""

    document: Document
    data: bytes
    """Its canonical form, without the names and dates of a walk-down."""
    digest: str
    """Of the data, as printed."""


def whole_content(matter: Matter) -> Content:
    """The content of the pack, its canonical form and the printed digest of that.

    Raises RefusedError or NotEstablishedError, with what stands against it, where the job doesn't hold.
    """
    _hold(matter)
    document = compose(matter)
    walked = matter.walkdown is not None and matter.walkdown.touched
    # Names and dates are no part of the content: the digest is that of the sheets before any walk-down.
    data = canonical_bytes(compose(replace(matter, walkdown=None)) if walked else document)
    return Content(document=document, data=data, digest=digest(data))


def content(matter: Matter) -> tuple[Document, str]:
    """The content of the pack and its printed digest. Raises as `whole_content` does."""
    said = whole_content(matter)
    return said.document, said.digest


def pack(
    matter: Matter, layout: Layout, issue: IssueContext | None = None, *, fillable: bool = True
) -> bytes:
    """The pack as PDF bytes, with what it was made from attached; a draft without an issue context.

    ``fillable``: whether an issued pack gets fields to sign by key. Raises as `whole_content` and `place` do.
    """
    return printed(whole_content(matter), matter, layout, issue, fillable=fillable)


def printed(
    said: Content, matter: Matter, layout: Layout, issue: IssueContext | None = None, *, fillable: bool = True
) -> bytes:
    """The pack of a content that was made before; ``fillable`` as in `pack`. Raises as `place` does."""
    return print_pack(
        said.document,
        layout=layout,
        digest=said.digest,
        issue=issue,
        attachments=attachments_of(matter, layout, said.data, issue),
        fillable=fillable,
    )


def layout_named(paper: Literal["A4", "Letter"], only: Sequence[str] = ()) -> Layout:
    """The layout that a command names; ``only``: documents to print, the whole pack if there are none."""
    return Layout(paper=paper, kinds=tuple(SheetKind(name) for name in only) or tuple(SheetKind))


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
    said = whole_content(matter)
    keep_issued(target)
    layout = layout_named(paper, only)
    pages = place(said.document, layout, digest=said.digest)
    attachments = attachments_of(matter, layout, said.data)
    write_pdf(target, pdf_bytes(pages, said.document, attachments=attachments))
    return Written(pages=len(pages), digest=said.digest)


def _hold(matter: Matter) -> None:
    """Nothing is printed for a job that doesn't hold."""
    status = status_of(matter.targets, matter.procedure, matter.replay)
    if status is ExitStatus.GOOD:
        return
    problems = refusals(matter.speaker, findings_of_job(matter))
    raise (RefusedError if status is ExitStatus.REFUSED else NotEstablishedError)(*problems)
