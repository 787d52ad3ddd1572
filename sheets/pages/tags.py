"""Setting tags, ISO/IEC 7810 ID-1, and the sheet that they are cut from."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from sheets.errors import InputError, Problem
from sheets.pages.document import Section, SettingTag
from sheets.pages.face import dial_face, face_alternative, number_face
from sheets.pages.fonts import ASCENT, Weight
from sheets.pages.frame import Frame, data_line, draft_block, draft_word, identity, revision
from sheets.pages.ink import Ink, Piece
from sheets.pages.look import FOOTER, FOOTER_SMALL, HAIRLINE, MARGIN_LEAST
from sheets.pages.placed import MM, Mark
from sheets.pages.roles import CUT_MARKS, element, figure
from sheets.pages.roles import FOOTER as FOOTER_ARTIFACT
from sheets.pages.text import Style, fit, fit_cut, shortened, style, wrap

WIDTH = 85.60 * MM
HEIGHT = 53.98 * MM
"""ISO/IEC 7810:2019, ID-1."""

CODE_MODULE = 0.5 * MM
CODE_SIDE = 37 * CODE_MODULE
INSET = 3 * MM
CODE_TOP = 2.5 * MM
HOLE_RADIUS = 2.5 * MM
DIAL = 26.5 * MM
TEXT_LEFT = 33.5 * MM
CUT_MARK = 1.3 * MM
STRIP = 13 * MM
"""Room left of the tags for what stands at the foot of other pages, turned a quarter."""

ADJUSTER = tuple(style(size, Weight.BOLD) for size in (24, 21, 18, 15, 12, 10))
KIND = tuple(style(size, Weight.SEMIBOLD, size * 1.1) for size in (11, 10, 9, 8))
VALUE = tuple(style(size, Weight.BOLD) for size in (24, 22, 20, 17, 14, 11))
WINDOW = tuple(style(size, Weight.SEMIBOLD) for size in (12, 11, 10, 9, 8))
BASIS = tuple(style(size, leading=size * 1.16) for size in (8.5, 8, 7.5))
LEFT = tuple(style(size, Weight.SEMIBOLD) for size in (9.5, 9, 8.5, 8, 7.5))
FOOT = tuple(style(size) for size in (8.5, 8, 7.5))
REVISION = tuple(style(size, Weight.BOLD) for size in (9.5, 9, 8.5, 8))
TITLE = tuple(style(size, Weight.BOLD) for size in (13, 11, 9.5))
STRIP_FIRST = MARGIN_LEAST + ASCENT * TITLE[0].size
"""Baseline of the first line of the strip."""


def refuse(tag: SettingTag, what: str) -> InputError:
    """The error of a tag whose texts don't fit: on a tag nothing is cut off."""
    return InputError(
        Problem(
            where=f"setting tag of {tag.adjuster}",
            what=f"{what} doesn't fit on a tag of 85.60 × 53.98 mm",
            fix="shorten the text in the machine file",
        )
    )


def one_line(
    ink: Ink, tag: SettingTag, text: str, *, x: float, y: float, width: float, styles: tuple[Style, ...]
) -> float:
    """A line that must stay whole, in the largest style that fits; returns its right edge."""
    if not text:
        return x
    shape, lines = fit(text, width=width, styles=styles, lines=1)
    if len(lines) > 1:
        raise refuse(tag, f"“{text}”")
    return x + ink.text(x, y, lines[0], shape)


def name_and_kind(ink: Ink, tag: SettingTag, *, width: float) -> None:
    """Adjuster large, its kind below; both shrink, and the kind takes two lines, before they are cut."""
    left = INSET + 2 * HOLE_RADIUS + 2.5 * MM
    room = width - left
    shape, lines = fit_cut(tag.adjuster, width=room, styles=ADJUSTER, lines=1)
    baseline = INSET + 0.6 * MM + ASCENT * ADJUSTER[0].size
    with ink.inside(element("H2")):
        ink.lines(left, baseline - ASCENT * shape.size, lines, shape)
    shape, lines = fit_cut(tag.kind, width=room, styles=KIND, lines=1)
    if shape.width(tag.kind) > room:
        shape, lines = fit_cut(tag.kind, width=room, styles=(KIND[-1],), lines=2)
    with ink.inside(element("P", "kind")):
        ink.lines(left, baseline + 1.7 * MM, lines, shape)


