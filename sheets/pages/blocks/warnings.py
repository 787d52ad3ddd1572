"""Warnings, framed texts and hold points: what must be seen before a hand moves."""

from __future__ import annotations

from sheets.pages.blocks.boxes import Signing
from sheets.pages.document import Emphasis, Hold, Warning
from sheets.pages.fonts import ASCENT
from sheets.pages.ink import Ink, Piece
from sheets.pages.look import (
    BODY,
    FRAME,
    HAZARD,
    HEAVY,
    HOLD_WORD,
    LABEL,
    ORDER,
    SIGNAL,
    STEP_LINE,
    STRONG,
    WARNING_LINE,
)
from sheets.pages.placed import MM, Mark
from sheets.pages.roles import element
from sheets.pages.text import wrap

FRAMES = {"DANGER": 2.6, "WARNING": 1.8, "CAUTION": 1.1, "NOTICE": 0.7}
"""Weight of the frame by gravity; a danger has a filled field too."""

FIELD = 15 * MM
PAD = 2.2 * MM


def triangle(ink: Ink, x: float, y: float, side: float, *, white: bool) -> None:
    """A triangle with an exclamation mark, from its upper left corner; plain, without a registered number."""
    height = side * 0.88
    ink.polygon(
        ((x + side / 2, y), (x + side, y + height), (x, y + height)), thickness=1.8, white=white, fill="none"
    )
    middle, thick = x + side / 2, side * 0.045
    ink.polygon(
        (
            (middle - thick * 1.15, y + height * 0.36),
            (middle + thick * 1.15, y + height * 0.36),
            (middle + thick * 0.7, y + height * 0.70),
            (middle - thick * 0.7, y + height * 0.70),
        ),
        fill="white" if white else "black",
    )
    ink.circle(middle, y + height * 0.81, thick * 1.1, fill="white" if white else "black")


def warning_piece(warning: Warning, width: float, *, key: str = "", space_before: float = 3 * MM) -> Piece:
    """Signal word and hazard, then consequence and avoidance, in a frame; stays with what follows."""
    ink = Ink()
    frame = FRAMES[warning.signal]
    danger = warning.signal == "DANGER"
    sign = warning.signal != "NOTICE"
    inset = frame / 2
    left = FIELD + PAD if sign else PAD * 1.2
    room = width - left - PAD
    signal = SIGNAL.width(warning.signal)
    beside = room - signal - 3 * MM
    top = PAD * 0.9 + inset
    hazard = wrap(warning.hazard, HAZARD, beside)
    with ink.inside(element("P", "hazard")):
        if len(hazard) <= 2:
            ink.text(left, top + ASCENT * SIGNAL.size, warning.signal, SIGNAL)
            lowered = (SIGNAL.size - HAZARD.size) * ASCENT
            bottom = ink.lines(left + signal + 3 * MM, top + lowered, hazard, HAZARD)
        else:
            bottom = ink.lines(left, top, (warning.signal,), SIGNAL)
            bottom = ink.paragraph(left, bottom, room, warning.hazard, HAZARD)
    bottom += 0.6 * MM
    for index, line in enumerate(warning.lines):
        with ink.inside(element("P", index)):
            bottom = ink.paragraph(left, bottom, room, line, WARNING_LINE)
    height = max(bottom + PAD * 0.7, (14.5 if sign else 0) * MM)
    back = Ink()
    if danger:
        back.rect(inset, inset, FIELD - inset, height - 2 * inset, fill="black")
    if sign:
        side = 9.5 * MM
        triangle(back, (FIELD - side) / 2, (height - side * 0.88) / 2, side, white=danger)
    back.rect(inset, inset, width - 2 * inset, height - 2 * inset, thickness=frame)
    back.items.extend(ink.items)
    back.mark(Mark(kind="warning", key=key or warning.hazard, x=0, y=0, width=width, height=height))
    piece = back.piece(height, space_before=space_before, keep_with_next=True, name=warning.hazard)
    return piece.within(element("Warning"))


FIELD_SHARES = {"name": 34 * MM, "sign": 27 * MM, "time": 18 * MM}
FIELD_GAP = 3 * MM
SIGN_HEIGHT = 8.5 * MM


