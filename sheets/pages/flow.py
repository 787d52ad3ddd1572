"""Filling pages: pieces one below the other, never cut, kept with what they belong to."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, field, replace

from sheets.errors import InputError, Problem
from sheets.pages.blocks.boxes import Signing
from sheets.pages.blocks.panel import RUN_GAP, PanelRun, panel_run
from sheets.pages.blocks.plain import heading_piece, key_line_pieces, paragraph_pieces
from sheets.pages.blocks.steps import act_pieces, step_piece
from sheets.pages.blocks.tables import table_pieces
from sheets.pages.blocks.warnings import emphasis_piece, hold_piece, warning_piece
from sheets.pages.document import (
    Act,
    Block,
    Emphasis,
    Heading,
    Hold,
    KeyLines,
    Paragraph,
    Steps,
    Table,
    TagSheet,
    Warning,
)
from sheets.pages.ink import Ink, Piece
from sheets.pages.placed import MM
from sheets.pages.roles import GROUP, element

Unit = Piece | PanelRun


def kept(pieces: list[Piece]) -> list[Piece]:
    """The last piece stays with what follows."""
    return [*pieces[:-1], replace(pieces[-1], keep_with_next=True)] if pieces else []


def heading_type(heading: Heading, before: Sequence[Block]) -> str:
    """H2 below the title of the section; H3 only below an H2, so that no rank is left out."""
    below = any(
        isinstance(block, Act) or (isinstance(block, Heading) and block.level == 1) for block in before
    )
    return "H3" if heading.level > 1 and below else "H2"


def block_pieces(block: Block, width: float, signing: Signing, before: Sequence[Block]) -> list[Piece]:
    """Pieces of any block but a run with a panel and a sheet of tags; `before` are those of its section."""
    match block:
        case Heading():
            return [heading_piece(block, width, type_=heading_type(block, before))]
        case Paragraph():
            return paragraph_pieces(block, width)
        case Warning():
            return [warning_piece(block, width)]
        case Steps():
            pieces = [step_piece(step, width, signing, index=index) for index, step in enumerate(block.steps)]
            return [replace(piece, space_before=max(piece.space_before, 2.5 * MM)) if index == 0 else piece
                    for index, piece in enumerate(pieces)]  # fmt: skip
        case Act():
            first, *rows = act_pieces(block, width, signing)
            after_act = bool(before) and isinstance(before[-1], Act)
            return [replace(first, space_before=0.0 if after_act else 3.5 * MM), *rows]
        case Hold():
            return [hold_piece(block, width, signing, space_before=4 * MM)]
        case KeyLines():
            return key_line_pieces(block, width)
        case Table():
            return table_pieces(block, width, signing)
        case Emphasis():
            return [emphasis_piece(block, width)]
        case TagSheet():
            return []


def units_of(blocks: Sequence[Block], width: float, signing: Signing) -> list[Unit]:
    """Blocks as units to flow. A hold stays with the steps before it, a warning with the step after it."""
    units: list[Unit] = []
    skip = False
    for index, block in enumerate(blocks):
        if skip:
            skip = False
            continue
        group = element(GROUP, index)
        following = blocks[index + 1] if index + 1 < len(blocks) else None
        if isinstance(block, Steps) and block.panel is not None:
            tail: tuple[Piece, ...] = ()
            if isinstance(following, Hold):
                tail = (hold_piece(following, width, signing),)
                skip = True
            units.append(panel_run(block, block.panel, width, signing, tail).within(group))
            continue
        pieces = [piece.within(group) for piece in block_pieces(block, width, signing, blocks[:index])]
        units.extend(kept(pieces) if isinstance(following, Hold) else pieces)
    return units


@dataclass(kw_only=True)
class Filler:
    """Pages being filled. `room_of(n)` is the height for content on the n-th page."""

    room_of: Callable[[int], float]
    pages: list[Ink] = field(default_factory=lambda: [Ink()])
    y: float = 0.0

    @property
    def room(self) -> float:
        return self.room_of(len(self.pages) - 1) - self.y

    @property
    def begun(self) -> bool:
        return self.y > 0

    def turn(self) -> None:
        """Begin the next page."""
        self.pages.append(Ink())
        self.y = 0.0

    def height_of(self, chain: Sequence[Piece], *, fresh: bool) -> float:
        """Height of pieces in a row, from here or from the top of a page."""
        total = 0.0
        for index, piece in enumerate(chain):
            top = index == 0 and fresh
            shape = piece.fresh if top and piece.fresh else piece
            total += shape.height + (0 if top else piece.space_before)
        return total

    def put(self, piece: Piece) -> None:
        """Place a piece here, in the shape that it has at the top of a page if this is one."""
        shape = piece
        if self.begun:
            self.y += piece.space_before
        elif piece.fresh is not None:
            shape = piece.fresh
        self.y = self.pages[-1].add(shape, 0, self.y)

    def too_high(self, piece: Piece) -> InputError:
        """What to say of something that no page holds."""
        return InputError(
            Problem(
                where="page layout",
                what=f"this doesn't fit on one page: {piece.name[:120]}",
                fix="shorten the text, or split the step or the row in two",
            )
        )

    def chain(self, chain: list[Piece]) -> None:
        """Place pieces that stay together."""
        if self.height_of(chain, fresh=not self.begun) > self.room and self.begun:
            self.turn()
        if self.height_of(chain, fresh=not self.begun) > self.room:
            raise self.too_high(chain[-1])
        for piece in chain:
            self.put(piece)

    def run(self, run: PanelRun, before: list[Piece]) -> None:
        """Place a run with a panel after the pieces that stay with it."""
        rest: PanelRun | None = run
        while rest is not None:
            lead = self.height_of(before, fresh=not self.begun)
            gap = RUN_GAP if self.begun or before else 0.0
            whole = (
                self.room_of(len(self.pages)) - self.height_of(before, fresh=True) - (gap if before else 0)
            )
            part, left = rest.take(self.room - lead - gap, whole if self.begun else self.room - lead - gap)
            if part is None:
                if not self.begun:
                    raise self.too_high(rest.composed(1))
                self.turn()
                continue
            for piece in before:
                self.put(piece)
            self.put(part)
            before = []
            rest = left
            if rest is not None:
                self.turn()


def fill(units: Sequence[Unit], room_of: Callable[[int], float]) -> list[Ink]:
    """Pages of content, each from (0, 0) down."""
    filler = Filler(room_of=room_of)
    waiting: list[Piece] = []
    for unit in units:
        if isinstance(unit, PanelRun):
            filler.run(unit, waiting)
            waiting = []
            continue
        waiting.append(unit)
        if not unit.keep_with_next:
            filler.chain(waiting)
            waiting = []
    if waiting:
        filler.chain(waiting)
    return filler.pages