def body(ink: Ink, tag: SettingTag, as_left: str) -> None:
    """Value, window, basis in the right half; as-left and next check across below."""
    right = WIDTH - INSET
    room = right - TEXT_LEFT
    value_baseline = 29.9 * MM
    clear = WIDTH - INSET - CODE_SIDE - 4 * CODE_MODULE - TEXT_LEFT
    shape, lines = fit(tag.value, width=room, styles=VALUE, lines=1)
    if len(lines) > 1:
        raise refuse(tag, f"“{tag.value}”")
    over = value_baseline - ASCENT * shape.size < CODE_TOP + CODE_SIDE + 4 * CODE_MODULE
    if over and shape.width(tag.value) > clear:
        value_baseline = CODE_TOP + CODE_SIDE + 4 * CODE_MODULE + ASCENT * shape.size
    with ink.inside(element("P", "value")):
        ink.text(TEXT_LEFT, value_baseline, lines[0], shape)
    y = value_baseline + 5.2 * MM
    second = f"   {tag.second_unit}" if tag.second_unit else ""
    with ink.inside(element("P", "window")):
        one_line(ink, tag, tag.window + second, x=TEXT_LEFT, y=y, width=room, styles=WINDOW)
    top, most = y + 1.5 * MM, 46.5 * MM - y - 1.5 * MM
    for shape in BASIS:
        wrapped = [line for text in tag.basis for line in wrap(text, shape, room)]
        if len(wrapped) * shape.leading <= most + 0.1:
            with ink.inside(element("P", "basis")):
                ink.lines(TEXT_LEFT, top, wrapped, shape)
            break
    else:
        raise refuse(tag, "the basis of the setting")
    line = 48.75 * MM
    whole = f"{as_left}   ·   {tag.next_check}" if as_left and tag.next_check else as_left or tag.next_check
    with ink.inside(element("P", "as left")):
        one_line(ink, tag, whole, x=INSET, y=line, width=right - INSET, styles=LEFT)


def marked(frame: Frame, footer: str) -> str:
    """The foot of a tag, with the mark of an issue before it; a draft says so elsewhere on it."""
    mark = frame.issue.mark if frame.issue is not None else ""
    return f"{mark} · {footer}" if mark else footer