def hold_piece(
    hold: Hold, width: float, signing: Signing, *, key: str = "", space_before: float = 3 * MM
) -> Piece:
    """A hold point in a heavy frame. In a draft its lines are replaced by the word that it is not signed."""
    ink = Ink()
    inset = HEAVY / 2
    word = HOLD_WORD.width(hold.word)
    left = max(22 * MM, PAD * 1.6 + word + 3 * MM)
    room = width - left - PAD * 1.4
    fields = [FIELD_SHARES.get(field, 30 * MM) for field in hold.fields]
    fields_width = sum(fields) + FIELD_GAP * (len(fields) - 1)
    top = PAD + inset
    with ink.inside(element("P", "word")):
        ink.text(PAD * 1.6, top + ASCENT * HOLD_WORD.size, hold.word, HOLD_WORD)
    lowered = (HOLD_WORD.size - ORDER.size) * ASCENT
    with ink.inside(element("P", "order")):
        bottom = ink.paragraph(left, top + lowered, room, hold.order, ORDER)
    beside = room - fields_width - 3 * MM
    stacked = beside < 42 * MM
    above = stacked or len(wrap(hold.reason, STEP_LINE, beside)) > len(wrap(hold.reason, STEP_LINE, room))
    with ink.inside(element("P", "reason")):
        reason_bottom = ink.paragraph(left, bottom + 1, room if above else beside, hold.reason, STEP_LINE)
    start = (reason_bottom - 1.5 * MM if above else bottom) + SIGN_HEIGHT
    end = start + LABEL.leading + 1
    if stacked:
        left, room = PAD * 1.6, width - PAD * 3
        shrink = min(1.0, (room - FIELD_GAP * (len(fields) - 1)) / max(sum(fields), 1))
        fields = [field * shrink for field in fields]
        fields_width = sum(fields) + FIELD_GAP * (len(fields) - 1)
    x = left + room - fields_width
    if signing.draft:
        with ink.inside(element("P", "not signed")):
            ink.text(left + room, start, signing.not_signed, LABEL, side="right")
    else:
        for name, field in zip(hold.fields, fields, strict=True):
            ink.line(x, start, x + field, start, 0.8)
            with ink.inside(element("P", f"field {name}")):
                ink.text(x, start + 1.5 + ASCENT * LABEL.size, name, LABEL)
            ink.mark(
                Mark(kind="sign", key=name, x=x, y=start - SIGN_HEIGHT + 2, width=field, height=SIGN_HEIGHT)
            )
            x += field + FIELD_GAP
    height = max(reason_bottom, end) + PAD * 0.7
    ink.rect(inset, inset, width - 2 * inset, height - 2 * inset, thickness=HEAVY)
    ink.mark(Mark(kind="hold", key=key or hold.order, x=0, y=0, width=width, height=height))
    return ink.piece(height, space_before=space_before, name=hold.order).within(element("HoldPoint"))


def emphasis_piece(block: Emphasis, width: float) -> Piece:
    """A framed text: first aid, emergency. What stands at its right is set heavy."""
    ink = Ink()
    right = min(STRONG.width(block.right), width * 0.4)
    room = width - 4 * PAD - (right + 4 * MM if block.right else 0)
    top = PAD + FRAME / 2
    with ink.inside(element("P", "lead")):
        bottom = ink.paragraph(2 * PAD, top, room, block.lead, STRONG) + 0.6 * MM
    for index, line in enumerate(block.lines):
        with ink.inside(element("P", index)):
            bottom = ink.paragraph(2 * PAD, bottom, room, line, BODY)
    right_bottom = top
    if block.right:
        right_lines = wrap(block.right, STRONG, width * 0.4)
        with ink.inside(element("P", "right")):
            right_bottom = ink.lines(width - 2 * PAD, top, right_lines, STRONG, side="right")
    height = max(bottom, right_bottom) + PAD * 0.6
    ink.rect(FRAME / 2, FRAME / 2, width - FRAME, height - FRAME, thickness=FRAME)
    ink.rect(0, 0, 1.4 * MM, height, fill="black")
    ink.mark(Mark(kind="emphasis", key=block.lead, x=0, y=0, width=width, height=height))
    return ink.piece(height, space_before=4 * MM, name=block.lead).within(element("Div"))
