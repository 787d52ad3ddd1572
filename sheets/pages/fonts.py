"""Faces, their coverage and widths: which glyph of which font stands for a character.

IBM Plex Sans Condensed is the face. What it lacks (Greek, Cyrillic, Δ, Ω) comes from IBM Plex Sans, narrowed
to match; a few signs that neither has are drawn as paths. A character that none has is refused by name,
because a box or a gap in a name on a lock is worse than no sheet.
"""

from __future__ import annotations

import unicodedata
from dataclasses import dataclass
from enum import Enum
from functools import cache, lru_cache
from pathlib import Path
from typing import Literal

import fontpkg_ibm_plex_sans  # type: ignore[import-untyped]  # the package ships no types
import fontpkg_ibm_plex_sans_condensed  # type: ignore[import-untyped]  # the package ships no types
from reportlab.pdfbase import pdfmetrics
from reportlab.pdfbase.ttfonts import TTFont

from sheets.errors import InputError, Problem


class Weight(Enum):
    """Weights in use. Hierarchy is made by weight and size, never by grey."""

    REGULAR = "Regular"
    SEMIBOLD = "SemiBold"
    BOLD = "Bold"


Source = Literal["condensed", "wide", "path"]

WIDE_FONT = "Sheets-Wide"
WIDE_SCALE = 0.9
"""Horizontal scale of the fallback face, to stand beside the condensed one."""

WIDE_STROKE = {Weight.REGULAR: 0.0, Weight.SEMIBOLD: 0.028, Weight.BOLD: 0.045}
"""Outline added to the fallback face, as a share of the size: only its regular weight is embedded."""

PATH_ADVANCE = {"△": 0.78, "☐": 0.78, "⌀": 0.70}
"""Signs drawn as paths, with their advance as a share of the size."""

ASCENT = 0.74
"""Height above the baseline, as a share of the size, that capitals and figures take."""

DESCENT = 0.21
"""Depth below the baseline, as a share of the size."""


@dataclass(frozen=True, kw_only=True)
class Span:
    """Part of a text that one source draws."""

    source: Source
    text: str
    width: float
    """Advance as a share of the size."""


def font_name(weight: Weight) -> str:
    """Name under which the condensed face of a weight is registered."""
    return f"Sheets-{weight.value}"


@cache
def condensed(weight: Weight) -> TTFont:
    """The condensed face of a weight, registered for embedding."""
    root = Path(fontpkg_ibm_plex_sans_condensed.ROOT) / "files"
    font = TTFont(font_name(weight), str(root / f"IBMPlexSansCondensed-{weight.value}.ttf"))
    pdfmetrics.registerFont(font)
    return font


@cache
def wide() -> TTFont:
    """The fallback face, registered for embedding."""
    root = Path(fontpkg_ibm_plex_sans.ROOT) / "files"
    font = TTFont(WIDE_FONT, str(root / "IBMPlexSans[wdth,wght].ttf"))
    pdfmetrics.registerFont(font)
    return font


def settle(text: str) -> str:
    """Text as it is printed: composed characters; line ends and tabs become spaces."""
    return unicodedata.normalize("NFC", text).translate({9: " ", 10: " ", 13: " "})


@lru_cache(maxsize=4096)
def glyph(character: str, weight: Weight) -> tuple[Source, float]:
    """Source and advance (share of the size) of one character.

    Raises InputError for a character that no source has.
    """
    code = ord(character)
    face = condensed(weight).face
    if code in face.charToGlyph:
        return "condensed", face.charWidths[code] / 1000
    if character in PATH_ADVANCE:
        return "path", PATH_ADVANCE[character]
    fallback = wide().face
    if code in fallback.charToGlyph and unicodedata.category(character) not in {"Cf", "Cc"}:
        return "wide", fallback.charWidths[code] / 1000 * WIDE_SCALE
    name = unicodedata.name(character, "a character without a name")
    raise InputError(
        Problem(
            where=f"character U+{code:04X}",
            what=f"{name} has no glyph in the fonts of the sheets, so it can't be printed",
            fix="write the text with Latin, Greek or Cyrillic letters and the usual signs",
        )
    )


def coded(text: str) -> str:
    """A text in which each character without a glyph stands as its code: [U+738B].

    For what people told a register: a record is shown, whatever stands in it.
    """
    return "".join(_coded(character) for character in settle(text))


def _coded(character: str) -> str:
    try:
        glyph(character, Weight.REGULAR)
    except InputError:
        return f"[U+{ord(character):04X}]"
    return character


@lru_cache(maxsize=8192)
def spans(text: str, weight: Weight) -> tuple[Span, ...]:
    """Cut a text into spans, one source each. Text that looks like markup stays what it is."""
    found: list[Span] = []
    for character in settle(text):
        source, width = glyph(character, weight)
        if found and found[-1].source == source and source != "path":
            last = found[-1]
            found[-1] = Span(source=source, text=last.text + character, width=last.width + width)
        else:
            found.append(Span(source=source, text=character, width=width))
    return tuple(found)


def text_width(text: str, size: float, weight: Weight) -> float:
    """Width of a text in points at a size in points."""
    return size * sum(span.width for span in spans(text, weight))
