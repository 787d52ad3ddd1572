"""Placed pages: ink with its place, before anything is drawn.

All lengths in this package are points (1/72 in) unless a name says otherwise. The origin is the upper left
corner of the paper and y grows downwards. Nothing here knows the library that draws.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Literal

from sheets.pages.document import SheetKind
from sheets.pages.fonts import ASCENT, DESCENT, Weight, text_width
from sheets.pages.roles import Path

MM = 72 / 25.4
"""Points in a millimetre."""

Fill = Literal["none", "black", "white"]


@dataclass(frozen=True, kw_only=True)
class Inked:
    """What all items have."""

    path: Path = ()
    """What it is to a reader who hears the page; layout if nothing is said."""


@dataclass(frozen=True, kw_only=True)
class TextRun(Inked):
    """One line of text in one weight; x, y is the start of its baseline."""

    x: float
    y: float
    text: str
    size: float
    weight: Weight
    white: bool = False
    """White on a black ground."""
    upward: bool = False
    """Turned a quarter to the left: reads from the foot of the page to its head."""


@dataclass(frozen=True, kw_only=True)
class Line(Inked):
    x1: float
    y1: float
    x2: float
    y2: float
    thickness: float
    dashed: bool = False
    white: bool = False


@dataclass(frozen=True, kw_only=True)
class Rect(Inked):
    """A rectangle by its upper left corner; thickness 0 draws no outline."""

    x: float
    y: float
    width: float
    height: float
    thickness: float = 0.0
    fill: Fill = "none"


@dataclass(frozen=True, kw_only=True)
class Polygon(Inked):
    """Joined points; open when it is not closed, as an arc is."""

    points: tuple[tuple[float, float], ...]
    thickness: float = 0.0
    fill: Fill = "none"
    closed: bool = True
    white: bool = False
    """White outline."""


@dataclass(frozen=True, kw_only=True)
class Circle(Inked):
    x: float
    y: float
    radius: float
    thickness: float = 0.0
    fill: Fill = "none"


@dataclass(frozen=True, kw_only=True)
class Code(Inked):
    """A matrix code; rows of dark modules from its upper left corner, without the quiet zone."""

    x: float
    y: float
    module: float
    rows: tuple[tuple[bool, ...], ...]


Item = TextRun | Line | Rect | Polygon | Circle | Code


@dataclass(frozen=True, kw_only=True)
class Mark:
    """A named region of a page: what stands there, for rules and for tests."""

    kind: Literal[
        "banner", "head", "heading", "paragraph", "warning", "step", "hold", "row", "table head", "key line",
        "emphasis", "panel", "face", "box", "sign", "tag", "draft", "code", "footer", "title block",
    ]  # fmt: skip
    key: str
    x: float
    y: float
    width: float
    height: float
    path: Path = ()
    """What it is part of."""


@dataclass(frozen=True, kw_only=True)
class PlacedPage:
    """One page: its number in the pack and everything on it."""

    number: int
    total: int
    kind: SheetKind
    width: float
    height: float
    bookmark: str | None
    """On the first page of a section only."""
    items: tuple[Item, ...]
    marks: tuple[Mark, ...]

    def marked(self, kind: str) -> tuple[Mark, ...]:
        """Regions of one kind."""
        return tuple(mark for mark in self.marks if mark.kind == kind)

    @property
    def runs(self) -> tuple[TextRun, ...]:
        """All text on the page."""
        return tuple(item for item in self.items if isinstance(item, TextRun))


Extent = tuple[float, float, float, float]
"""Left, top, right, bottom."""


def extent(item: Item) -> Extent:
    """The room that an item takes, half its outline included."""
    match item:
        case TextRun():
            width = text_width(item.text, item.size, item.weight)
            if item.upward:
                return (item.x - ASCENT * item.size, item.y - width, item.x + DESCENT * item.size, item.y)
            return (item.x, item.y - ASCENT * item.size, item.x + width, item.y + DESCENT * item.size)
        case Line():
            left, right = sorted((item.x1, item.x2))
            top, bottom = sorted((item.y1, item.y2))
            return (left, top, right, bottom)
        case Rect():
            half = item.thickness / 2
            return (item.x - half, item.y - half, item.x + item.width + half, item.y + item.height + half)
        case Polygon():
            half = item.thickness / 2
            xs = [x for x, _ in item.points]
            ys = [y for _, y in item.points]
            return (min(xs) - half, min(ys) - half, max(xs) + half, max(ys) + half)
        case Circle():
            reach = item.radius + item.thickness / 2
            return (item.x - reach, item.y - reach, item.x + reach, item.y + reach)
        case Code():
            side = item.module * len(item.rows)
            return (item.x, item.y, item.x + side, item.y + side)


def moved(item: Item, dx: float, dy: float, under: Path = ()) -> Item:
    """The same item elsewhere, as part of what it now lies in."""
    path = under + item.path if under else item.path
    match item:
        case Line():
            return replace(
                item, x1=item.x1 + dx, y1=item.y1 + dy, x2=item.x2 + dx, y2=item.y2 + dy, path=path
            )
        case Polygon():
            return replace(item, points=tuple((x + dx, y + dy) for x, y in item.points), path=path)
        case _:
            return replace(item, x=item.x + dx, y=item.y + dy, path=path)
