"""Writing the structure of a pack into its PDF: elements, parent tree, fields (ISO 32000-1, 14.7)."""

from __future__ import annotations

from dataclasses import dataclass, field

import pikepdf
from pikepdf import Array, Dictionary, Name, String

from sheets.pages.roles import OWN, Element
from sheets.pages.structure import Held, Node, Structure


@dataclass(kw_only=True)
class Writer:
    """Elements as they are written."""

    pdf: pikepdf.Pdf
    pages: list[pikepdf.Object]
    widgets: list[pikepdf.Object]
    made: dict[int, pikepdf.Object] = field(default_factory=dict)
    """Written elements by the identity of their nodes."""

    def write(self, node: Node, parent: pikepdf.Object) -> pikepdf.Object:
        """An element with all below it."""
        found = self.pdf.make_indirect(
            Dictionary(Type=Name.StructElem, S=Name(f"/{node.element.type}"), P=parent)
        )
        self.made[id(node)] = found
        page = next((child.page for child in node.children if isinstance(child, Held)), None)
        if page is not None:
            found.Pg = self.pages[page]
        kids = [self.kid(child, found, page) for child in node.children]
        if kids:
            found.K = kids[0] if len(kids) == 1 else Array(kids)
        if node.element.alt:
            found.Alt = String(node.element.alt)
        attributes = attributes_of(node.element)
        if attributes is not None:
            found.A = attributes
        return found

    def kid(self, child: Node | Held | int, parent: pikepdf.Object, page: int | None) -> pikepdf.Object | int:
        """An element below, a marked run, or a field."""
        if isinstance(child, Node):
            return self.write(child, parent)
        if isinstance(child, int):
            widget = self.widgets[child]
            return Dictionary(Type=Name.OBJR, Obj=widget, Pg=widget.P)
        if child.page == page:
            return child.run
        return Dictionary(Type=Name.MCR, Pg=self.pages[child.page], MCID=child.run)


def attributes_of(element: Element) -> Dictionary | None:
    """What a head cell is the head of; how many columns a cell takes (ISO 32000-1, table 349)."""
    if element.type == "TH":
        return Dictionary(O=Name.Table, Scope=Name.Column)
    if element.span > 1:
        return Dictionary(O=Name.Table, ColSpan=element.span)
    return None


def write_structure(pdf: pikepdf.Pdf, tree: Structure, widgets: list[pikepdf.Object]) -> None:
    """Adds the tree to a drawn PDF whose pages carry its marked runs.

    The parent tree has an entry for each page with the elements of its runs, then one for each field.
    """
    pages: list[pikepdf.Object] = [page.obj for page in pdf.pages]
    writer = Writer(pdf=pdf, pages=pages, widgets=widgets)
    root = pdf.make_indirect(Dictionary(Type=Name.StructTreeRoot))
    root.K = writer.write(tree.root, root)
    numbers: list[pikepdf.Object | int] = []
    for index, (page, holders) in enumerate(zip(pages, tree.holders, strict=True)):
        page.StructParents = index
        page.Tabs = Name.S
        numbers += [index, Array([writer.made[id(node)] for node in holders])]
    for index, node in enumerate(tree.forms, start=len(pages)):
        widgets[index - len(pages)].StructParent = index
        numbers += [index, writer.made[id(node)]]
    root.ParentTree = pdf.make_indirect(Dictionary(Nums=Array(numbers)))
    root.ParentTreeNextKey = len(pages) + len(tree.forms)
    root.RoleMap = Dictionary({f"/{own}": Name(f"/{standard}") for own, standard in OWN.items()})
    pdf.Root.StructTreeRoot = root
    pdf.Root.MarkInfo = Dictionary(Marked=True)
