"""The same static networks in our solver and in EPANET, by way of wntr: a method and code of others.

EPANET balances flows and heads by the gradient method. Each edge becomes a short, smooth pipe with a minor
loss, whose head is exactly square in the flow, as our edges are. Water heads stand for pressures, 0.1 m a
bar; density cancels. EPANET's own rounded constants (manual of EPANET 2.2, appendix on analysis algorithms,
from memory) are used for its coefficients, so that they don't count as a difference.
"""

from __future__ import annotations

import os
from dataclasses import dataclass
from pathlib import Path

import pytest
import wntr
from outside_bench import circuit_of, fixed_pump, running, solved

METRE_PER_BAR = 0.1
FOOT_M = 0.3048
MINOR_LOSS = 0.02517  # ft and cubic feet a second: 8/(π²·g), as EPANET rounds it
LPM_PER_CFS = 1699.0  # as EPANET rounds it
PUMP_LPM = 60.0
SAME = 1e-4
LEAST_DROP_BAR = 4.0
"""Our edges bend at 0.05 bar: from 4 bar on that moves a drop by less than 1e-4."""
CHECK_BEND_BAR = 0.025
"""A check of ours reads its drop up to this much too high; EPANET's has no bend."""


@dataclass(frozen=True)
class Edge:
    """A flow at a drop between two nodes; checked ones pass from first to second only."""

    id: str
    first: str
    second: str
    flow_lpm: float
    drop_bar: float
    checked: bool = False

    def loss_coefficient(self) -> float:
        """K of a pipe of 1 ft, so that it has this edge's drop at this edge's flow."""
        head_ft = METRE_PER_BAR * self.drop_bar / FOOT_M
        return head_ft / (MINOR_LOSS * (self.flow_lpm / LPM_PER_CFS) ** 2)


LADDER = (
    Edge("OR1", "pump", "a", 40.0, 50.0),
    Edge("OR2", "pump", "b", 18.0, 50.0),
    Edge("OR3", "a", "b", 20.0, 30.0),
    Edge("OR4", "a", "tank", 20.0, 60.0),
    Edge("OR5", "b", "c", 45.0, 40.0),
    Edge("OR6", "c", "tank", 50.0, 70.0),
    Edge("OR7", "a", "c", 15.0, 45.0),
)
OPEN_CHECK = (
    Edge("OR1", "pump", "a", 40.0, 20.0),
    Edge("OR2", "pump", "b", 20.0, 120.0),
    Edge("CV1", "a", "b", 15.0, 40.0, checked=True),
    Edge("OR4", "a", "tank", 25.0, 100.0),
    Edge("OR5", "b", "tank", 40.0, 60.0),
)
SHUT_CHECK = tuple(
    Edge("CV1", "b", "a", 15.0, 40.0, checked=True) if edge.id == "CV1" else edge for edge in OPEN_CHECK
)


def by_ours(edges: tuple[Edge, ...]) -> tuple[dict[str, float], dict[str, float]]:
    """Pressures by node in bar and flows by edge in L/min."""
    parts = fixed_pump("40 cm3/rev")
    ports: dict[str, list[str]] = {"tank": ["TK1.S", "TK1.T", "PU1.S"], "pump": ["PU1.P"]}
    for edge in edges:
        kind = "check valve, opening: 0 bar" if edge.checked else "orifice"
        parts += (
            f"\n{edge.id}: {{kind: {kind}, where: line, rating: 3000 bar,"
            f" rated flow: {edge.flow_lpm} L/min, rated drop: {edge.drop_bar} bar}}"
        )
        ports.setdefault(edge.first, []).append(f"{edge.id}.A")
        ports.setdefault(edge.second, []).append(f"{edge.id}.B")
    nets = "\n".join(f"{node}: [{', '.join(there)}]" for node, there in ports.items())
    circuit = circuit_of(parts, nets, speed="1500 rpm")
    solution = solved(circuit, running(circuit))
    pressures = {node: solution.pressure_at(there[0]) for node, there in ports.items()}
    return pressures, {edge.id: solution.flows_lpm[edge.id] for edge in edges}


def by_epanet(edges: tuple[Edge, ...], folder: Path) -> tuple[dict[str, float], dict[str, float]]:
    network = wntr.network.WaterNetworkModel()
    network.options.hydraulic.inpfile_units = "LPM"
    network.options.hydraulic.accuracy = 1e-5
    network.options.time.duration = 0
    network.add_reservoir("tank", base_head=0.0)
    for node in {end for edge in edges for end in (edge.first, edge.second)} - {"tank"}:
        inflow_lpm = PUMP_LPM if node == "pump" else 0.0
        network.add_junction(node, base_demand=-inflow_lpm / 60_000.0)
    for edge in edges:
        network.add_pipe(
            edge.id,
            edge.first,
            edge.second,
            length=1e-3,
            diameter=FOOT_M,
            roughness=1e4,
            minor_loss=edge.loss_coefficient(),
            check_valve=edge.checked,
        )
    results = wntr.sim.EpanetSimulator(network).run_sim(file_prefix=os.fspath(folder / "network"))
    heads, flows = results.node["head"].iloc[0], results.link["flowrate"].iloc[0]
    return (
        {node: float(head) / METRE_PER_BAR for node, head in heads.items()},
        {id_: float(flow) * 60_000.0 for id_, flow in flows.items()},
    )


def least_drop_bar(edges: tuple[Edge, ...], pressures: dict[str, float]) -> float:
    return min(abs(pressures[edge.first] - pressures[edge.second]) for edge in edges)


def test_a_ladder_of_orifices(tmp_path: Path) -> None:
    pressures, flows = by_ours(LADDER)
    their_pressures, their_flows = by_epanet(LADDER, tmp_path)
    assert least_drop_bar(LADDER, their_pressures) > LEAST_DROP_BAR
    assert pressures == pytest.approx(their_pressures, rel=SAME)
    assert flows == pytest.approx(their_flows, rel=SAME)


def test_an_open_check_valve(tmp_path: Path) -> None:
    pressures, flows = by_ours(OPEN_CHECK)
    their_pressures, their_flows = by_epanet(OPEN_CHECK, tmp_path)
    assert least_drop_bar(OPEN_CHECK, their_pressures) > LEAST_DROP_BAR
    drop_bar = their_pressures["a"] - their_pressures["b"]
    assert pressures == pytest.approx(their_pressures, rel=SAME, abs=CHECK_BEND_BAR)
    bend = CHECK_BEND_BAR / drop_bar  # of the drop, so half of that of the flow; the others give way a little
    assert flows == pytest.approx(their_flows, rel=SAME + bend)


def test_a_shut_check_valve(tmp_path: Path) -> None:
    pressures, flows = by_ours(SHUT_CHECK)
    their_pressures, their_flows = by_epanet(SHUT_CHECK, tmp_path)
    assert least_drop_bar(SHUT_CHECK, their_pressures) > LEAST_DROP_BAR
    assert their_pressures["a"] > their_pressures["b"]
    assert flows["CV1"] == 0.0
    assert their_flows["CV1"] == pytest.approx(0.0, abs=1e-3)
    assert pressures == pytest.approx(their_pressures, rel=SAME)
    del flows["CV1"], their_flows["CV1"]
    assert flows == pytest.approx(their_flows, rel=SAME)
