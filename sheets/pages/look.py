"""Sizes, weights and distances of the look, in one place. Lengths in points."""

from __future__ import annotations

from sheets.pages.fonts import Weight
from sheets.pages.placed import MM
from sheets.pages.text import style

PAPERS = {"A4": (210 * MM, 297 * MM), "Letter": (612.0, 792.0)}

MARGIN_LEFT = 18 * MM
"""Wide enough for the holes of a folder."""
MARGIN_RIGHT = 15 * MM
MARGIN_TOP = 12 * MM
MARGIN_BOTTOM = 12 * MM
MARGIN_LEAST = 12 * MM
"""Nothing is printed nearer to an edge, so that a crop of 5 mm takes nothing away."""

HAIRLINE = 0.5
RULE = 1.0
FRAME = 1.1
HEAVY = 2.0

TITLES = tuple(style(size, Weight.BOLD, size * 1.12) for size in (23, 20, 17, 14, 12))
SHORT_TITLES = tuple(style(size, Weight.BOLD, size * 1.15) for size in (15, 13, 11))
HEAD_LINE = style(10.5)

BANNER_WORD = style(22, Weight.BOLD)
BANNER_SIDES = tuple(style(size, Weight.SEMIBOLD, size * 1.15) for size in (11.5, 10.5, 9.5, 8.5))

HEADING = {1: style(14, Weight.BOLD), 2: style(11.5, Weight.SEMIBOLD)}
BODY = style(10.5)
STRONG = style(12, Weight.SEMIBOLD)
SMALL = style(8.8)

STEP_NUMBER = style(18, Weight.BOLD)
ORDER = style(12.5, Weight.SEMIBOLD, 15)
STEP_LINE = style(10.5, leading=12.8)
LABEL = style(8.5)
LABEL_STRONG = style(8.5, Weight.SEMIBOLD)
UNIT = style(10)

ACT_NAME = style(14, Weight.BOLD)

SIGNAL = style(14, Weight.BOLD, 17)
HAZARD = style(12.5, Weight.SEMIBOLD, 16)
WARNING_LINE = style(11, leading=13.6)

HOLD_WORD = style(17, Weight.BOLD)

CELL = style(9.5, leading=11.6)
CELL_HEAD = LABEL_STRONG

TARGET = style(30, Weight.BOLD, 30)
WINDOW = style(14.5, Weight.SEMIBOLD, 17)
NEVER = style(14.5, Weight.BOLD, 17)
CAPTION = style(11, Weight.SEMIBOLD)

FOOTER_STRONG = style(10, Weight.BOLD)
FOOTER = style(9.2)
FOOTER_SMALL = style(8.5)
FOOTER_HEIGHT = 13 * MM

CODE_MODULE = 0.55 * MM
CODE_SIDE = 37 * CODE_MODULE
"""Room kept for a code of version 5, whatever its version, so that a draft has the same pages."""
CODE_QUIET_MODULES = 4
