"""What a placed item is to a reader who hears the page: the way from its section down to its element.

Each placed item carries a path of elements, put on where the item is made, so nothing is guessed afterwards.
Structure types are those of ISO 32000-1, 14.8.4; names of our own are mapped onto them in `OWN`.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final, Literal, TypeAlias

ARTIFACT: Final = "Artifact"
GROUP: Final = ""
"""An element that isn't written: it tells apart what lies in it, and its children stand in its place."""

OWN: Final = {"Warning": "Div", "HoldPoint": "Div", "SettingPanel": "Div", "SettingTag": "Sect"}
"""Our own types, and what each one is where a reader doesn't know it."""

HOLDING: Final = frozenset(
    {"P", "H1", "H2", "H3", "Lbl", "LBody", "TH", "TD", "Caption", "Figure", "Form"},
)
"""Types that hold ink; all others hold elements."""


@dataclass(frozen=True, kw_only=True)
class Element:
    """One element of the structure, told from those beside it by its type and key."""

    type: str
    key: int | str = 0
    alt: str = ""
    """Of a figure: what stands for it."""
    columns: int = 0
    """Of a table row: so many cells, also where some hold no ink."""
    head: bool = False
    """Of a table row: its cells are the heads of their columns."""
    span: int = 1
    """Of a cell: so many columns."""


Path: TypeAlias = tuple[Element, ...]


def element(type_: str, key: int | str = 0) -> Element:
    """An element of a type; its key tells it from others of that type beside it."""
    return Element(type=type_, key=key)


def figure(alt: str, key: int | str = 0) -> Element:
    """A drawing, with the words that stand for it."""
    return Element(type="Figure", key=key, alt=alt)


def item_of_list(key: int | str) -> Path:
    """An item of a list; its label and body follow."""
    return (element("L"), element("LI", key))


Kind: TypeAlias = Literal["Layout", "Header", "Footer", "Page"]

HEADER: Final = element(ARTIFACT, "Header")
"""What repeats at the head of a page: everything there has been said on the first page of its section."""
FOOTER: Final = element(ARTIFACT, "Footer")
CUT_MARKS: Final = element(ARTIFACT, "Page")
"""Outside of what the page says: lines to cut along."""
LAYOUT: Final = element(ARTIFACT, "Layout")
"""Rules, frames, boxes to write in."""


def home(path: Path, *, text: bool) -> Path:
    """The path down to the element that holds an item, or to the artifact that it is.

    Lines and fields are layout, save in a figure; a figure is one thing, whatever is written in it.
    """
    for index, step in enumerate(path):
        if step.type == ARTIFACT:
            return (step,)
        if step.type == "Figure":
            return path[: index + 1]
    return path if text and path else (LAYOUT,)