def tag_piece(tag: SettingTag, frame: Frame) -> Piece:
    """One tag with its hole, face, numbers and code; a draft says so in two places."""
    ink = Ink()
    right = WIDTH - INSET
    words = frame.document.words
    ink.circle(INSET + HOLE_RADIUS, INSET + HOLE_RADIUS + 0.5 * MM, HOLE_RADIUS, thickness=0.7)
    name_and_kind(ink, tag, width=right - CODE_SIDE - 4 * CODE_MODULE)
    if frame.code is None:
        draft_block(
            ink,
            x=right - CODE_SIDE,
            y=CODE_TOP,
            side=CODE_SIDE,
            words=(words.draft, words.not_issued),
            small=FOOT[0],
            inset=2.2 * MM,
        )
    else:
        side = CODE_MODULE * len(frame.code)
        with ink.inside(figure(words.code, "code")):
            ink.code(right - side, CODE_TOP, CODE_MODULE, frame.code)
        ink.mark(Mark(kind="code", key=tag.id, x=right - side, y=CODE_TOP, width=side, height=side))
    centre = INSET + DIAL / 2
    alternative = face_alternative(
        tag.face, target=words.target, window=words.accept, never_exceed=words.never_exceed
    )
    with ink.inside(figure(alternative, "face")):
        if tag.face.digital:
            number_face(ink, tag.face, x=INSET, y=21 * MM, width=DIAL, height=23 * MM, labels=None)
        else:
            dial_face(ink, tag.face, x=centre, y=18.2 * MM + DIAL / 2, diameter=DIAL)
    as_left = tag.as_left
    if frame.issue is not None:
        as_left = dict(frame.issue.as_left).get(tag.id, tag.as_left)
    body(ink, tag, as_left)
    foot = HEIGHT - 1.9 * MM
    with ink.inside(element("P", "foot")):
        one_line(ink, tag, marked(frame, tag.footer), x=INSET, y=foot, width=right - INSET, styles=FOOT)
    known = 20.9 * MM
    room = right - CODE_SIDE - 4 * CODE_MODULE - TEXT_LEFT
    draft_width = REVISION[-1].width(words.draft) + 3 * MM + 2 * MM if frame.issue is None else 0.0
    kept = f"  {revision(frame)}".rstrip()
    shape, _ = fit(identity(frame), width=room - draft_width, styles=REVISION, lines=1)
    number = shortened(frame.document.number, shape, room - draft_width - shape.width(kept))
    with ink.inside(element("P", "identity")):
        end = TEXT_LEFT + ink.text(TEXT_LEFT, known, number + kept, shape)
    if frame.issue is None:
        draft_word(ink, end + 2 * MM, known, words.draft, REVISION[-1])
    ink.mark(Mark(kind="tag", key=tag.id, x=0, y=0, width=WIDTH, height=HEIGHT))
    return ink.piece(HEIGHT, name=tag.id).within(element("SettingTag", tag.id))


@dataclass(frozen=True, kw_only=True)
class Grid:
    """Where tags stand on a paper."""

    left: float
    top: float
    columns: int
    rows: int

    @property
    def count(self) -> int:
        return self.columns * self.rows


