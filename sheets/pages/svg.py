"""Drawing placed items as SVG, for a page on a screen: the same ink as on paper, without style attributes.

Presentation attributes only, since the record page allows no inline style. Lengths stay points.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from html import escape

from sheets.pages.document import GaugeFace
from sheets.pages.face import dial_face
from sheets.pages.fonts import Weight
from sheets.pages.ink import Ink
from sheets.pages.placed import MM, Circle, Code, Item, Line, Polygon, Rect, TextRun
from sheets.pages.text import style

FACE_SIDE = 60 * MM
_WEIGHTS = {Weight.REGULAR: "400", Weight.SEMIBOLD: "600", Weight.BOLD: "700"}


def dial_svg(face: GaugeFace, *, alternative: str) -> str:
    """A dial by itself; ``alternative`` is said to who doesn't see it.

    Raises InputError for a face whose numbers don't stand on its own scale.
    """
    ink = Ink()
    dial_face(ink, face, x=FACE_SIDE / 2, y=FACE_SIDE / 2, diameter=FACE_SIDE)
    return svg(ink.items, width=FACE_SIDE, height=FACE_SIDE, alternative=alternative, name="face")


def svg(items: Sequence[Item], *, width: float, height: float, alternative: str, name: str) -> str:
    """Items on a ground of ``width`` and ``height`` in points; ``name`` is the class of the drawing."""
    inner = "".join(part for item in items for part in _drawn(item))
    return (
        f'<svg class="{escape(name)}" xmlns="http://www.w3.org/2000/svg" role="img" '
        f'aria-label="{escape(alternative)}" viewBox="0 0 {_n(width)} {_n(height)}">{inner}</svg>'
    )


def _drawn(item: Item) -> Iterator[str]:
    match item:
        case TextRun():
            yield _text(item)
        case Line():
            dash = ' stroke-dasharray="3 2.5"' if item.dashed else ""
            yield (
                f'<line x1="{_n(item.x1)}" y1="{_n(item.y1)}" x2="{_n(item.x2)}" y2="{_n(item.y2)}" '
                f'stroke="{_ink(white=item.white)}" stroke-width="{_n(item.thickness)}"{dash}/>'
            )
        case Rect():
            yield (
                f'<rect x="{_n(item.x)}" y="{_n(item.y)}" width="{_n(item.width)}" '
                f'height="{_n(item.height)}"{_shape(item.thickness, item.fill)}/>'
            )
        case Polygon():
            points = " ".join(f"{_n(x)},{_n(y)}" for x, y in item.points)
            kind = "polygon" if item.closed else "polyline"
            yield f'<{kind} points="{points}"{_shape(item.thickness, item.fill, white=item.white)}/>'
        case Circle():
            yield (
                f'<circle cx="{_n(item.x)}" cy="{_n(item.y)}" r="{_n(item.radius)}"'
                f"{_shape(item.thickness, item.fill)}/>"
            )
        case Code():
            for down, row in enumerate(item.rows):
                for across, dark in enumerate(row):
                    if dark:
                        x, y = item.x + across * item.module, item.y + down * item.module
                        side = _n(item.module)
                        yield f'<rect x="{_n(x)}" y="{_n(y)}" width="{side}" height="{side}"/>'


def _text(item: TextRun) -> str:
    """Anchored in its middle and held to its width: the screen's font is another one."""
    width = style(item.size, item.weight).width(item.text)
    x, y = (item.x, item.y - width / 2) if item.upward else (item.x + width / 2, item.y)
    turn = f' transform="rotate(-90 {_n(x)} {_n(y)})"' if item.upward else ""
    return (
        f'<text x="{_n(x)}" y="{_n(y)}" text-anchor="middle" font-size="{_n(item.size)}" '
        f'textLength="{_n(width)}" lengthAdjust="spacingAndGlyphs" '
        f'font-weight="{_WEIGHTS[item.weight]}" fill="{_ink(white=item.white)}"{turn}>'
        f"{escape(item.text)}</text>"
    )


def _shape(thickness: float, fill: str, *, white: bool = False) -> str:
    stroke = f' stroke="{_ink(white=white)}" stroke-width="{_n(thickness)}"' if thickness else ""
    return f' fill="{fill}"{stroke}'


def _ink(*, white: bool) -> str:
    return "white" if white else "black"


def _n(value: float) -> str:
    """A length with as many digits as a screen shows."""
    return f"{value:.2f}".rstrip("0").rstrip(".")
