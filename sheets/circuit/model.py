"""The circuit as arrays: nodes, elements and what may be changed on them.

Node 0 is the tank, at 0 bar. Every other node is a net, or several nets that hoses and pipes join.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from functools import cached_property
from typing import Literal

import numpy as np

from sheets.circuit.laws import Actuators, Checks, Pumps, Reliefs, Ways
from sheets.circuit.plant import PlantState
from sheets.circuit.smooth import Floats, Ints

TANK = 0
CAPACITY_LPM_PER_BAR_L = 1e-6
"""L/min for each bar and each litre of a node."""

SealedEnd = Literal["standby end", "compensator end"]
"""Where leakage leaves an LS port that is sealed or cut off: at case pressure, or at outlet pressure."""


@dataclass(frozen=True, kw_only=True)
class Node:
    """One pressure."""

    name: str
    """Net names as in the file, joined with ' + ' where lines join them."""
    ports: tuple[str, ...]
    rating_bar: float
    """Lowest rating on it; infinite where nothing on it has one."""
    rated_by: str
    """Part that has the lowest rating; empty where none has."""
    volume_l: float = 1.0
    """Policy: 1 L a net. It decides only how a cut-off group shares its oil."""


@dataclass(frozen=True, kw_only=True)
class AdjusterSite:
    """Where an adjuster acts in the circuit."""

    id: str
    """``RV1`` where the part has one adjuster called 'adjuster', else ``PU1.compensator``."""
    part: str
    controlled_node: int
    """Node whose pressure it sets."""
    reference_node: int
    """Node from which that pressure counts: tank or case, or LS for a load-sensing control."""
    lowest_bar: float
    highest_bar: float
    flow_slope: float
    """κ for a relief (reading at flow q is S·(κ + (1 − κ)·q/q_ref)); 1 for the controls of a pump."""
    reference_flow_lpm: float
    """q_ref of a relief, else 0. By default the greatest flow of all pumps, each with its stroke at its stop,
    so that a relief reads its setting when all that can come passes it."""
    width_bar: float
    """From full stroke to none for the controls of a pump; (1 − κ)·highest for a relief."""
    policy: frozenset[str] = frozenset()
    """Figures that no plate gives, so policy does: ``opening ratio``, ``reference flow``, ``width``."""
    signal_node: int | None = None
    """LS node of a load-sensing control whose port X is in a net; None where it isn't, and for all others."""
    width_flow_lpm: float = 0.0
    """Flow over which the width of a load-sensing control acts, else 0: outlet less LS at a flow q is
    S − width·q/width_flow."""


@dataclass(frozen=True, kw_only=True)
class Circuit:
    """All that the solver needs; knows no family of machines by name."""

    nodes: tuple[Node, ...]
    node_of: Mapping[str, int]
    """Port (``PU1.P``) to node; ports that are in no net are missing."""
    adjusters: tuple[AdjusterSite, ...]
    """In the order of the file; the order of settings in batches."""
    positions: Mapping[str, tuple[str, ...]]
    """Valve id to the positions that it has, the rest position first."""
    drives: tuple[str, ...]
    actuators_ids: tuple[str, ...]
    ways: Ways
    checks: Checks
    reliefs: Reliefs
    pumps: Pumps
    actuators: Actuators
    reference_flow_lpm: float
    """Sum of the greatest flows of all pumps, each with its stroke at its stop; the scale of residuals."""
    sealed_end: SealedEnd = "standby end"
    """The end at which LS ports in ``sealed_ports`` are taken when nothing else decides their pressure."""
    sealed_ports: tuple[str, ...] = ()
    """LS ports whose pressure leakage decides once they are cut off: solve both ends, carry the worse."""

    @cached_property
    def capacities(self) -> Floats:
        """[N] L/min/bar that each node takes up."""
        volumes_l = np.array([node.volume_l for node in self.nodes], dtype=np.float64)
        return CAPACITY_LPM_PER_BAR_L * volumes_l

    @cached_property
    def terminals(self) -> tuple[Ints, ...]:
        """Nodes at the terminals of ways, checks, reliefs, pumps and actuators: [E, T] each."""
        families = (self.ways, self.checks, self.reliefs, self.pumps, self.actuators)
        return tuple(family.terminals for family in families)

    @cached_property
    def places(self) -> Ints:
        """Node of every terminal, all families in a row."""
        return np.concatenate([terminals.ravel() for terminals in self.terminals])

    @cached_property
    def pairs(self) -> Ints:
        """Place in a matrix of nodes by nodes of every pair of terminals of an element, in the same order."""
        count = len(self.nodes)
        return np.concatenate([(t[:, :, None] * count + t[:, None, :]).ravel() for t in self.terminals])

    @cached_property
    def oil_paths(self) -> tuple[Ints, Ints]:
        """Both ends of every path along which oil can pass: ways, checks, reliefs, what leaks in motors from
        A to B, A to case and B to case; last, of the pumps, outlet to suction, outlet to case, and what
        seeps into the LS node."""
        motors, pumps = self.actuators, self.pumps
        two_ended = (self.ways, self.checks, self.reliefs)
        bled_from = np.where(pumps.bled_from_outlet, pumps.outlet, pumps.case)
        first = (motors.node_a, motors.node_a, motors.node_b, pumps.outlet, pumps.outlet, bled_from)
        second = (motors.node_b, motors.case, motors.case, pumps.suction, pumps.case, pumps.signal)
        return (
            np.concatenate([*(family.first for family in two_ended), *first]),
            np.concatenate([*(family.second for family in two_ended), *second]),
        )

    def rest_state(self, settings_bar: Mapping[str, float]) -> PlantState:
        """Valves at rest, drives off, no pressure anywhere."""
        return PlantState(
            positions={valve: positions[0] for valve, positions in self.positions.items()},
            running=frozenset(),
            settings_bar=dict(settings_bar),
            pressures_bar=(0.0,) * len(self.nodes),
            travel=dict.fromkeys(self.actuators_ids, "between"),
        )
