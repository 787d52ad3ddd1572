"""The setting panel, and a run of steps with the panel at its right."""

from __future__ import annotations

from dataclasses import dataclass, replace
from itertools import count as counted

from sheets.pages.blocks.boxes import GAP, Signing, boxed
from sheets.pages.blocks.steps import holds_of, stacked, step_piece, warnings_of
from sheets.pages.document import Box, SettingPanel, Steps
from sheets.pages.face import dial_face, face_alternative, number_face
from sheets.pages.fonts import ASCENT, Weight
from sheets.pages.ink import Ink, Piece
from sheets.pages.look import CAPTION, HAIRLINE, LABEL, NEVER, STEP_LINE, TARGET, WINDOW
from sheets.pages.placed import MM, Mark
from sheets.pages.roles import GROUP, HEADER, Element, Path, element, figure, item_of_list
from sheets.pages.text import fit, style, wrap

PANEL_WIDTH = 60 * MM
PANEL_GAP = 6 * MM
DIAL = 57 * MM
NUMBER_BOX_HEIGHT = 34 * MM
BOX_HEIGHT = 13.5 * MM
STRONG_HEIGHT = 17 * MM
RUN_GAP = 3 * MM
BEFORE_GAP = 2.5 * MM
"""Between the last warning and the steps with their panel."""
FEWEST_ROWS = 2
"""A run that can't stand on one page begins on a used page only with so many steps."""

TARGETS = (TARGET, *(style(size, Weight.BOLD) for size in (28, 26, 24)))
WINDOWS = (WINDOW, *(style(size, Weight.SEMIBOLD) for size in (13, 12, 11)))
NEVERS = (NEVER, *(style(size, Weight.BOLD) for size in (13, 12, 11)))


def three_numbers(ink: Ink, panel: SettingPanel, top: float) -> float:
    """Target, window and never-exceed across the panel; returns the bottom edge."""
    face = panel.face
    rows = (
        (f"{face.target_text} {face.unit}", panel.target_label, TARGETS),
        (f"{face.window_text} {face.unit}", panel.window_label, WINDOWS),
        (f"{face.never_exceed_text} {face.unit}", panel.never_exceed_label, NEVERS),
    )
    for index, (text, label, styles) in enumerate(rows):
        room = PANEL_WIDTH - LABEL.width(label) - 5 * MM
        shape, lines = fit(text, width=room, styles=styles, lines=1)
        tall = max(ASCENT * shape.size * len(lines) + (3.6 if index else 4) * MM, 7 * MM if index else 0)
        baseline = top + tall / 2 + ASCENT * shape.size / 2 * 0.94
        black = index == len(rows) - 1
        if black:
            ink.rect(0, top, PANEL_WIDTH, tall, fill="black")
        else:
            ink.line(0, top + tall, PANEL_WIDTH, top + tall, HAIRLINE)
        with ink.inside(element("P", f"number {index}")):
            ink.text(PANEL_WIDTH - 1.5 * MM, baseline, label, LABEL, side="right", white=black)
            for number, line in enumerate(lines):
                ink.text(1.5 * MM, baseline + number * shape.leading, line, shape, white=black)
        top += tall
    return top


def box_grid(ink: Ink, boxes: tuple[Box, ...], signing: Signing, top: float) -> float:
    """Boxes two by two; a strong one takes the whole width. Returns the bottom edge."""
    half = (PANEL_WIDTH - GAP) / 2
    waiting: list[Box] = []
    numbers = counted()

    def named(piece: Piece) -> Piece:
        """A box told from the others of the panel."""
        return piece.within(element(GROUP, f"box {next(numbers)}"))

    def flush(top: float) -> float:
        if not waiting:
            return top
        width = half if len(waiting) > 1 else PANEL_WIDTH
        pieces = [boxed(box, signing, width=width, height=BOX_HEIGHT)[1] for box in waiting]
        tallest = max(piece.height for piece in pieces)
        for index, piece in enumerate(pieces):
            ink.add(named(piece), index * (half + GAP), top)
        waiting.clear()
        return top + tallest + GAP

    for box in boxes:
        if box.strong:
            top = flush(top)
            _, piece = boxed(box, signing, width=PANEL_WIDTH, height=STRONG_HEIGHT)
            top = ink.add(named(piece), 0, top) + GAP
            continue
        waiting.append(box)
        if len(waiting) > 1:
            top = flush(top)
    return flush(top) - (GAP if boxes else 0)


