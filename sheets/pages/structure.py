"""From placed pages to what they are to a reader who hears them: marked runs of items, and one tree.

The tree is in reading order: that in which its elements are first inked, an item's label before its body.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass, field
from itertools import groupby

from sheets.pages.placed import Item, PlacedPage, TextRun
from sheets.pages.roles import ARTIFACT, GROUP, Element, Path, element, home


@dataclass(frozen=True, kw_only=True)
class Run:
    """Items in a row on a page that belong to one element, or are one kind of artifact."""

    path: Path
    number: int | None
    """Among the marked runs of its page; None for an artifact."""
    items: tuple[Item, ...]


def runs(items: Iterable[Item]) -> Iterator[Run]:
    """The items of a page in their order, run by run."""
    number = 0
    for path, grouped in groupby(items, key=lambda item: home(item.path, text=isinstance(item, TextRun))):
        if path[-1].type == ARTIFACT:
            yield Run(path=path, number=None, items=tuple(grouped))
            continue
        yield Run(path=path, number=number, items=tuple(grouped))
        number += 1


@dataclass(frozen=True, kw_only=True)
class Held:
    """Ink of an element: a marked run of a page, by their numbers from 0."""

    page: int
    run: int


@dataclass(kw_only=True)
class Node:
    """An element with what it holds, in reading order."""

    element: Element
    parent: Node | None = None
    children: list[Node | Held | int] = field(default_factory=list)
    """Elements, ink, and fields by their number."""

    def walk(self) -> Iterator[Node]:
        """This one, then all below it."""
        yield self
        for child in self.children:
            if isinstance(child, Node):
                yield from child.walk()

    @property
    def nodes(self) -> list[Node]:
        """Elements right below it."""
        return [child for child in self.children if isinstance(child, Node)]


@dataclass(frozen=True, kw_only=True)
class Structure:
    """The tree of a pack, and the element of each marked run of each page."""

    root: Node
    holders: tuple[tuple[Node, ...], ...]
    forms: tuple[Node, ...]
    """The element of each field."""


def structure(pages: Sequence[PlacedPage], fields: Sequence[Path] = ()) -> Structure:
    """The tree over all pages. An element that goes on over a page stays one element.

    `fields` are the paths of what the fields to sign are part of.
    """
    root = Node(element=element("Document"))
    places: dict[Path, Node] = {(): root}
    holders: list[tuple[Node, ...]] = []
    for index, page in enumerate(pages):
        held: list[Node] = []
        for run in runs(page.items):
            if run.number is not None:
                node = placed_at(places, run.path)
                node.children.append(Held(page=index, run=run.number))
                held.append(node)
        holders.append(tuple(held))
    forms = [placed_at(places, (*path, element("Form", index))) for index, path in enumerate(fields)]
    for index, node in enumerate(forms):
        node.children.append(index)
    for node in list(root.walk()):
        put_right(node)
    return Structure(root=root, holders=tuple(holders), forms=tuple(forms))


def placed_at(places: dict[Path, Node], path: Path) -> Node:
    """The element at a path, made with all above it where it isn't there yet."""
    found = places.get(path)
    if found is not None:
        return found
    parent = placed_at(places, path[:-1])
    step = path[-1]
    if step.type == GROUP:
        places[path] = parent
        return parent
    node = Node(element=step, parent=parent)
    parent.children.append(node)
    places[path] = node
    return node


def put_right(node: Node) -> None:
    """A label before its body; every cell of a row, in the order of its columns."""
    if node.element.type == "LI":
        node.children.sort(key=lambda child: not (isinstance(child, Node) and child.element.type == "Lbl"))
    if node.element.type == "TR":
        there = {child.element.key: child for child in node.nodes}
        type_ = "TH" if node.element.head else "TD"
        spanned = sum(child.element.span - 1 for child in node.nodes)
        node.children = [
            there.get(column) or Node(element=element(type_, column), parent=node)
            for column in range(node.element.columns - spanned)
        ]
