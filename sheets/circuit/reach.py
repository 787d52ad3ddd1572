"""Which nodes an open way joins, read from the graph alone: no pressure is computed here."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass

from sheets.circuit.model import TANK, Circuit, Node
from sheets.machine.model import Machine
from sheets.machine.parts import (
    CheckValve,
    DirectionalValve,
    FlowControl,
    FlowPath,
    HandValve,
    Orifice,
)


@dataclass(frozen=True, kw_only=True)
class OpenWay:
    """A way that passes oil at no pressure difference, save a check's opening pressure."""

    part: str
    start: int
    end: int
    one_way: bool
    """Passes from start to end only."""


def open_ways(machine: Machine, circuit: Circuit, positions: Mapping[str, str]) -> Iterator[OpenWay]:
    """Every open way with the valves at those positions.

    Reliefs, pumps, spool clearances and motor leakage are no ways: they hold some pressure, or nobody knows
    how long they take. A check valve passes in its own direction.
    """
    for id_, part in machine.parts.items():
        if isinstance(part, DirectionalValve):
            for first, second in part.paths(positions[id_]):
                start, end = circuit.node_of.get(f"{id_}.{first}"), circuit.node_of.get(f"{id_}.{second}")
                if start is not None and end is not None:
                    yield OpenWay(part=id_, start=start, end=end, one_way=False)
        elif isinstance(part, FlowPath):
            if isinstance(part, HandValve) and positions[id_] == "closed":
                continue
            start, end = circuit.node_of.get(f"{id_}.A"), circuit.node_of.get(f"{id_}.B")
            if start is not None and end is not None:
                yield OpenWay(part=id_, start=start, end=end, one_way=isinstance(part, CheckValve))


def joined_at_rest(machine: Machine, circuit: Circuit, node: int, *, shut: str = "") -> frozenset[int]:
    """Nodes that a line valve at rest, a check valve or a filter joins with a node.

    Spools don't count, and neither do throttles: what stands behind one may limit its own line, never the
    node before it. ``shut``: a hand valve that is closed, whatever its rest.
    """
    rest = {valve: positions[0] for valve, positions in circuit.positions.items()}
    if shut:
        rest[shut] = "closed"
    reached, front = {node}, [node]
    ways = [
        way
        for way in open_ways(machine, circuit, rest)
        if not isinstance(machine.parts[way.part], DirectionalValve | Orifice | FlowControl)
    ]
    while front:
        here = front.pop()
        for way in ways:
            for start, end in ((way.start, way.end), (way.end, way.start)):
                if start == here and end not in reached and end != TANK:
                    reached.add(end)
                    front.append(end)
    return frozenset(reached)


def weakest_loaded(
    machine: Machine, circuit: Circuit, node: int, *, set_bar: float, reliefs_bar: Mapping[str, float]
) -> Node:
    """The node of the lowest rating among those that come to the pressure of a node in service.

    ``set_bar``: what that node is set to, in bar; ``reliefs_bar``: setting of each relief that has one, in
    bar. A relief that is set lower guards what lies behind it: from there on its own setting is what must
    suit the ratings. One that is set higher, or to nobody knows what, guards nothing.
    """
    guarded = frozenset(
        circuit.node_of[f"{id_}.P"]
        for id_ in circuit.reliefs.ids
        if id_ in reliefs_bar and reliefs_bar[id_] < set_bar
    )
    loaded = sorted(_loaded_with(machine, circuit, node, guarded=guarded))
    return min((circuit.nodes[index] for index in loaded), key=lambda each: each.rating_bar)


def _loaded_with(
    machine: Machine, circuit: Circuit, node: int, *, guarded: frozenset[int] = frozenset()
) -> frozenset[int]:
    """Nodes that can come to stand at the pressure of a node, itself included, while the machine works.

    Line valves at rest, filters, orifices and checks in their own direction lead on, and so does a spool in
    each of its positions, between any two ports but T. A node in ``guarded`` ends the way.
    """
    rest = {valve: positions[0] for valve, positions in circuit.positions.items()}
    ways = [
        way
        for way in open_ways(machine, circuit, rest)
        if not isinstance(machine.parts[way.part], DirectionalValve)
    ]
    for id_, part in machine.parts.items():
        if isinstance(part, DirectionalValve):
            ways += [
                OpenWay(
                    part=id_,
                    start=circuit.node_of[f"{id_}.{one}"],
                    end=circuit.node_of[f"{id_}.{other}"],
                    one_way=False,
                )
                for position in part.positions
                for one, other in part.paths(position)
                if "T" not in (one, other) and {f"{id_}.{one}", f"{id_}.{other}"} <= circuit.node_of.keys()
            ]
    reached, front = {node}, [node]
    while front:
        here = front.pop()
        for way in ways:
            ends = [way.end] if way.start == here else []
            if way.end == here and not way.one_way:
                ends.append(way.start)
            for end in ends:
                if end not in reached | guarded | {TANK}:
                    reached.add(end)
                    front.append(end)
    return frozenset(reached)


def drained_nodes(machine: Machine, circuit: Circuit, positions: Mapping[str, str]) -> frozenset[int]:
    """Nodes from which an open way leads to tank, the tank itself included.

    Flooded from the tank backwards. What isn't reached keeps its pressure after shutdown. A check valve in
    the draining direction counts, and leaves its opening pressure.
    """
    ways = tuple(open_ways(machine, circuit, positions))
    drained, front = {TANK}, [TANK]
    while front:
        here = front.pop()
        for way in ways:
            sources = [way.start] if way.end == here else []
            if way.start == here and not way.one_way:
                sources.append(way.end)
            for source in sources:
                if source not in drained:
                    drained.add(source)
                    front.append(source)
    return frozenset(drained)