def panel_piece(panel: SettingPanel, signing: Signing, *, boxes: bool) -> Piece:
    """Face, three numbers, boxes and notes. Without boxes where the run goes on: a reading has one box."""
    ink = Ink()
    face = panel.face
    alternative = face_alternative(
        face, target=panel.target_label, window=panel.window_label, never_exceed=panel.never_exceed_label
    )
    if face.digital:
        labels = (panel.target_label, panel.window_label, panel.never_exceed_label)
        with ink.inside(figure(alternative)):
            number_face(ink, face, x=0, y=0, width=PANEL_WIDTH, height=NUMBER_BOX_HEIGHT, labels=labels)
        y = NUMBER_BOX_HEIGHT + 1.5 * MM
    else:
        with ink.inside(figure(alternative)):
            dial_face(ink, face, x=PANEL_WIDTH / 2, y=DIAL / 2, diameter=DIAL)
        y = DIAL + 1.5 * MM
    with ink.inside(element("P", "caption")):
        y = ink.lines(PANEL_WIDTH / 2, y, wrap(face.caption, CAPTION, PANEL_WIDTH), CAPTION, side="centre")
    y += 1 * MM
    if not face.digital:
        y = three_numbers(ink, panel, y)
    if face.second_unit_text:
        lines = wrap(face.second_unit_text, STEP_LINE, PANEL_WIDTH - 3 * MM)
        with ink.inside(element("P", "second unit")):
            if face.digital:
                y = ink.lines(PANEL_WIDTH / 2, y, lines, STEP_LINE, side="centre")
            else:
                y = ink.lines(1.5 * MM, y + 1.2 * MM, lines, STEP_LINE)
    if boxes and panel.boxes:
        y = box_grid(ink, panel.boxes, signing, y + 2.5 * MM)
    for index, note in enumerate(panel.notes):
        top = y + (1.2 if index else 2) * MM
        with ink.inside(element("P", f"note {index}")):
            y = ink.paragraph(1.5 * MM, top, PANEL_WIDTH - 3 * MM, note, STEP_LINE)
    ink.mark(Mark(kind="panel", key=face.gauge, x=0, y=0, width=PANEL_WIDTH, height=y))
    return ink.piece(y, name=face.caption)


@dataclass(frozen=True, kw_only=True)
class PanelRun:
    """Steps with a panel beside them, which may go on over pages.

    The warning of the first step and the hold after the last one take the whole width, as part of the piece.
    """

    steps: tuple[Piece, ...]
    before: tuple[Piece, ...]
    after: tuple[Piece, ...]
    panel: Piece
    panel_again: Piece
    width: float
    begun: bool = False
    path: Path = ()
    """What all of it is part of."""

    def within(self, *path: Element) -> PanelRun:
        """The same run as part of something."""
        return replace(self, path=(*path, *self.path))

    def composed(self, count: int) -> Piece:
        """The next steps, so many, with the panel, on one page."""
        ink = Ink()
        panel = self.panel_again if self.begun else self.panel
        y = 0.0
        for part in () if self.begun else self.before:
            y = ink.add(part, 0, y + (part.space_before if y else 0))
        y += BEFORE_GAP if y else 0.0
        column = stacked(list(self.steps[:count]), name="")
        ink.add(column, 0, y)
        ink.line(0, y + column.height, self.width - PANEL_WIDTH - PANEL_GAP, y + column.height, HAIRLINE)
        ink.add(panel, self.width - PANEL_WIDTH, y)
        y += max(column.height, panel.height)
        for part in self.after if count == len(self.steps) else ():
            y = ink.add(part, 0, y + 4 * MM)
        name = self.steps[0].name if self.steps else panel.name
        return ink.piece(y, space_before=RUN_GAP, name=name).within(*self.path)

    def take(self, room: float, whole_page: float) -> tuple[Piece | None, PanelRun | None]:
        """What goes into a room, and what is left. None and the run itself: it wants the next page."""
        full = self.composed(len(self.steps))
        if full.height <= room:
            return full, None
        fresh = room >= whole_page - 1e-6
        if full.height <= whole_page and not fresh:
            return None, self
        for count in range(len(self.steps) - 1, 0, -1):
            part = self.composed(count)
            if part.height <= room and (fresh or count >= FEWEST_ROWS):
                return part, replace(self, steps=self.steps[count:], begun=True)
        return None, self


def panel_run(
    block: Steps, panel: SettingPanel, width: float, signing: Signing, tail: tuple[Piece, ...]
) -> PanelRun:
    """Prepare a run. `tail` are holds that stand directly after the block."""
    column = width - PANEL_WIDTH - PANEL_GAP
    last = len(block.steps) - 1
    steps = tuple(
        step_piece(step, column, signing, index=index, warnings=index != 0, hold=index != last)
        for index, step in enumerate(block.steps)
    )
    before = warnings_of(block.steps[0], width) if block.steps else []
    after = holds_of(block.steps[last], width, signing) if block.steps else []
    return PanelRun(
        steps=steps,
        before=tuple(part.within(*item_of_list(0)) for part in before),
        after=(
            *(part.within(*item_of_list(last)) for part in after),
            *(part.within(element(GROUP, "tail")) for part in tail),
        ),
        panel=panel_piece(panel, signing, boxes=True).within(element("SettingPanel")),
        panel_again=panel_piece(panel, signing, boxes=False).within(HEADER),
        width=width,
    )
