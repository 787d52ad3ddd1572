"""What must hold of the structure of every printed pack. Each rule gives sentences that say where it breaks.

Read from the bytes of the PDF, by nothing that the printing uses but the library that reads PDFs.
"""

from __future__ import annotations

import io
from collections import Counter
from collections.abc import Iterator
from dataclasses import dataclass, field
from itertools import pairwise

import pikepdf

DRAWING = {
    *("S", "s", "f", "F", "f*", "B", "B*", "b", "b*"),
    *("Tj", "TJ", "'", '"', "Do", "sh", "BI", "EI", "INLINE IMAGE"),
}
"""Operators that leave ink: ISO 32000-1, tables 60, 77, 87, 92, 109."""
HOLDING = {"P", "H1", "H2", "H3", "Lbl", "LBody", "TH", "TD", "Caption", "Figure"}
PARENTS = {
    "Sect": {"Document", "Sect"},
    "LI": {"L"},
    "Lbl": {"LI"},
    "LBody": {"LI"},
    "TR": {"Table"},
    "TH": {"TR"},
    "TD": {"TR"},
    "Caption": {"Table"},
    "Table": {"Sect", "Div", "LBody"},
    "L": {"Sect", "Div", "LBody"},
}
"""Where an element may stand: ISO 32000-1, tables 333 to 337."""


@dataclass(kw_only=True)
class Heard:
    """An element as read back."""

    type: str
    own: str
    """Type as written, before the role map."""
    object: pikepdf.Object
    parent: Heard | None
    children: list[Heard] = field(default_factory=list)
    ink: list[tuple[int, int]] = field(default_factory=list)
    """Page and MCID."""
    fields: list[pikepdf.Object] = field(default_factory=list)

    def walk(self) -> Iterator[Heard]:
        yield self
        for child in self.children:
            yield from child.walk()

    def of(self, *types: str) -> list[Heard]:
        return [one for one in self.walk() if one.type in types]


def tree_of(pdf: pikepdf.Pdf) -> Heard:
    """The structure tree of a file."""
    pages = {page.obj.objgen: number for number, page in enumerate(pdf.pages)}
    root = pdf.Root.StructTreeRoot
    roles = {str(key): str(value) for key, value in root.get("/RoleMap", {}).items()}

    def read(found: pikepdf.Object, parent: Heard | None) -> Heard:
        own = str(found.S)
        heard = Heard(type=roles.get(own, own)[1:], own=own[1:], object=found, parent=parent)
        kids = found.get("/K", pikepdf.Array())
        for kid in kids if isinstance(kids, pikepdf.Array) else [kids]:
            if isinstance(kid, int):
                heard.ink.append((pages[found.Pg.objgen], kid))
            elif kid.get("/Type") == "/MCR":
                heard.ink.append((pages[kid.Pg.objgen], int(kid.MCID)))
            elif kid.get("/Type") == "/OBJR":
                heard.fields.append(kid.Obj)
            else:
                heard.children.append(read(kid, heard))
        return heard

    return read(root.K, None)


def marks_of(page: pikepdf.Page) -> tuple[list[int], list[str]]:
    """MCIDs of a page in their order, and where ink lies outside of them and of artifacts."""
    found: list[int] = []
    bare: list[str] = []
    around: list[str] = []
    for operands, operator in pikepdf.parse_content_stream(page):
        name = str(operator)
        if name in ("BDC", "BMC"):
            tag = str(operands[0])
            if name == "BDC" and isinstance(operands[1], pikepdf.Dictionary) and "/MCID" in operands[1]:
                if around:
                    bare.append(f"{tag} inside {around[-1]}")
                found.append(int(operands[1].MCID))
                around.append("content")
            else:
                around.append("artifact" if tag == "/Artifact" else "span")
        elif name == "EMC":
            around.pop()
        elif name in DRAWING and not {"content", "artifact"} & set(around):
            bare.append(f"{name} is neither content nor artifact")
    if around:
        bare.append("marked content is left open")
    return found, bare


