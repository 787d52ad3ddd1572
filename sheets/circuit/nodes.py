"""Nodes from nets: lines join them, reservoirs make them tank, parts rate them."""

from __future__ import annotations

import math
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field

from sheets.circuit.model import Node
from sheets.circuit.ratings import port_rating_bar
from sheets.errors import InputError, Problem
from sheets.machine.model import Machine
from sheets.machine.parts import Line, RatedPart, Reservoir

VOLUME_OF_A_NET_L = 1.0
VOLUME_OF_A_CLOSED_PORT_L = 0.001
"""A port that is in no net holds next to nothing, so that it follows what little seeps into it."""


class _Groups:
    """Union-find over names; the representative is the first name in the alphabet."""

    def __init__(self) -> None:
        self._parent: dict[str, str] = {}

    def find(self, name: str) -> str:
        parent = self._parent.setdefault(name, name)
        while parent != self._parent[parent]:
            parent = self._parent[parent]
        self._parent[name] = parent
        return parent

    def join(self, one: str, other: str) -> None:
        first, second = sorted((self.find(one), self.find(other)))
        self._parent[second] = first


@dataclass
class NodeBook:
    """Nodes while a circuit is built; closed ports are added as they are met."""

    nodes: list[Node]
    node_of: Mapping[str, int]
    closed: dict[str, int] = field(default_factory=dict)

    def at(self, port: str) -> int | None:
        """Node of a port; None for one that is in no net."""
        return self.node_of.get(port)

    def needed(self, port: str) -> int:
        """Node of a port without which a part can't be computed."""
        node = self.node_of.get(port)
        if node is None:
            part, name = port.split(".", 1)
            raise InputError(
                Problem(
                    where=f"parts, {part}",
                    what=f"Port {name} is in no net, and its pressure is needed.",
                    fix=f"Add {port} to the net that it is joined to.",
                )
            )
        return node

    def closed_port(self, part_id: str, part: RatedPart, name: str) -> int:
        """Node of a port, one of its own if it is in no net: a dead end that keeps its oil."""
        port = f"{part_id}.{name}"
        node = self.node_of.get(port, self.closed.get(port))
        if node is None:
            node = self.closed[port] = len(self.nodes)
            rating_bar = port_rating_bar(part, name)
            self.nodes.append(
                Node(
                    name=port,
                    ports=(port,),
                    rating_bar=math.inf if rating_bar is None else rating_bar,
                    rated_by="" if rating_bar is None else part_id,
                    volume_l=VOLUME_OF_A_CLOSED_PORT_L,
                )
            )
        return node


def read_nodes(machine: Machine) -> NodeBook:
    """Give the nodes of a machine, in an order that doesn't hang on the order in its file.

    Raises InputError for a port that stands in two nets.
    """
    groups = _Groups()
    net_of: dict[str, str] = {}
    for net, ports in machine.nets.items():
        groups.find(net)
        for port in ports:
            if net_of.setdefault(port, net) != net:
                raise InputError(
                    Problem(
                        where=f"nets, {net}",
                        what=f"Port {port} is already in the net {net_of[port]}.",
                        fix="Name each port in one net only; join the two nets if they are one.",
                    )
                )
    tank_nets: set[str] = set()
    for part_id, part in machine.parts.items():
        joined = [net_of[f"{part_id}.{port}"] for port in part.ports if f"{part_id}.{port}" in net_of]
        if isinstance(part, Reservoir):
            tank_nets.update(joined)
        elif isinstance(part, Line) and len(joined) == len(part.ports):
            groups.join(joined[0], joined[1])

    tank_groups = {groups.find(net) for net in tank_nets}
    members: dict[str, list[str]] = {}
    for net in sorted(machine.nets):
        group = groups.find(net)
        members.setdefault("" if group in tank_groups else group, []).append(net)
    members.setdefault("", [])

    ratings = dict(_ratings(machine))
    nodes: list[Node] = []
    node_of: dict[str, int] = {}
    for group in sorted(members):  # the tank has the empty name, so it comes first
        ports = tuple(sorted(port for net in members[group] for port in machine.nets[net]))
        rating_bar, rated_by = min(
            ((ratings[port], port.split(".", 1)[0]) for port in ports if port in ratings),
            default=(math.inf, ""),
        )
        node_of.update(dict.fromkeys(ports, len(nodes)))
        nodes.append(
            Node(
                name=" + ".join(members[group]) or "tank",
                ports=ports,
                rating_bar=rating_bar,
                rated_by=rated_by,
                volume_l=VOLUME_OF_A_NET_L * max(len(members[group]), 1),
            )
        )
    return NodeBook(nodes=nodes, node_of=node_of)


def _ratings(machine: Machine) -> Iterable[tuple[str, float]]:
    """Each rated port with its rating."""
    for part_id, part in machine.parts.items():
        if not isinstance(part, RatedPart):
            continue
        for port in part.ports:
            rating_bar = port_rating_bar(part, port)
            if rating_bar is not None:
                yield f"{part_id}.{port}", rating_bar
    for gauge_id, gauge in machine.gauges.items():
        yield f"{gauge_id}.P", gauge.rating_bar
