"""Boxes to write in: always blank, with their label inside and their limit below."""

from __future__ import annotations

from dataclasses import dataclass

from sheets.pages.document import Box
from sheets.pages.ink import Ink, Piece
from sheets.pages.look import FRAME, HEAVY, LABEL, LABEL_STRONG, UNIT
from sheets.pages.placed import MM, Mark
from sheets.pages.roles import GROUP, element
from sheets.pages.text import wrap

TICK = 7.5 * MM
WIDTHS = {"tick": TICK, "short": 17.5 * MM, "medium": 26 * MM, "wide": 42 * MM}
HEIGHT = 10 * MM
LABEL_MOST = 44 * MM
GAP = 2 * MM
PAD = 1.3 * MM


@dataclass(frozen=True, kw_only=True)
class Signing:
    """What every block must know of the print: is it a draft, and what a draft says where it isn't signed."""

    draft: bool
    not_signed: str


def outline(ink: Ink, x: float, width: float, height: float, *, strong: bool) -> None:
    """The frame of a box, within its own width."""
    thick = HEAVY if strong else FRAME
    ink.rect(x + thick / 2, thick / 2, width - thick, height - thick, thickness=thick)


def tick(box: Box) -> Piece:
    """A square to tick, its label to the left."""
    ink = Ink()
    lines = wrap(box.label, LABEL, 24 * MM)
    label = max((LABEL.width(line) for line in lines), default=0.0)
    x = label + PAD if lines else 0.0
    top = (TICK - len(lines) * LABEL.leading) / 2
    with ink.inside(element("P")):
        ink.lines(x - PAD, top, lines, LABEL, side="right")
    outline(ink, x, TICK, TICK, strong=box.strong)
    ink.mark(Mark(kind="box", key=box.label, x=x, y=0, width=TICK, height=TICK))
    return ink.piece(max(TICK, len(lines) * LABEL.leading))


def unsigned(width: float, signing: Signing) -> Piece:
    """What a draft says where an issued sheet has a box for a name or a sign."""
    ink = Ink()
    lines = wrap(signing.not_signed, LABEL, width)
    with ink.inside(element("P")):
        bottom = ink.lines(width, (HEIGHT - len(lines) * LABEL.leading) / 2, lines, LABEL, side="right")
    return ink.piece(max(HEIGHT, bottom))


def boxed(
    box: Box, signing: Signing, *, width: float | None = None, height: float = HEIGHT
) -> tuple[float, Piece]:
    """A box with its width: its label in the upper left corner, its unit in the lower right."""
    label_lines = wrap(box.label, LABEL, (width or LABEL_MOST) - 2 * PAD)
    label = max((LABEL.width(line) for line in label_lines), default=0.0)
    if width is None:
        limit = min(LABEL_STRONG.width(box.never_exceed), LABEL_MOST)
        width = max(WIDTHS[box.size], label + 2 * PAD, limit)
    if box.signed and signing.draft:
        return width, unsigned(width, signing)
    ink = Ink()
    height = max(height, len(label_lines) * LABEL.leading + 5.5 * MM)
    with ink.inside(element("P")):
        ink.lines(PAD, PAD * 0.8, label_lines, LABEL)
        if box.unit:
            ink.text(width - PAD, height - PAD - 0.8, box.unit, UNIT, side="right")
    outline(ink, 0, width, height, strong=box.strong)
    ink.mark(Mark(kind="sign" if box.signed else "box", key=box.label, x=0, y=0, width=width, height=height))
    bottom = height
    if box.never_exceed:
        limit_lines = wrap(box.never_exceed, LABEL_STRONG, width)
        with ink.inside(element("P", "limit")):
            bottom = ink.lines(width, height + 2, limit_lines, LABEL_STRONG, side="right")
    return width, ink.piece(bottom)


def sized(box: Box, signing: Signing) -> tuple[float, Piece]:
    """A box in its own size."""
    if box.size != "tick":
        return boxed(box, signing)
    piece = tick(box)
    (square,) = piece.marks
    return square.x + square.width, piece


def row_of_boxes(boxes: tuple[Box, ...], signing: Signing, most: float) -> tuple[float, Piece]:
    """Boxes in rows no wider than `most`, flush right; the width and the piece from its left edge."""
    rows: list[list[tuple[float, Piece]]] = []
    for pair in (sized(box, signing) for box in boxes):
        taken = sum(width + GAP for width, _ in rows[-1]) if rows else most
        if taken + pair[0] > most:
            rows.append([])
        rows[-1].append(pair)
    whole = max((sum(width for width, _ in row) + GAP * (len(row) - 1) for row in rows), default=0.0)
    ink = Ink()
    y = 0.0
    for index, row in enumerate(rows):
        y += GAP if index else 0
        x = whole - sum(width for width, _ in row) - GAP * (len(row) - 1)
        for column, (width, piece) in enumerate(row):
            ink.add(piece.within(element(GROUP, f"box {index} {column}")), x, y)
            x += width + GAP
        y += max(piece.height for _, piece in row)
    return whole, ink.piece(y)
