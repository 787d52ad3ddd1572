"""Steps and acts: the order short and heavy, its reason light below, its boxes on the same line."""

from __future__ import annotations

from dataclasses import replace

from sheets.pages.blocks.boxes import Signing, row_of_boxes
from sheets.pages.blocks.warnings import hold_piece, warning_piece
from sheets.pages.document import Act, Step
from sheets.pages.fonts import ASCENT
from sheets.pages.ink import Ink, Piece
from sheets.pages.look import ACT_NAME, HAIRLINE, ORDER, RULE, STEP_LINE, STEP_NUMBER
from sheets.pages.placed import MM, Mark
from sheets.pages.roles import GROUP, HEADER, Path, element, item_of_list
from sheets.pages.text import fit, style

NUMBER_COLUMN = 12 * MM
PAD = 1.65 * MM
BOX_GAP = 3 * MM
BODY = element("LBody")
ACT_NAMES = (ACT_NAME, style(12, ACT_NAME.weight), style(10.5, ACT_NAME.weight))


def order_and_boxes(ink: Ink, step: Step, signing: Signing, *, x: float, top: float, width: float) -> float:
    """Order, lines and boxes in a width from a top edge; returns the bottom edge."""
    boxes_width, boxes = row_of_boxes(step.boxes, signing, width * 0.5)
    room = width - (boxes_width + BOX_GAP if step.boxes else 0)
    with ink.inside(element("P", "order")):
        bottom = ink.paragraph(x, top, room, step.order, ORDER)
    for index, line in enumerate(step.lines):
        with ink.inside(element("P", index)):
            bottom = ink.paragraph(x, bottom, room, line, STEP_LINE)
    if step.boxes:
        bottom = max(bottom, ink.add(boxes, x + width - boxes_width, top - 0.8 * MM))
    return bottom


def step_core(step: Step, width: float, signing: Signing) -> Piece:
    """A step without its warnings and hold, under a hairline."""
    ink = Ink()
    ink.line(0, 0, width, 0, HAIRLINE)
    number = STEP_NUMBER if STEP_NUMBER.width(step.number) <= NUMBER_COLUMN - 3 * MM else ORDER
    baseline = PAD + ASCENT * STEP_NUMBER.size
    with ink.inside(element("Lbl")):
        ink.text(NUMBER_COLUMN - 3 * MM, baseline, step.number, number, side="right")
    lowered = (STEP_NUMBER.size - ORDER.size) * ASCENT
    with ink.inside(BODY):
        bottom = order_and_boxes(
            ink, step, signing, x=NUMBER_COLUMN, top=PAD + lowered, width=width - NUMBER_COLUMN
        )
    height = max(bottom + PAD * 0.9, 12 * MM)
    ink.mark(Mark(kind="step", key=step.number or step.order, x=0, y=0, width=width, height=height))
    return ink.piece(height, name=step.order)


def stacked(parts: list[Piece], *, name: str, fresh_gap: bool = False) -> Piece:
    """Pieces one below the other as one that no page cuts."""
    ink = Ink()
    y = 0.0
    for index, part in enumerate(parts):
        y += part.space_before if index or fresh_gap else 0.0
        y = ink.add(part, 0, y)
    return ink.piece(y, space_before=parts[0].space_before if parts else 0.0, name=name)


def warnings_of(step: Step, width: float) -> list[Piece]:
    """The warnings of a step, each knowing its step."""
    return [
        warning_piece(warning, width, key=step.number or step.order, space_before=2 * MM).within(
            BODY, element(GROUP, f"warning {index}")
        )
        for index, warning in enumerate(step.warnings)
    ]


def holds_of(step: Step, width: float, signing: Signing) -> list[Piece]:
    """The hold of a step, if it has one."""
    if step.hold is None:
        return []
    hold = hold_piece(step.hold, width, signing, key=step.number or step.order, space_before=2 * MM)
    return [hold.within(BODY)]


def step_piece(
    step: Step, width: float, signing: Signing, *, index: int, warnings: bool = True, hold: bool = True
) -> Piece:
    """A step with its warnings before it and its hold after it, never cut. `index`: its place in the run."""
    before = warnings_of(step, width) if warnings else []
    after = holds_of(step, width, signing) if hold else []
    core = step_core(step, width, signing)
    if before:
        core = replace(core, space_before=2 * MM)
    return stacked([*before, core, *after], name=step.order).within(*item_of_list(index))


def act_pieces(act: Act, width: float, signing: Signing) -> list[Piece]:
    """The rows of one act; its number and name stand at the first one, and again where a page begins."""
    name_column = 32 * MM
    rows: list[Piece] = []
    for index, step in enumerate(act.rows):
        name = (element("H2"),) if index == 0 else (HEADER,)
        named = act_row(act, step, width, signing, name_column=name_column, name=name, index=index)
        plain = act_row(act, step, width, signing, name_column=name_column, name=None, index=index)
        rows.append(named if index == 0 else replace(plain, fresh=named))
    if not rows:
        name = (element("H2"),)
        rows.append(act_row(act, None, width, signing, name_column=name_column, name=name, index=0))
    return [row.within(element("Sect")) for row in rows]


def act_row(
    act: Act,
    step: Step | None,
    width: float,
    signing: Signing,
    *,
    name_column: float,
    name: Path | None,
    index: int,
) -> Piece:
    """One row of an act, with the number and name of the act at its left.

    `name` is what these are to who hears the page: the heading of the act or its repetition; None leaves
    them out. `index` is the place of the row in its act.
    """
    ink = Ink()
    named = name is not None
    left = 0.0 if named else name_column
    ink.line(left, 0, width, 0, RULE if named else HAIRLINE)
    bottom = 0.0
    if name is not None:
        indent = max(9 * MM, STEP_NUMBER.width(act.number) + 3 * MM)
        shape, lines = fit(act.name, width=name_column - indent - 2 * MM, styles=ACT_NAMES, lines=2)
        with ink.inside(*name):
            ink.text(0, PAD + ASCENT * STEP_NUMBER.size, act.number, STEP_NUMBER)
            bottom = ink.lines(indent, PAD + (STEP_NUMBER.size - shape.size) * ASCENT, lines, shape)
    if step is not None:
        room = width - name_column
        y = PAD
        row = item_of_list(index)
        for part in warnings_of(step, room):
            y = ink.add(part.within(*row), name_column, y) + 2 * MM
        y += (STEP_NUMBER.size - ORDER.size) * ASCENT
        top = y
        with ink.inside(*row, BODY):
            low = order_and_boxes(ink, step, signing, x=name_column, top=top, width=room)
        ink.mark(
            Mark(
                kind="step",
                key=step.number or step.order,
                x=name_column,
                y=top - 2,
                width=room,
                height=low - top + 2,
            )
        )
        bottom = max(bottom, low)
        for part in holds_of(step, room, signing):
            bottom = ink.add(part.within(*row), name_column, bottom + 2 * MM)
    height = max(bottom + PAD, 12 * MM)
    ink.mark(Mark(kind="row", key=f"{act.number} {act.name}", x=0, y=0, width=width, height=height))
    return ink.piece(height, name=step.order if step else act.name)