def ink(pdf: pikepdf.Pdf, tree: Heard) -> Iterator[str]:
    """All ink is content or artifact; each run stands once on its page, in the tree, in the parent tree."""
    numbers = pdf.Root.StructTreeRoot.ParentTree.Nums
    parents = {int(numbers[k]): numbers[k + 1] for k in range(0, len(numbers), 2)}
    holders = {place: one for one in tree.walk() for place in one.ink}
    counted = Counter(place for one in tree.walk() for place in one.ink)
    seen = set()
    for number, page in enumerate(pdf.pages):
        found, bare = marks_of(page)
        yield from (f"page {number + 1}: {words}" for words in bare)
        if str(page.obj.get("/Tabs")) != "/S":
            yield f"page {number + 1}: fields aren't in the order of the structure"
        entry = parents[int(page.obj.StructParents)]
        if sorted(found) != list(range(len(entry))):
            yield f"page {number + 1}: {len(found)} runs on the page, {len(entry)} in the parent tree"
            continue
        for mcid in found:
            place = (number, mcid)
            seen.add(place)
            if counted[place] != 1:
                yield f"page {number + 1}: run {mcid} stands {counted[place]} times in the tree"
            elif entry[mcid].objgen != holders[place].object.objgen:
                yield f"page {number + 1}: run {mcid} has another parent than it has in the tree"
    yield from (f"the tree holds {place}, which no page has" for place in set(counted) - seen)


def places(tree: Heard) -> Iterator[str]:
    for one in tree.walk():
        above = one.parent.type if one.parent else ""
        if one.type in PARENTS and above not in PARENTS[one.type]:
            yield f"{one.type} in {above}"
        if one.ink and one.type not in HOLDING:
            yield f"ink right in {one.type}"
        if one.parent is not None and one.object.P.objgen != one.parent.object.objgen:
            yield f"{one.type} names another parent than it lies in"
        if not one.ink and not one.children and not one.fields and one.type not in ("TH", "TD"):
            yield f"{one.type} is empty"


def tables(tree: Heard) -> Iterator[str]:
    for table in tree.of("Table"):
        widths = set()
        for row in table.of("TR"):
            cells = row.children
            if not cells or any(cell.type not in ("TH", "TD") for cell in cells):
                yield "a row holds something else than cells"
            spans = [int(cell.object.get("/A", {}).get("/ColSpan", 1)) for cell in cells]
            widths.add(sum(spans))
            for cell in cells:
                if cell.type == "TH" and str(cell.object.A.Scope) != "/Column":
                    yield "a head cell doesn't say what it is the head of"
        if len(widths) != 1:
            yield f"rows of {widths} columns in one table"


def figures(tree: Heard) -> Iterator[str]:
    for one in tree.of("Figure"):
        if not str(one.object.get("/Alt", "")).strip():
            yield "a figure without words in its place"


def headings(tree: Heard) -> Iterator[str]:
    """Each sheet has one title; below it no rank is left out."""
    for sheet in tree.children:
        ranks = [int(one.type[1]) for one in sheet.of("H1", "H2", "H3")]
        if ranks[:1] != [1] or ranks.count(1) != 1:
            yield f"a sheet with headings of ranks {ranks}"
        if any(after > before + 1 for before, after in pairwise(ranks)):
            yield f"a rank is left out in {ranks}"


def lists(tree: Heard) -> Iterator[str]:
    for one in tree.of("LI"):
        if [child.type for child in one.children] not in (["Lbl", "LBody"], ["LBody"]):
            yield f"a list item of {[child.type for child in one.children]}"


def whole(pdf: pikepdf.Pdf) -> Iterator[str]:
    root = pdf.Root
    if not bool(root.MarkInfo.Marked) or "/Suspects" in root.MarkInfo:
        yield "the file doesn't say that it is tagged"
    if not str(root.Lang) or not bool(root.ViewerPreferences.DisplayDocTitle):
        yield "the file lacks its language or doesn't show its title"


def broken(data: bytes) -> list[str]:
    """Every sentence of every rule."""
    with pikepdf.open(io.BytesIO(data)) as pdf:
        tree = tree_of(pdf)
        rules = (places(tree), tables(tree), figures(tree), headings(tree), lists(tree))
        return [*whole(pdf), *ink(pdf, tree), *(words for rule in rules for words in rule)]
