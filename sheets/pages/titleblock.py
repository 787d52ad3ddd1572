"""The title block of the cover: revision, state, date and signatures of an issued pack."""

from __future__ import annotations

from sheets.pages.fonts import ASCENT, Weight
from sheets.pages.frame import Frame
from sheets.pages.ink import Ink, Piece
from sheets.pages.look import BODY, FRAME, HAIRLINE, LABEL
from sheets.pages.placed import MM, Mark
from sheets.pages.text import fit, style, wrap

ROW = 8.5 * MM
ROWS_LEAST = 3
LABEL_COLUMN = 32 * MM
PAD = 2 * MM
STRONG = tuple(style(size, Weight.SEMIBOLD) for size in (12, 11, 10, 9))


def title_block(frame: Frame, width: float) -> Piece:
    """Signers left, revision, state and date right, changes below. A draft says that it is not signed."""
    ink = Ink()
    words, issue = frame.document.words, frame.issue
    signers = issue.signers if issue else ()
    facts: tuple[tuple[str, str], ...] = ()
    if issue:
        facts = (
            (words.revision, issue.revision),
            (words.state, issue.state),
            (words.issued, f"{issue.date} {issue.zone}"),
        )
    rows = max(ROWS_LEAST, len(signers), len(facts))
    split = width * 0.56
    grid = rows * ROW
    if issue:
        for index in range(1, rows):
            ink.line(0, index * ROW, width, index * ROW, HAIRLINE)
        ink.line(split, 0, split, grid, HAIRLINE)
        for pairs, left, right in ((signers, 0.0, split), (facts, split, width)):
            for index, (label, text) in enumerate(pairs):
                middle = index * ROW + ROW / 2
                ink.text(left + PAD, middle + ASCENT * LABEL.size / 2, label, LABEL)
                column = LABEL_COLUMN if left == 0 else LABEL_COLUMN * 0.6
                shape, lines = fit(text, width=right - left - column - PAD, styles=STRONG, lines=1)
                top = middle - (len(lines) - 1) * shape.leading / 2 - ASCENT * shape.size / 2
                ink.lines(left + column, top, lines, shape)
    else:
        line = f"{words.draft}: {words.not_issued}, {words.not_signed}"
        ink.text(width / 2, grid / 2 + ASCENT * STRONG[0].size / 2, line, STRONG[0], side="centre")
    bottom = grid
    if issue and issue.changes:
        ink.line(0, grid, width, grid, HAIRLINE)
        ink.lines(PAD, grid + PAD, (words.changes,), LABEL)
        bottom = grid + PAD
        for change in issue.changes:
            bottom = ink.lines(LABEL_COLUMN, bottom, wrap(change, BODY, width - LABEL_COLUMN - PAD), BODY)
        bottom += PAD * 0.6
    ink.rect(FRAME / 2, FRAME / 2, width - FRAME, bottom - FRAME, thickness=FRAME)
    ink.mark(Mark(kind="title block", key="", x=0, y=0, width=width, height=bottom))
    return ink.piece(bottom, space_before=7 * MM, name="title block")
