"""What stands on every page around its content: banner, head, code or draft mark, footer."""

from __future__ import annotations

from dataclasses import dataclass

from sheets.errors import InputError, Problem
from sheets.pages.document import Banner, Document, IssueContext, PowerState, Section
from sheets.pages.fonts import ASCENT, Weight
from sheets.pages.ink import Ink
from sheets.pages.look import (
    BANNER_SIDES,
    BANNER_WORD,
    CODE_MODULE,
    CODE_SIDE,
    FOOTER,
    FOOTER_HEIGHT,
    FOOTER_SMALL,
    FOOTER_STRONG,
    HAIRLINE,
    HEAD_LINE,
    LABEL,
    MARGIN_BOTTOM,
    MARGIN_LEFT,
    MARGIN_RIGHT,
    RULE,
    SHORT_TITLES,
    TITLES,
)
from sheets.pages.placed import MM, Mark
from sheets.pages.roles import FOOTER as FOOTER_ARTIFACT
from sheets.pages.roles import element, figure
from sheets.pages.text import Style, fit, fit_cut, style, wrap

BANNER_HEIGHT = 11 * MM
HEAD_GAP = 6 * MM
FOOTER_LINES = 2
IDENTITY_ROOM = 62 * MM
IDENTITIES = (FOOTER_STRONG, style(9, Weight.BOLD))
Rows = tuple[tuple[bool, ...], ...]


@dataclass(frozen=True, kw_only=True)
class Paper:
    """A sheet of paper and the room on it."""

    width: float
    height: float

    @property
    def left(self) -> float:
        return MARGIN_LEFT

    @property
    def right(self) -> float:
        return self.width - MARGIN_RIGHT

    @property
    def inner(self) -> float:
        return self.right - self.left

    @property
    def floor(self) -> float:
        """Lowest edge of the content."""
        return self.height - MARGIN_BOTTOM - FOOTER_HEIGHT - 3 * MM


@dataclass(frozen=True, kw_only=True)
class Frame:
    """What the frame of each page needs to know of the pack."""

    document: Document
    paper: Paper
    digest: str
    """As printed: 16 characters in groups of four."""
    issue: IssueContext | None
    code: Rows | None


def banner(ink: Ink, frame: Frame, state: Banner, top: float) -> float:
    """LOCKED: a closed filled frame. POWERED: open at both ends, rules above and below. Returns its foot."""
    paper = frame.paper
    locked = state.state is PowerState.LOCKED
    middle = (paper.left + paper.right) / 2
    if locked:
        ink.rect(paper.left, top, paper.inner, BANNER_HEIGHT, fill="black")
    else:
        thick = 3.0
        for y in (top + thick / 2, top + BANNER_HEIGHT - thick / 2):
            ink.line(paper.left, y, paper.right, y, thick)
    word = BANNER_WORD.width(state.word)
    baseline = top + BANNER_HEIGHT / 2 + ASCENT * BANNER_WORD.size / 2 * 0.94
    with ink.inside(element("P", "banner")):
        ink.text(middle, baseline, state.word, BANNER_WORD, side="centre", white=locked)
    pad = 3 * MM if locked else 0.0
    room = (paper.inner - word) / 2 - pad - 4 * MM
    for text, side in ((state.left, "left"), (state.right, "right")):
        shape, lines = (
            fit_cut(text, width=room, styles=BANNER_SIDES, lines=2) if text else (BANNER_SIDES[0], ())
        )
        tall = shape.leading * (len(lines) - 1) + ASCENT * shape.size
        first = top + (BANNER_HEIGHT - tall) / 2 - 0.4
        with ink.inside(element("P", f"banner {side}")):
            if side == "left":
                ink.lines(paper.left + pad, first, lines, shape, white=locked)
            else:
                ink.lines(paper.right - pad, first, lines, shape, side="right", white=locked)
    ink.mark(
        Mark(
            kind="banner", key=state.state.value, x=paper.left, y=top, width=paper.inner, height=BANNER_HEIGHT
        )
    )
    return top + BANNER_HEIGHT


