"""Ruled tables: rows are never cut, and the head repeats on each page."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

from sheets.pages.blocks.boxes import Signing
from sheets.pages.document import Table
from sheets.pages.fonts import ASCENT
from sheets.pages.ink import Ink, Piece
from sheets.pages.look import BODY, CELL, CELL_HEAD, HAIRLINE, HEADING, LABEL, RULE
from sheets.pages.placed import MM, Mark
from sheets.pages.roles import HEADER, Element, element
from sheets.pages.text import Style, wrap

PAD_X = 1.4 * MM
PAD_Y = 1.0 * MM
BLANK_HEIGHT = 9.5 * MM
TITLE = HEADING[2]
TABLE = element("Table")


def edges_of(table: Table, width: float) -> list[float]:
    """Left edges of the columns, and the right edge of the last."""
    edges = [0.0]
    for share in table.shares:
        edges.append(edges[-1] + share * width / sum(table.shares))
    return edges


def cells(
    ink: Ink,
    texts: Sequence[str],
    edges: Sequence[float],
    top: float,
    shape: Style,
    *,
    inset: bool,
    row: Element,
) -> float:
    """Texts in their columns; returns the bottom edge of the longest. Without uprights the first is flush."""
    bottom = top
    for column, (text, left, right) in enumerate(zip(texts, edges, edges[1:], strict=False)):
        pad = PAD_X if inset or left > 0 else 0.0
        with ink.inside(TABLE, row, element("TH" if row.head else "TD", column)):
            bottom = max(bottom, ink.paragraph(left + pad, top, right - left - pad - PAD_X, text, shape))
    return bottom


def head_piece(table: Table, edges: Sequence[float], *, title: bool) -> Piece:
    """Title and column heads, closed by a rule."""
    ink = Ink()
    width = edges[-1]
    y = 0.0
    if title and table.title:
        lines = wrap(table.title, TITLE, width)
        with ink.inside(TABLE, element("Caption")):
            y = ink.lines(0, 0, lines, TITLE)
            if table.light:
                x = TITLE.width(lines[-1]) + 4 * MM
                if x + BODY.width(table.light) <= width:
                    ink.text(x, y - TITLE.leading + ASCENT * TITLE.size, table.light, BODY)
                else:
                    y = ink.paragraph(0, y, width, table.light, BODY)
        y += 1 * MM
    if any(table.head):
        uprights = table.blank_rows > 0
        row = Element(type="TR", key="head", columns=len(table.head), head=True)
        y = cells(ink, table.head, edges, y + PAD_Y * 0.5, CELL_HEAD, inset=uprights, row=row) + PAD_Y * 0.7
    ink.line(0, y, width, y, RULE)
    ink.mark(Mark(kind="table head", key=table.title, x=0, y=0, width=width, height=y))
    return ink.piece(y, name=table.title)


def row_piece(
    table: Table, edges: Sequence[float], texts: Sequence[str], height: float, *, key: str, last: bool
) -> Piece:
    """One row, with a line below it; with uprights where the table is to be written in."""
    ink = Ink()
    uprights = table.blank_rows > 0
    row = Element(type="TR", key=key, columns=len(edges) - 1)
    bottom = cells(Ink(), texts, edges, PAD_Y, CELL, inset=uprights, row=row) + PAD_Y * 0.6
    height = max(bottom, height)
    cells(ink, texts, edges, PAD_Y + (height - bottom) / 2, CELL, inset=uprights, row=row)
    if uprights:
        for edge in edges:
            ink.line(edge, 0, edge, height, HAIRLINE)
    ink.line(0, height, edges[-1], height, RULE if last else HAIRLINE)
    ink.mark(Mark(kind="row", key=key, x=0, y=0, width=edges[-1], height=height))
    return ink.piece(height, name=" ".join(texts) or table.title)


def unsigned_piece(edges: Sequence[float], height: float, signing: Signing) -> Piece:
    """The room of rows to sign, in a draft."""
    ink = Ink()
    columns = len(edges) - 1
    row = Element(type="TR", key="unsigned", columns=columns)
    with ink.inside(TABLE, row, Element(type="TD", span=columns)):
        ink.text(PAD_X, PAD_Y * 2 + ASCENT * LABEL.size, signing.not_signed, LABEL)
    ink.line(0, height, edges[-1], height, RULE)
    ink.mark(Mark(kind="row", key="unsigned", x=0, y=0, width=edges[-1], height=height))
    return ink.piece(height, name=signing.not_signed)


def table_pieces(table: Table, width: float, signing: Signing) -> list[Piece]:
    """Head with the first row, then row by row; each knows how it begins a page."""
    edges = edges_of(table, width)
    least = (table.row_height_mm or 0.0) * MM
    blank = (table.row_height_mm * MM) if table.row_height_mm else BLANK_HEIGHT
    total = len(table.rows) + table.blank_rows
    rows: list[Piece] = []
    for index, texts in enumerate(table.rows):
        rows.append(
            row_piece(table, edges, texts, least, key=f"{table.title} {index}", last=index == total - 1)
        )
    unsigned = unsigned_piece(edges, blank, signing)
    for index in range(len(table.rows), total):
        if table.signed and signing.draft:
            rows.append(unsigned if index == len(table.rows) else hollow(blank))
        else:
            rows.append(
                row_piece(table, edges, (), blank, key=f"{table.title} {index}", last=index == total - 1)
            )
    first = head_piece(table, edges, title=True)
    again = head_piece(table, edges, title=False).within(HEADER)
    if not rows:
        return [replace(first, space_before=4 * MM)]
    pieces = [joined(first, rows[0], space_before=4 * MM)]
    for row in rows[1:]:
        at_the_top = row if row.name else unsigned  # a page begun by room without ink says what it is for
        pieces.append(replace(row, fresh=joined(again, at_the_top, space_before=0.0)))
    return pieces


def hollow(height: float) -> Piece:
    """Room without ink: a draft keeps the pages of the issued pack."""
    return Ink().piece(height)


def joined(head: Piece, row: Piece, *, space_before: float) -> Piece:
    """A head and the row below it, in one."""
    ink = Ink()
    y = ink.add(head, 0, 0)
    y = ink.add(row, 0, y)
    return ink.piece(y, space_before=space_before, name=row.name or head.name)
