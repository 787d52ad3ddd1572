"""Trapped volumes: what keeps its pressure after shutdown, and what relieves it."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from sheets.circuit.model import TANK, Circuit
from sheets.circuit.reach import drained_nodes
from sheets.machine.model import Machine
from sheets.machine.parts import DirectionalValve, HandValve, TestPoint


@dataclass(frozen=True, kw_only=True)
class Relief:
    """One act that gives trapped volumes a way to tank."""

    valve: str
    position: str
    """Position that opens the way; a lever is moved there and back."""
    stays: bool
    """The way stays open (a hand valve), so a lock can hold it. A lever springs back."""
    nodes: tuple[int, ...]
    """Volumes that this act relieves, the earlier acts given."""


@dataclass(frozen=True, kw_only=True)
class Volume:
    """A node after all acts of relieving."""

    node: int
    trapped_at_rest: bool
    relieved_by: str
    """Valve; empty where nothing on the machine relieves it."""
    test_points: tuple[str, ...]
    """Where its pressure can be verified; none: it can't be."""


@dataclass(frozen=True, kw_only=True)
class Trapped:
    """Result of flooding the graph from tank."""

    reliefs: tuple[Relief, ...]
    volumes: tuple[Volume, ...]
    """Every node that can hold pressure, in circuit order."""

    @property
    def without_relief(self) -> tuple[Volume, ...]:
        return tuple(v for v in self.volumes if v.trapped_at_rest and not v.relieved_by)


def find_trapped(machine: Machine, circuit: Circuit, positions: Mapping[str, str] | None = None) -> Trapped:
    """Volumes that don't drain with the drives off, and the cheapest acts that relieve them.

    ``positions`` are where the valves stand when the drives stop; at rest, if left out. Solenoid valves can't
    be shifted with their control supply isolated, so only hand valves and levers count. Only volumes beyond
    a pump's suction are listed.
    """
    standing = dict(positions or {v: p[0] for v, p in circuit.positions.items()})
    at_rest = drained_nodes(machine, circuit, standing)
    drained = set(at_rest)
    relieved_by: dict[int, str] = {}
    reliefs: list[Relief] = []
    for stays in (True, False):
        again = True
        while again:  # a way may only open once another valve gives it somewhere to go
            again = False
            for valve in sorted(circuit.positions):
                for position in _other_positions(machine, circuit, valve, standing, stays=stays):
                    gained = drained_nodes(machine, circuit, {**standing, valve: position}) - drained
                    if not gained:
                        continue
                    again = stays
                    drained |= gained
                    relieved_by.update(dict.fromkeys(gained, valve))
                    reliefs.append(
                        Relief(valve=valve, position=position, stays=stays, nodes=tuple(sorted(gained)))
                    )
                    if stays:
                        standing[valve] = position
    volumes = tuple(
        Volume(
            node=index,
            trapped_at_rest=index not in at_rest,
            relieved_by=relieved_by.get(index, ""),
            test_points=_test_points(machine, circuit, index),
        )
        for index in range(len(circuit.nodes))
        if index != TANK and not _suction(circuit, index)
    )
    return Trapped(reliefs=tuple(reliefs), volumes=volumes)


def _other_positions(
    machine: Machine, circuit: Circuit, valve: str, standing: Mapping[str, str], *, stays: bool
) -> tuple[str, ...]:
    part = machine.parts[valve]
    if isinstance(part, HandValve):
        return ("open",) if stays and standing[valve] == "closed" else ()
    if isinstance(part, DirectionalValve) and not stays and part.operated_by == "lever":
        return tuple(position for position in circuit.positions[valve] if position != standing[valve])
    return ()


def _test_points(machine: Machine, circuit: Circuit, node: int) -> tuple[str, ...]:
    return tuple(
        id_
        for id_, part in machine.parts.items()
        if isinstance(part, TestPoint) and circuit.node_of.get(f"{id_}.P") == node
    )


def _suction(circuit: Circuit, node: int) -> bool:
    return any(port.endswith(".S") for port in circuit.nodes[node].ports)
