"""The title block of the cover: revision, state, date and signatures of an issued pack."""

from __future__ import annotations

from sheets.pages.document import IssueContext, PageWords
from sheets.pages.fonts import ASCENT, Weight
from sheets.pages.frame import Frame
from sheets.pages.ink import Ink, Piece
from sheets.pages.look import BODY, FRAME, HAIRLINE, LABEL
from sheets.pages.placed import MM, Mark
from sheets.pages.roles import GROUP, element, item_of_list
from sheets.pages.text import fit, style, wrap

ROW = 11.5 * MM
ROWS_LEAST = 3
SPLIT = 0.6
"""Share of the width that the signers take."""
LABEL_COLUMN = 19 * MM
SIGN_WIDTH = 52 * MM
CHANGES_LEFT = 32 * MM
CHANGES_MOST = 5
"""So many are printed, so that the block mostly stays on the first page."""
PAD = 2 * MM
STRONG = tuple(style(size, Weight.SEMIBOLD) for size in (12, 11, 10, 9))


def title_block(frame: Frame, width: float) -> Piece:
    """Signers with room to sign left, revision, state and date right, changes below.

    A draft says that it is not signed. The room of each signer is marked as `sign` with the meaning of the
    signature as its key.
    """
    ink = Ink()
    words, issue = frame.document.words, frame.issue
    if issue is None:
        bottom = ROWS_LEAST * ROW
        line = f"{words.draft}: {words.not_issued}, {words.not_signed}"
        with ink.inside(element("P")):
            ink.text(width / 2, bottom / 2 + ASCENT * STRONG[0].size / 2, line, STRONG[0], side="centre")
    else:
        bottom = changed(ink, words, issue, grid(ink, words, issue, width), width)
    ink.rect(FRAME / 2, FRAME / 2, width - FRAME, bottom - FRAME, thickness=FRAME)
    ink.mark(Mark(kind="title block", key="", x=0, y=0, width=width, height=bottom))
    return ink.piece(bottom, space_before=7 * MM, name="title block").within(element("Div"))


def grid(ink: Ink, words: PageWords, issue: IssueContext, width: float) -> float:
    """Signers and facts in rows; returns the bottom edge."""
    facts = (
        (words.revision, issue.revision),
        (words.state, issue.state),
        (words.issued, f"{issue.date} {issue.zone}"),
    )
    rows = max(ROWS_LEAST, len(issue.signers), len(facts))
    split = width * SPLIT
    for index in range(1, rows):
        ink.line(0, index * ROW, width, index * ROW, HAIRLINE)
    ink.line(split, 0, split, rows * ROW, HAIRLINE)
    sign = split - SIGN_WIDTH
    if issue.signers:
        ink.line(sign, 0, sign, rows * ROW, HAIRLINE)
    for name, pairs, left, right in (
        ("signers", issue.signers, 0.0, sign),
        ("facts", facts, split, width),
    ):
        for index, (label, text) in enumerate(pairs):
            middle = index * ROW + ROW / 2
            place = (element(GROUP, name), *item_of_list(index))
            with ink.inside(*place, element("Lbl")):
                ink.text(left + PAD, middle + ASCENT * LABEL.size / 2, label, LABEL)
            shape, lines = fit(text, width=right - left - LABEL_COLUMN - PAD, styles=STRONG, lines=1)
            top = middle - (len(lines) - 1) * shape.leading / 2 - ASCENT * shape.size / 2
            with ink.inside(*place, element("LBody")):
                ink.lines(left + LABEL_COLUMN, top, lines, shape)
    for index, (meaning, _) in enumerate(issue.signers):
        with ink.inside(element(GROUP, "signers"), *item_of_list(index), element("LBody")):
            ink.mark(Mark(kind="sign", key=meaning, x=sign, y=index * ROW, width=SIGN_WIDTH, height=ROW))
    return rows * ROW


def changed(ink: Ink, words: PageWords, issue: IssueContext, top: float, width: float) -> float:
    """What the revision changes, if anything; returns the bottom edge."""
    if not issue.changes:
        return top
    ink.line(0, top, width, top, HAIRLINE)
    with ink.inside(element("P", "changes")):
        ink.lines(PAD, top + PAD, (words.changes,), LABEL)
    bottom = top + PAD
    lines = [*issue.changes[:CHANGES_MOST]]
    if len(issue.changes) > CHANGES_MOST:
        lines.append(words.more_changes.format(count=len(issue.changes) - CHANGES_MOST))
    if issue.reason:
        lines.insert(0, f"{words.reason}: {issue.reason}; {words.reviewed} {issue.reviewer}")
    for index, change in enumerate(lines):
        with ink.inside(element("P", index)):
            bottom = ink.lines(CHANGES_LEFT, bottom, wrap(change, BODY, width - CHANGES_LEFT - PAD), BODY)
    return bottom + PAD * 0.6
