"""Ways and checks of a machine."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from sheets.circuit.nodes import NodeBook
from sheets.circuit.rows import Rows
from sheets.circuit.smooth import conductance
from sheets.circuit.stamp import NONE
from sheets.circuit.ways import Checks, Ways
from sheets.errors import InputError, Problem
from sheets.machine.model import Machine
from sheets.machine.parts import CheckValve, DirectionalValve, Filter, FlowControl, HandValve, Orifice

PATH_ORDER = ("P", "A", "B", "LS", "T")
"""Paths are named from the earlier of these to the later."""


def build_ways(machine: Machine, book: NodeBook, *, positions: Mapping[str, tuple[str, ...]]) -> Ways:
    """All edges. One that ends at a plugged port leads nowhere and is left out."""
    rows = Rows()
    opens: list[list[bool]] = []
    valves = list(positions)
    most = max((len(names) for names in positions.values()), default=1)

    def add(
        part_id: str, name: str, ends: tuple[str, str], edge: float, open_in: tuple[str, ...] | None
    ) -> None:
        first, second = (book.at(f"{part_id}.{end}") for end in ends)
        if first is None or second is None or first == second:
            return
        rows.add(
            id=name,
            part=part_id,
            first=first,
            second=second,
            conductance=edge,
            valve=NONE if open_in is None else valves.index(part_id),
        )
        names = () if open_in is None else positions[part_id]
        opens.append([i < len(names) and names[i] in (open_in or ()) for i in range(most)])

    for part_id, part in sorted(machine.parts.items()):
        if isinstance(part, HandValve | FlowControl | Orifice | Filter):
            edge = conductance(rated_flow_lpm=part.rated_flow_lpm, rated_drop_bar=part.rated_drop_bar)
            add(part_id, part_id, ("A", "B"), edge, ("open",) if isinstance(part, HandValve) else None)
        elif isinstance(part, DirectionalValve):
            paths: dict[tuple[str, str], set[str]] = {}
            for position in part.positions:
                for ends in part.paths(position):
                    first, second = sorted(ends, key=PATH_ORDER.index)  # A to P is the edge that P to A is
                    paths.setdefault((first, second), set()).add(position)
            for ends, open_in in sorted(paths.items()):
                add(part_id, f"{part_id} {ends[0]} to {ends[1]}", ends, _edge(part, ends), tuple(open_in))
    return Ways(
        ids=rows.ids("id"),
        parts=rows.ids("part"),
        first=rows.index("first"),
        second=rows.index("second"),
        conductance=rows.floats("conductance"),
        valve=rows.index("valve"),
        opens=np.array(opens, dtype=np.bool_).reshape(len(opens), most),
    )


def _edge(part: DirectionalValve, ends: tuple[str, str]) -> float:
    """Conductance of a path, by the plate's edge, or by its signal ways where it ends at LS."""
    rated = part.signal if part.signal is not None and "LS" in ends else part
    return conductance(rated_flow_lpm=rated.rated_flow_lpm, rated_drop_bar=rated.rated_drop_bar)


def build_checks(machine: Machine, book: NodeBook) -> Checks:
    """All check valves that lead somewhere."""
    rows = Rows()
    for part_id, part in sorted(machine.parts.items()):
        if not isinstance(part, CheckValve):
            continue
        first, second = book.at(f"{part_id}.A"), book.at(f"{part_id}.B")
        if first is None or second is None or first == second:
            continue
        if part.rated_drop_bar <= part.opening_bar:
            raise InputError(
                Problem(
                    where=f"parts, {part_id}, rated drop",
                    what="The drop at rated flow is not above the opening pressure.",
                    fix="Take both from the maker's curve: the drop at rated flow includes the spring.",
                )
            )
        edge = conductance(
            rated_flow_lpm=part.rated_flow_lpm, rated_drop_bar=part.rated_drop_bar - part.opening_bar
        )
        rows.add(id=part_id, first=first, second=second, conductance=edge, opening=part.opening_bar)
    return Checks(
        ids=rows.ids("id"),
        first=rows.index("first"),
        second=rows.index("second"),
        conductance=rows.floats("conductance"),
        opening_bar=rows.floats("opening"),
    )
