"""One setting over time, drawn: readings as found open, as left filled, with the limits they are held to."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from datetime import date
from itertools import pairwise
from typing import Final

from sheets.pages.fonts import Weight
from sheets.pages.ink import Ink
from sheets.pages.placed import MM, Fill
from sheets.pages.svg import svg
from sheets.pages.text import style

WIDTH: Final = 98 * MM
HEIGHT: Final = 64 * MM
LEFT, RIGHT, TOP, BOTTOM = 12 * MM, 20 * MM, 4 * MM, 9 * MM
DOT: Final = 1.3 * MM
LABEL: Final = style(9.5, Weight.SEMIBOLD)


@dataclass(frozen=True, kw_only=True)
class Point:
    """A reading on a day."""

    on: date
    value: float
    left: bool
    """As left; else as found."""


@dataclass(frozen=True, kw_only=True)
class Limit:
    """A line across the plot."""

    value: float
    says: str
    dashed: bool = False


def plot_svg(points: Sequence[Point], limits: Sequence[Limit], *, alternative: str) -> str:
    """Readings with their limits, all in one unit; ``alternative`` is said to who doesn't see it.

    Raises ValueError without readings.
    """
    if not points:
        raise ValueError("nothing was read")
    values = [one.value for one in points] + [one.value for one in limits]
    low, high = min(values), max(values)
    room = (high - low or 1.0) * 0.08
    low, high = low - room, high + room
    first, last = min(one.on for one in points), max(one.on for one in points)
    days = (last - first).days
    ink = Ink()
    right, foot = WIDTH - RIGHT, HEIGHT - BOTTOM

    def across(on: date) -> float:
        share = (on - first).days / days if days else 0.5
        return LEFT + DOT * 2 + share * (right - LEFT - DOT * 4)

    def down(value: float) -> float:
        return TOP + (high - value) / (high - low) * (foot - TOP)

    ink.line(LEFT, TOP, LEFT, foot, 1.0)
    ink.line(LEFT, foot, right, foot, 1.0)
    below = -math.inf
    for one in sorted(limits, key=lambda limit: -limit.value):
        ink.line(LEFT, down(one.value), right, down(one.value), 1.2, dashed=one.dashed)
        line = max(down(one.value) + LABEL.size * 0.35, below + LABEL.size)
        ink.text(right + 1.5 * MM, line, one.says, LABEL)
        below = line
    for value in (min(one.value for one in points), max(one.value for one in points)):
        ink.text(LEFT - 1.5 * MM, down(value) + LABEL.size * 0.35, f"{value:g}", LABEL, side="right")
    if days:
        ink.text(LEFT, HEIGHT - 2.5 * MM, first.isoformat(), LABEL)
        ink.text(right, HEIGHT - 2.5 * MM, last.isoformat(), LABEL, side="right")
    else:
        ink.text((LEFT + right) / 2, HEIGHT - 2.5 * MM, first.isoformat(), LABEL, side="centre")
    ordered = sorted(points, key=lambda point: point.on)
    for point, after in pairwise(ordered):
        ink.line(across(point.on), down(point.value), across(after.on), down(after.value), 0.7)
    for point in ordered:
        fill: Fill = "black" if point.left else "white"
        ink.circle(across(point.on), down(point.value), DOT, thickness=1.4, fill=fill)
    return svg(ink.items, width=WIDTH, height=HEIGHT, alternative=alternative, name="plot")
