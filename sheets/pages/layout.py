"""From a document to placed pages: a pure function, before any ink."""

from __future__ import annotations

import re
from dataclasses import dataclass

from sheets.errors import InputError, Problem
from sheets.pages.blocks.boxes import Signing
from sheets.pages.code import matrix, record_url
from sheets.pages.document import Document, IssueContext, Layout, Section, SettingTag, SheetKind, TagSheet
from sheets.pages.flow import fill, units_of
from sheets.pages.frame import Frame, Paper, banner, footer, head
from sheets.pages.ink import Ink
from sheets.pages.look import MARGIN_TOP, PAPERS
from sheets.pages.placed import MM, PlacedPage
from sheets.pages.roles import HEADER, element
from sheets.pages.tags import tag_page, tag_pages
from sheets.pages.titleblock import title_block

DIGEST = re.compile(r"^[0-9A-HJKMNP-TV-Z]{16}$")
"""16 characters of Crockford's base32."""

BANNER_GAP = 4.5 * MM


@dataclass(frozen=True, kw_only=True)
class Planned:
    """A page before its number of pages is known."""

    section: Section
    place: int
    """Of its section in the document."""
    first: bool
    body: Ink | None
    """Content from (0, 0); None on a page of tags."""
    tags: tuple[SettingTag, ...] = ()


def grouped(digest: str) -> str:
    """A content digest as printed, in groups of four.

    Raises InputError when it isn't 16 characters of Crockford's base32, grouped or not.
    """
    plain = digest.replace("-", "")
    if not DIGEST.match(plain):
        raise InputError(
            Problem(
                where="content digest",
                what=f"“{digest}” isn't 16 characters of Crockford's base32",
                fix="hand in the digest of this document's content",
            )
        )
    return "-".join(plain[start : start + 4] for start in range(0, 16, 4))


def top_of(frame: Frame, section: Section, ink: Ink, *, first: bool) -> float:
    """Banner and head of a page; returns where its content begins."""
    y = MARGIN_TOP
    with ink.inside(*() if first else (HEADER,)):
        if section.banner is not None:
            y = banner(ink, frame, section.banner, y) + BANNER_GAP
        return head(ink, frame, section, y, first=first)


def planned(frame: Frame, section: Section, signing: Signing, *, place: int, cover: bool) -> list[Planned]:
    """The pages of one section: what flows, with the title block on the cover, then its tags.

    `place` is that of the section in the document.
    """
    tags = [tag for block in section.blocks if isinstance(block, TagSheet) for tag in block.tags]
    flowing = [block for block in section.blocks if not isinstance(block, TagSheet)]
    pages: list[Planned] = []
    if flowing or not tags:
        tops = {first: top_of(frame, section, Ink(), first=first) for first in (True, False)}
        units = units_of(flowing, frame.paper.inner, signing)
        if cover:
            units.append(title_block(frame, frame.paper.inner))
        bodies = fill(units, lambda index: frame.paper.floor - tops[index == 0])
        pages = [
            Planned(section=section, place=place, first=index == 0, body=body)
            for index, body in enumerate(bodies)
        ]
    pages.extend(
        Planned(section=section, place=place, first=not pages and index == 0, body=None, tags=group)
        for index, group in enumerate(tag_pages(tags, frame))
    )
    return pages


def inked(frame: Frame, page: Planned, *, number: int, total: int) -> PlacedPage:
    """A planned page with its frame and numbers."""
    ink = Ink()
    with ink.inside(element("Sect", page.place)):
        if page.body is None:
            tag_page(ink, page.tags, frame, page.section, number=number, total=total, first=page.first)
        else:
            y = top_of(frame, page.section, ink, first=page.first)
            ink.add(page.body.piece(0), frame.paper.left, y)
            heard = page.first and page.section.kind is SheetKind.COVER
            footer(ink, frame, number=number, total=total, heard=heard)
    return PlacedPage(
        number=number,
        total=total,
        kind=page.section.kind,
        width=frame.paper.width,
        height=frame.paper.height,
        bookmark=page.section.bookmark if page.first else None,
        items=tuple(ink.items),
        marks=tuple(ink.marks),
    )


def place(
    document: Document, layout: Layout, issue: IssueContext | None = None, *, digest: str
) -> tuple[PlacedPage, ...]:
    """Place a document on pages.

    `digest` is the content digest, 16 characters of Crockford's base32. Pages are numbered over the whole
    pack, also where `layout.kinds` asks for some of its documents only. Without an issue the pages are those
    of a draft: no code, nothing to sign.

    Raises InputError when something doesn't fit on a page or tag, when a character has no glyph, when a face
    doesn't hold its own numbers, and when the address in the code is too long.
    """
    width, height = PAPERS[layout.paper]
    plain = grouped(digest).replace("-", "")
    frame = Frame(
        document=document,
        paper=Paper(width=width, height=height),
        digest=grouped(digest),
        issue=issue,
        code=matrix(record_url(issue, plain)) if issue else None,
    )
    signing = Signing(draft=issue is None, not_signed=document.words.not_signed)
    covers = [section for section in document.sections if section.kind is SheetKind.COVER]
    pages: list[Planned] = []
    for index, section in enumerate(document.sections):
        pages.extend(planned(frame, section, signing, place=index, cover=section in covers[:1]))
    placed = [inked(frame, page, number=index, total=len(pages)) for index, page in enumerate(pages, start=1)]
    return tuple(page for page in placed if page.kind in layout.kinds)