def draft_block(
    ink: Ink, *, x: float, y: float, side: float, words: tuple[str, ...], small: Style, inset: float = 1 * MM
) -> None:
    """A filled square that says DRAFT, in the room of the code."""
    word, *rest = words
    ink.rect(x, y, side, side, fill="black")
    sizes = tuple(style(size, Weight.BOLD) for size in (24, 22, 20, 18, 16, 15, 14, 13, 12, 10, 8))
    shape, _ = fit(word, width=side - 2 * inset, styles=sizes, lines=1)
    baseline = y + side * 0.5
    top = baseline + 0.11 * side
    with ink.inside(element("P", "draft block")):
        ink.text(x + side / 2, baseline, word, shape, side="centre", white=True)
        for text in rest:
            _, lines = fit_cut(text, width=side - 1 * MM, styles=(small,), lines=2)
            top = ink.lines(x + side / 2, top, lines, small, side="centre", white=True)
    ink.mark(Mark(kind="draft", key="block", x=x, y=y, width=side, height=side))


def corner(ink: Ink, frame: Frame, top: float) -> float:
    """Upper right: the code of an issued pack, or the draft block in the same room. Returns its foot."""
    right = frame.paper.right
    if frame.code is None:
        words = frame.document.words
        draft_block(
            ink,
            x=right - CODE_SIDE,
            y=top,
            side=CODE_SIDE,
            words=(words.draft, words.not_issued),
            small=LABEL,
        )
    else:
        side = CODE_MODULE * len(frame.code)
        with ink.inside(figure(frame.document.words.code)):
            ink.code(right - side, top, CODE_MODULE, frame.code)
        ink.mark(Mark(kind="code", key="", x=right - side, y=top, width=side, height=side))
    return top + CODE_SIDE


def head(ink: Ink, frame: Frame, section: Section, top: float, *, first: bool) -> float:
    """Title left, subject right, light lines below; short on each further page. Returns its foot."""
    paper = frame.paper
    right = paper.right - CODE_SIDE - HEAD_GAP
    room = right - paper.left
    titles = TITLES if first else SHORT_TITLES
    subject_room = room * 0.42
    subject_shape, subject = fit_cut(
        section.subject, width=subject_room, styles=titles, lines=3 if first else 1
    )
    subject_width = max((subject_shape.width(line) for line in subject), default=0.0)
    title_room = room - subject_width - (6 * MM if subject else 0)
    words = frame.document.words
    title = section.title if first else f"{section.title} ({words.continued})"
    if first:
        title_shape, lines = fit(title, width=title_room, styles=titles, lines=2)
    else:
        title_shape, lines = fit_cut(title, width=title_room, styles=titles, lines=2)
    with ink.inside(element("H1")):
        title_foot = ink.lines(paper.left, top, lines, title_shape)
        y = max(title_foot, ink.lines(right, top, subject, subject_shape, side="right"))
    y += 1.2 * MM
    shown = section.lines if first else section.lines[:1]
    for index, line in enumerate(shown):
        with ink.inside(element("P", f"head {index}")):
            if first:
                y = ink.paragraph(paper.left, y, room, line, HEAD_LINE) + 0.5 * MM
            else:
                shape, parts = fit_cut(line, width=room, styles=(HEAD_LINE,), lines=1)
                y = ink.lines(paper.left, y, parts, shape)
    y = max(y + 1.2 * MM, corner(ink, frame, top))
    ink.line(paper.left, y, right, y, RULE)
    ink.mark(Mark(kind="head", key=section.title, x=paper.left, y=top, width=paper.inner, height=y - top))
    return y + 4.5 * MM


def draft_word(ink: Ink, x: float, baseline: float, word: str, shape: Style) -> float:
    """DRAFT in white on a black ground, from x; returns its right edge."""
    width = shape.width(word)
    pad = 1.4 * MM
    above, below = ASCENT * shape.size + 0.8 * MM, 0.9 * MM
    ink.rect(x, baseline - above, width + 2 * pad, above + below, fill="black")
    with ink.inside(element("P", "draft word")):
        ink.text(x + pad, baseline, word, shape, white=True)
    ink.mark(
        Mark(kind="draft", key="word", x=x, y=baseline - above, width=width + 2 * pad, height=above + below)
    )
    return x + width + 2 * pad


