"""Breaking and fitting text: into lines of a width, or into a room by size."""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import dataclass
from functools import lru_cache

from sheets.pages.fonts import Weight, settle, text_width


@dataclass(frozen=True, kw_only=True)
class Style:
    """Size, weight and distance from baseline to baseline."""

    size: float
    weight: Weight
    leading: float

    def width(self, text: str) -> float:
        """Width of a text in this style."""
        return text_width(text, self.size, self.weight)


def style(size: float, weight: Weight = Weight.REGULAR, leading: float | None = None) -> Style:
    """A style with the usual leading of 1.24 times its size."""
    return Style(size=size, weight=weight, leading=round(size * 1.24, 2) if leading is None else leading)


SLACK = 1e-6
"""A text in a room of its own width must not break by a rounding."""

NUMBER = re.compile(r"^[(±≤≥<>−-]*\d[\d.,]*$")
UNIT = re.compile(
    r"^(bar|psi|MPa|kPa|L/min|gal/min|cm3|cm³|°C|°F|mm|cm|m|in|s|min|h|kW|W|hp|V|A|Hz|kg|lb|kJ|J|N·m|N|rpm|r/min|rev/min|m/s|mm/s|%)"
    r"[.,;:)]*$"
)


def words(text: str) -> list[str]:
    """Words that a line may end after; a number stays with its unit."""
    found: list[str] = []
    for word in settle(text).split(" "):
        if found and UNIT.match(word) and NUMBER.match(found[-1].rsplit(" ", 1)[-1]):
            found[-1] += " " + word
        else:
            found.append(word)
    return found


def chopped(word: str, shape: Style, width: float) -> Iterator[str]:
    """A word cut where it must be, since it is wider than the room."""
    part = ""
    for character in word:
        if part and shape.width(part + character) > width + SLACK:
            yield part
            part = ""
        part += character
    yield part


@lru_cache(maxsize=4096)
def wrap(text: str, shape: Style, width: float) -> tuple[str, ...]:
    """Lines of a text within a width. Empty text has no lines."""
    if not text.strip():
        return ()
    lines: list[str] = []
    line = ""
    for word in words(text):
        longer = f"{line} {word}" if line else word
        if shape.width(longer) <= width + SLACK:
            line = longer
            continue
        if line:
            lines.append(line)
        *full, line = chopped(word, shape, width)
        lines.extend(full)
    lines.append(line)
    return tuple(lines)


def shortened(text: str, shape: Style, width: float) -> str:
    """A line that ends in an ellipsis where it doesn't fit."""
    if shape.width(text) <= width + SLACK:
        return text
    kept = settle(text)
    while kept and shape.width(kept.rstrip() + "…") > width:
        kept = kept[:-1]
    return kept.rstrip() + "…"


def fit(text: str, *, width: float, styles: tuple[Style, ...], lines: int) -> tuple[Style, tuple[str, ...]]:
    """The largest style in which the text takes no more than the lines; else the smallest, all its lines."""
    for shape in styles:
        broken = wrap(text, shape, width)
        whole = all(shape.width(word) <= width + SLACK for word in words(text))
        if len(broken) <= lines and whole:
            return shape, broken
    return styles[-1], wrap(text, styles[-1], width)


def fit_cut(
    text: str, *, width: float, styles: tuple[Style, ...], lines: int
) -> tuple[Style, tuple[str, ...]]:
    """As `fit`, but never more lines: the last one ends in an ellipsis.

    Only where the whole text stands elsewhere in the pack.
    """
    shape, broken = fit(text, width=width, styles=styles, lines=lines)
    if len(broken) <= lines:
        return shape, broken
    rest = " ".join(broken[lines - 1 :])
    return shape, (*broken[: lines - 1], shortened(rest, shape, width))
