"""Headings, paragraphs and key lines."""

from __future__ import annotations

from sheets.pages.document import Heading, KeyLines, Paragraph
from sheets.pages.fonts import ASCENT
from sheets.pages.ink import Ink, Piece
from sheets.pages.look import BODY, HEADING, SMALL, STRONG
from sheets.pages.placed import MM, Mark
from sheets.pages.roles import element, item_of_list
from sheets.pages.text import style, wrap

PARAGRAPH = {"plain": BODY, "strong": STRONG, "small": SMALL}
KEY = style(10.5, STRONG.weight)


def heading_piece(heading: Heading, width: float, *, type_: str) -> Piece:
    """A heading, with its light text beside it, or below where there is no room. Stays with what follows.

    `type_` is its type among the headings of its section: H2 or H3.
    """
    ink = Ink()
    shape = HEADING[heading.level]
    lines = wrap(heading.text, shape, width)
    with ink.inside(element(type_)):
        bottom = ink.lines(0, 0, lines, shape)
    if heading.light:
        x = shape.width(lines[-1]) + 4 * MM if lines else 0.0
        with ink.inside(element("P")):
            if x + BODY.width(heading.light) <= width:
                ink.text(x, bottom - shape.leading + ASCENT * shape.size, heading.light, BODY)
            else:
                bottom = ink.paragraph(0, bottom, width, heading.light, BODY)
    ink.mark(Mark(kind="heading", key=heading.text, x=0, y=0, width=width, height=bottom))
    return ink.piece(
        bottom + 0.3 * MM,
        space_before=(6 if heading.level == 1 else 4.5) * MM,
        keep_with_next=True,
        name=heading.text,
    )


def paragraph_pieces(paragraph: Paragraph, width: float) -> list[Piece]:
    """A paragraph by lines: two stay together at its begin and at its end."""
    shape = PARAGRAPH[paragraph.weight]
    lines = wrap(paragraph.text, shape, width)
    pieces: list[Piece] = []
    for index, line in enumerate(lines):
        ink = Ink()
        with ink.inside(element("P")):
            ink.lines(0, 0, (line,), shape)
        ink.mark(Mark(kind="paragraph", key=paragraph.text, x=0, y=0, width=width, height=shape.leading))
        last = index == len(lines) - 1
        pieces.append(
            ink.piece(
                shape.leading,
                space_before=0.0 if index else 1.9 * MM,
                keep_with_next=not last and (index == 0 or index == len(lines) - 2),
                name=paragraph.text,
            )
        )
    return pieces


def key_line_pieces(block: KeyLines, width: float) -> list[Piece]:
    """Keys heavy in a column as wide as the widest, up to a third of the width; texts beside them."""
    third = width / 3
    column = min(max((KEY.width(key) for key, _ in block.rows), default=0.0), third) + 4 * MM
    pieces: list[Piece] = []
    for index, (key, text) in enumerate(block.rows):
        ink = Ink()
        with ink.inside(*item_of_list(index), element("Lbl")):
            key_bottom = ink.paragraph(0, 0, column - 4 * MM, key, KEY)
        with ink.inside(*item_of_list(index), element("LBody")):
            bottom = max(key_bottom, ink.paragraph(column, 0, width - column, text, BODY))
        ink.mark(Mark(kind="key line", key=key, x=0, y=0, width=width, height=bottom))
        pieces.append(ink.piece(bottom, space_before=(1.1 if index else 3.5) * MM, name=key))
    return pieces
