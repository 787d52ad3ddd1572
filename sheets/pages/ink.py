"""Gathering placed items: a small pen, and the unbreakable piece that it makes."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from contextlib import contextmanager
from dataclasses import dataclass, replace
from typing import Literal

from sheets.pages.fonts import ASCENT
from sheets.pages.placed import Circle, Code, Fill, Item, Line, Mark, Polygon, Rect, TextRun, moved
from sheets.pages.roles import Element, Path
from sheets.pages.text import Style, wrap

Side = Literal["left", "centre", "right"]


@dataclass(frozen=True, kw_only=True)
class Piece:
    """Items that stand together on a page, from (0, 0) down."""

    height: float
    items: tuple[Item, ...]
    marks: tuple[Mark, ...] = ()
    space_before: float = 0.0
    """Left out at the top of a page."""
    keep_with_next: bool = False
    fresh: Piece | None = None
    """What stands in its place where it begins a page: a table row with its head, for example."""
    name: str = ""
    """What to call it when it is too high for a page."""
    path: Path = ()
    """What all of it is part of."""

    def within(self, *path: Element) -> Piece:
        """The same piece as part of something."""
        fresh = self.fresh.within(*path) if self.fresh else None
        return replace(self, path=(*path, *self.path), fresh=fresh)


class Ink:
    """Collects items and marks in the coordinates of one piece or page."""

    def __init__(self) -> None:
        self.items: list[Item] = []
        self.marks: list[Mark] = []
        self.path: Path = ()

    @contextmanager
    def inside(self, *path: Element) -> Iterator[None]:
        """What is inked meanwhile is part of something."""
        outer = self.path
        self.path = (*outer, *path)
        try:
            yield
        finally:
            self.path = outer

    def text(
        self, x: float, y: float, text: str, shape: Style, *, side: Side = "left", white: bool = False
    ) -> float:
        """One line with its baseline at y; returns its width."""
        width = shape.width(text)
        start = x - {"left": 0.0, "centre": width / 2, "right": width}[side]
        if text.strip():
            self.items.append(
                TextRun(
                    x=start,
                    y=y,
                    text=text,
                    size=shape.size,
                    weight=shape.weight,
                    white=white,
                    path=self.path,
                )
            )
        return width

    def upward(self, x: float, y: float, text: str, shape: Style, *, white: bool = False) -> None:
        """One line that reads upwards, from (x, y)."""
        if text.strip():
            self.items.append(
                TextRun(
                    x=x,
                    y=y,
                    text=text,
                    size=shape.size,
                    weight=shape.weight,
                    white=white,
                    upward=True,
                    path=self.path,
                )
            )

    def lines(
        self,
        x: float,
        top: float,
        lines: Iterable[str],
        shape: Style,
        *,
        side: Side = "left",
        white: bool = False,
    ) -> float:
        """Lines from a top edge down; returns the bottom edge."""
        for line in lines:
            self.text(x, top + ASCENT * shape.size, line, shape, side=side, white=white)
            top += shape.leading
        return top

    def paragraph(self, x: float, top: float, width: float, text: str, shape: Style) -> float:
        """Wrapped text from a top edge down; returns the bottom edge."""
        return self.lines(x, top, wrap(text, shape, width), shape)

    def line(
        self, x1: float, y1: float, x2: float, y2: float, thickness: float, *, dashed: bool = False
    ) -> None:
        self.items.append(
            Line(x1=x1, y1=y1, x2=x2, y2=y2, thickness=thickness, dashed=dashed, path=self.path)
        )

    def rect(
        self, x: float, y: float, width: float, height: float, *, thickness: float = 0.0, fill: Fill = "none"
    ) -> None:
        self.items.append(
            Rect(x=x, y=y, width=width, height=height, thickness=thickness, fill=fill, path=self.path)
        )

    def polygon(
        self,
        points: Iterable[tuple[float, float]],
        *,
        thickness: float = 0.0,
        fill: Fill = "none",
        closed: bool = True,
        white: bool = False,
    ) -> None:
        self.items.append(
            Polygon(
                points=tuple(points),
                thickness=thickness,
                fill=fill,
                closed=closed,
                white=white,
                path=self.path,
            )
        )

    def circle(
        self, x: float, y: float, radius: float, *, thickness: float = 0.0, fill: Fill = "none"
    ) -> None:
        self.items.append(Circle(x=x, y=y, radius=radius, thickness=thickness, fill=fill, path=self.path))

    def code(self, x: float, y: float, module: float, rows: tuple[tuple[bool, ...], ...]) -> None:
        self.items.append(Code(x=x, y=y, module=module, rows=rows, path=self.path))

    def mark(self, mark: Mark) -> None:
        self.marks.append(replace(mark, path=self.path))

    def add(self, piece: Piece, dx: float, dy: float) -> float:
        """A piece with its upper left corner at (dx, dy); returns its bottom edge."""
        under = self.path + piece.path
        self.items.extend(moved(item, dx, dy, under) for item in piece.items)
        self.marks.extend(
            replace(mark, x=mark.x + dx, y=mark.y + dy, path=under + mark.path) for mark in piece.marks
        )
        return dy + piece.height

    def piece(
        self,
        height: float,
        *,
        space_before: float = 0.0,
        keep_with_next: bool = False,
        fresh: Piece | None = None,
        name: str = "",
    ) -> Piece:
        """What was gathered, as one piece."""
        return Piece(
            height=height,
            items=tuple(self.items),
            marks=tuple(self.marks),
            space_before=space_before,
            keep_with_next=keep_with_next,
            fresh=fresh,
            name=name,
        )