def grid_of(frame: Frame) -> Grid:
    """Two columns; as many rows as the paper holds within the margins: five on A4, four on Letter."""
    paper = frame.paper
    rows = int((paper.height - 2 * MARGIN_LEAST - 2 * CUT_MARK) // HEIGHT)
    if rows * HEIGHT + HEIGHT <= paper.height - 2 * MARGIN_LEAST:
        rows += 1
    return Grid(
        left=paper.width - MARGIN_LEAST - CUT_MARK - 2 * WIDTH,
        top=(paper.height - rows * HEIGHT) / 2,
        columns=2,
        rows=rows,
    )


def cut_lines(ink: Ink, grid: Grid, count: int) -> None:
    """Dashed lines around the tags that are there, and marks beyond their corners."""
    rows = -(-count // grid.columns)
    columns = min(count, grid.columns)
    right, foot = grid.left + columns * WIDTH, grid.top + rows * HEIGHT
    for row in range(rows + 1):
        y = grid.top + row * HEIGHT
        short = row == rows and count % grid.columns and rows > 1
        end = grid.left + WIDTH if short else right
        ink.line(grid.left, y, end, y, HAIRLINE, dashed=True)
        ink.line(grid.left - CUT_MARK, y, grid.left, y, 0.8)
        ink.line(end, y, end + CUT_MARK, y, 0.8)
    for column in range(columns + 1):
        x = grid.left + column * WIDTH
        short = column == grid.columns and count % grid.columns and rows > 1
        ink.line(x, grid.top, x, foot - HEIGHT if short else foot, HAIRLINE, dashed=True)
        ink.line(x, grid.top - CUT_MARK, x, grid.top, 0.8)
        end = foot - HEIGHT if short else foot
        ink.line(x, end, x, end + CUT_MARK, 0.8)


def strip(ink: Ink, frame: Frame, section: Section, *, number: int, total: int, first: bool) -> None:
    """Left of the tags, reading upwards: title and subject, then what stands at the foot of other pages.

    On the first page of its section the title is the heading; the rest repeats on every page.
    """
    with ink.inside(FOOTER_ARTIFACT):
        y = strip_draft(ink, frame)
        foot_lines_upward(ink, frame, section, number=number, total=total)
    room = y - MARGIN_LEAST - REVISION[0].width(page_of(frame, number, total)) - 5 * MM
    shape, lines = fit_cut(f"{section.title}   {section.subject}", width=room, styles=TITLE, lines=1)
    with ink.inside(element("H1") if first else FOOTER_ARTIFACT):
        for text in lines:
            ink.upward(STRIP_FIRST, y, text, shape)


def page_of(frame: Frame, number: int, total: int) -> str:
    """Number of a page among all."""
    return frame.document.words.page.format(number=number, total=total)


def strip_draft(ink: Ink, frame: Frame) -> float:
    """DRAFT at the foot of the strip; returns where the title begins."""
    words = frame.document.words
    y = frame.paper.height - MARGIN_LEAST
    if frame.issue is not None:
        return y
    shape = TITLE[0]
    width = shape.width(words.draft) + 3 * MM
    ink.rect(MARGIN_LEAST, y - width, 4.7 * MM, width, fill="black")
    ink.upward(MARGIN_LEAST + 4.0 * MM, y - 1.5 * MM, words.draft, shape, white=True)
    ink.mark(Mark(kind="draft", key="strip", x=MARGIN_LEAST, y=y - width, width=4.7 * MM, height=width))
    return y - width - 4 * MM


def foot_lines_upward(ink: Ink, frame: Frame, section: Section, *, number: int, total: int) -> None:
    """Page of pages, number and title, where the data come from, how to check that it is current."""
    foot = frame.paper.height - MARGIN_LEAST
    length = frame.paper.height - 2 * MARGIN_LEAST
    page = page_of(frame, number, total)
    ink.upward(STRIP_FIRST, MARGIN_LEAST + REVISION[0].width(page), page, REVISION[0])
    second = STRIP_FIRST + 4.3 * MM
    names = f"{identity(frame)}  ·  {frame.document.title}"
    data = data_line(frame)
    data_width = FOOTER_SMALL.width(data)
    room = length - data_width - 6 * MM
    shape, lines = fit_cut(names, width=room, styles=(FOOTER, FOOTER_SMALL), lines=1)
    for text in lines:
        ink.upward(second, foot, text, shape)
    ink.upward(second, MARGIN_LEAST + data_width, data, FOOTER_SMALL)
    third = " ".join(text for text in (frame.document.footer, *section.lines) if text)
    shape, lines = fit_cut(third, width=length, styles=(FOOTER_SMALL,), lines=1)
    for text in lines:
        ink.upward(second + 3.4 * MM, foot, text, shape)
    ink.mark(Mark(kind="footer", key=page, x=MARGIN_LEAST, y=MARGIN_LEAST, width=STRIP, height=length))


def tag_pages(tags: Sequence[SettingTag], frame: Frame) -> list[tuple[SettingTag, ...]]:
    """Tags page by page."""
    count = grid_of(frame).count
    return [tuple(tags[start : start + count]) for start in range(0, len(tags), count)]


def tag_page(
    ink: Ink,
    tags: tuple[SettingTag, ...],
    frame: Frame,
    section: Section,
    *,
    number: int,
    total: int,
    first: bool,
) -> None:
    """One page of tags; on the first one of its section the title is a heading."""
    grid = grid_of(frame)
    strip(ink, frame, section, number=number, total=total, first=first)
    for index, tag in enumerate(tags):
        row, column = divmod(index, grid.columns)
        ink.add(tag_piece(tag, frame), grid.left + column * WIDTH, grid.top + row * HEIGHT)
    with ink.inside(CUT_MARKS):
        cut_lines(ink, grid, len(tags))