def revision(frame: Frame) -> str:
    """The revision of an issued pack; a draft has none."""
    return f"{frame.document.words.revision} {frame.issue.revision}" if frame.issue else ""


def mark_of(frame: Frame) -> str:
    """The word in black beside the number: DRAFT, or the mark of an issue; mostly none."""
    return frame.document.words.draft if frame.issue is None else frame.issue.mark


def identity(frame: Frame) -> str:
    """Document number, with the revision of an issued pack."""
    return f"{frame.document.number}  {revision(frame)}".rstrip()


def whole_identity(frame: Frame, width: float) -> tuple[Style, str]:
    """Number and revision in a width. Neither is ever cut: InputError when they are too long."""
    shape, lines = fit(identity(frame), width=width, styles=IDENTITIES, lines=1)
    if len(lines) > 1:
        raise InputError(
            Problem(
                where="document number",
                what=f"“{identity(frame)}” doesn't fit at the foot of a page",
                fix="give a shorter document number in the machine file",
            )
        )
    return shape, lines[0]


def data_line(frame: Frame) -> str:
    """Where the content comes from."""
    words = frame.document.words
    return f"{words.machine_data} {frame.document.data_dated}  ·  {words.content} {frame.digest}"


def footer(ink: Ink, frame: Frame, *, number: int, total: int, heard: bool) -> None:
    """What stands at the foot of a page, `number` of `total`.

    It repeats, so it is `heard` once: how to check that the pack is current must reach everybody.
    """
    with ink.inside(*() if heard else (FOOTER_ARTIFACT,)):
        foot_lines(ink, frame, number=number, total=total)


def foot_lines(ink: Ink, frame: Frame, *, number: int, total: int) -> None:
    """Number and revision or DRAFT, title, page of pages; validity, date of the data and digest."""
    paper, words = frame.paper, frame.document.words
    top = paper.height - MARGIN_BOTTOM - FOOTER_HEIGHT
    ink.line(paper.left, top, paper.right, top, HAIRLINE)
    first = top + 1.5 * MM + ASCENT * FOOTER_STRONG.size
    shape, name = whole_identity(frame, IDENTITY_ROOM)
    with ink.inside(element("P", "foot number")):
        x = paper.left + ink.text(paper.left, first, name, shape) + 3 * MM
    if mark_of(frame):
        x = draft_word(ink, x, first, mark_of(frame), FOOTER_STRONG) + 3 * MM
    page = words.page.format(number=number, total=total)
    with ink.inside(FOOTER_ARTIFACT):
        page_width = ink.text(paper.right, first, page, FOOTER_STRONG, side="right")
    x = max(x + 2 * MM, paper.left + 40 * MM)
    shape, parts = fit_cut(
        frame.document.title,
        width=paper.right - page_width - 4 * MM - x,
        styles=(FOOTER, FOOTER_SMALL),
        lines=1,
    )
    with ink.inside(element("P", "foot title")):
        ink.lines(x, first - ASCENT * shape.size, parts, shape)
    second = top + FOOTER_HEIGHT - 4.5 * MM
    data = data_line(frame)
    with ink.inside(element("P", "foot data")):
        data_width = ink.text(paper.right, second, data, FOOTER_SMALL, side="right")
    parts = wrap(frame.document.footer, FOOTER_SMALL, paper.inner - data_width - 5 * MM)
    if len(parts) > FOOTER_LINES:
        raise InputError(
            Problem(
                where="line at the foot of each page",
                what=f"{len(parts)} lines where {FOOTER_LINES} have room: {frame.document.footer}",
                fix="shorten what the site file says on how to check that a sheet is current",
            )
        )
    with ink.inside(element("P", "foot validity")):
        for index, part in enumerate(parts):
            ink.text(paper.left, second + index * FOOTER_SMALL.leading, part, FOOTER_SMALL)
    ink.mark(Mark(kind="footer", key=page, x=paper.left, y=top, width=paper.inner, height=FOOTER_HEIGHT))
