"""What the register says on one day, as a document: lists under their titles, each line with its event."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from datetime import date
from typing import Final

from sheets.pages.document import (
    Block,
    Document,
    KeyLines,
    PageWords,
    Paragraph,
    Section,
    SheetKind,
    Table,
)
from sheets.pages.fonts import coded

FRONT: Final = "What the register says"
LONGEST_CELL: Final = 240
"""Signs; a row is never cut by a page, so no cell may be as long as a reason can be."""
CUT: Final = "A text that ends in … is longer; the CSV files hold it whole."


@dataclass(frozen=True, kw_only=True)
class AuditList:
    """One list: what it is of, and its lines as they are printed. The first column is the event."""

    name: str
    """Short, for files."""
    title: str
    light: str
    """Said beside the title."""
    head: tuple[str, ...]
    rows: tuple[tuple[str, ...], ...]
    shares: tuple[float, ...]
    """Width of each column as a share of the whole; sums to 1."""
    none: str
    """Said in its place where it has no line: an empty list is an answer."""
    section: str = ""
    """Title of the pages that begin with it; empty where it stands on those of the list before."""


def audit_document(
    *,
    register: str,
    day: date,
    engine: str,
    facts: Sequence[tuple[str, str]],
    notes: Sequence[str],
    lists: Sequence[AuditList],
) -> Document:
    """The lists as a document of their own: no pack, no draft, nothing to sign.

    ``register``: which one, in words; ``facts``: what all of it rests on; ``notes`` stand below.
    """
    return Document(
        number=f"Audit {day.isoformat()}",
        title=coded(register),
        language="en",
        data_dated=day.isoformat(),
        engine=engine,
        sections=tuple(_sections(register, day, facts, notes, lists)),
        footer="Each line names the event that it follows from.",
        words=PageWords(draft="AUDIT", not_issued=f"as of {day.isoformat()}", machine_data="register as of"),
    )


def _sections(
    register: str,
    day: date,
    facts: Sequence[tuple[str, str]],
    notes: Sequence[str],
    lists: Sequence[AuditList],
) -> list[Section]:
    front: tuple[Block, ...] = (
        KeyLines(rows=tuple(facts)),
        *(Paragraph(text=note, weight="small") for note in (*notes, *_cut(lists))),
    )
    groups: list[tuple[str, list[Block]]] = [(FRONT, list(front))]
    for one in lists:
        if one.section:
            groups.append((one.section, []))
        groups[-1][1].append(_block(one))
    return [
        Section(
            kind=SheetKind.RECORD,
            bookmark=title,
            title=title,
            subject=day.isoformat(),
            lines=(coded(register),),
            banner=None,
            blocks=tuple(blocks),
        )
        for title, blocks in groups
    ]


def _block(one: AuditList) -> Block:
    if one.rows:
        rows = tuple(tuple(map(_cell, row)) for row in one.rows)
        return Table(title=one.title, head=one.head, rows=rows, shares=one.shares, light=one.light)
    return Paragraph(text=f"{one.title}: {one.none}", weight="strong")


def _cell(text: str) -> str:
    short = text if len(text) <= LONGEST_CELL else f"{text[: LONGEST_CELL - 1]}…"
    return coded(short)


def _cut(lists: Sequence[AuditList]) -> tuple[str, ...]:
    cut = any(len(cell) > LONGEST_CELL for one in lists for row in one.rows for cell in row)
    return (CUT,) if cut else ()
