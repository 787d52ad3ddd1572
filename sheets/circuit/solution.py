"""What the solver gives: many states as arrays, or one as plain figures by name."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from sheets.circuit.model import Circuit
from sheets.circuit.smooth import Bools, Floats
from sheets.errors import NotEstablishedError, Problem

MOVING_LPM = 0.01
"""An actuator moves when it takes more than this; what a cut-off group stores is a hundred times less."""
VOID_LPM = 0.01


@dataclass(frozen=True, kw_only=True)
class Solution:
    """One solved state. Figures of a state that isn't established are not numbers."""

    circuit: Circuit
    established: bool
    pressures_bar: tuple[float, ...]
    """By node, the tank first."""
    flows_lpm: Mapping[str, float]
    """By part, positive into its first port; paths of a directional valve as ``DV1 P to A``; a pump's net."""
    speeds: Mapping[str, float]
    """m/s of a cylinder (extending), rev/min of a motor (forward)."""
    strokes: Mapping[str, float]
    """Share of full stroke that the controls of each running pump ask for; 0 where the drive stands."""
    moving: frozenset[str]
    """Actuators that move."""
    voids: frozenset[int]
    """Nodes at which a void forms."""
    loose_ports: frozenset[str]
    """LS ports that leakage alone decides in this state: solve the other end too."""
    effects: Mapping[str, tuple[float, ...]]
    """Adjuster to the change of every node's pressure for 1 bar of its setting; empty unless asked for."""
    residual_lpm: float
    """Largest left over at a node."""

    def pressure_at(self, port: str) -> float:
        """Gauge pressure at a port, in bar.

        Raises NotEstablishedError if the state has no established pressures, KeyError for a port in no net.
        """
        if not self.established:
            raise NotEstablishedError(
                Problem(
                    where=port,
                    what="The pressure in this state could not be established.",
                    fix="Check the plate values of the parts that this port is joined to.",
                )
            )
        return self.pressures_bar[self.circuit.node_of[port]]


@dataclass(frozen=True, kw_only=True)
class BatchSolution:
    """Many solved states; the first axis of every array is the state.

    Where a state isn't established its figures are not numbers, so that no comparison holds.
    """

    circuit: Circuit
    established: Bools
    """[B]"""
    pressures_bar: Floats
    """[B, nodes] the tank first."""
    way_flows_lpm: Floats
    check_flows_lpm: Floats
    relief_flows_lpm: Floats
    pump_flows_lpm: Floats
    """[B, pumps] net at the outlet."""
    strokes: Floats
    """[B, pumps]"""
    speeds: Floats
    """[B, actuators] m/s for cylinders, rev/min for motors."""
    moving: Bools
    """[B, actuators]"""
    void_flows_lpm: Floats
    """[B, nodes] more than zero: a void forms."""
    loose_signals: Bools
    """[B, pumps] leakage alone decides the LS port."""
    effects: Floats | None
    """[B, adjusters, nodes] change of pressure by setting."""
    max_residual_lpm: Floats
    """[B]"""

    def __len__(self) -> int:
        return len(self.established)

    def one(self, index: int) -> Solution:
        """One state as plain figures by name."""
        circuit = self.circuit
        flows: dict[str, float] = {}
        for ids, values in (
            (circuit.ways.ids, self.way_flows_lpm),
            (circuit.checks.ids, self.check_flows_lpm),
            (circuit.reliefs.ids, self.relief_flows_lpm),
            (circuit.pumps.ids, self.pump_flows_lpm),
        ):
            flows.update(zip(ids, values[index].tolist(), strict=True))
        effects: dict[str, tuple[float, ...]] = {}
        if self.effects is not None:
            for site, row in zip(circuit.adjusters, self.effects[index].tolist(), strict=True):
                effects[site.id] = tuple(row)
        actuators, pumps = circuit.actuators.ids, circuit.pumps.ids
        return Solution(
            circuit=circuit,
            established=bool(self.established[index]),
            pressures_bar=tuple(self.pressures_bar[index].tolist()),
            flows_lpm=flows,
            speeds=dict(zip(actuators, self.speeds[index].tolist(), strict=True)),
            strokes=dict(zip(pumps, self.strokes[index].tolist(), strict=True)),
            moving=frozenset(id_ for id_, on in zip(actuators, self.moving[index], strict=True) if on),
            voids=frozenset(n for n, flow in enumerate(self.void_flows_lpm[index]) if flow > VOID_LPM),
            loose_ports=frozenset(
                f"{id_}.X" for id_, on in zip(pumps, self.loose_signals[index], strict=True) if on
            ),
            effects=effects,
            residual_lpm=float(self.max_residual_lpm[index]),
        )
