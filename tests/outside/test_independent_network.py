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
from outside_bench import circuit_of, fixed_pump, running, screw, solved

METRE_PER_BAR = 0.1
FOOT_M = 0.3048
MINOR_LOSS = 0.02517  # ft and cubic feet a second: 8/(π²·g), as EPANET rounds it
LPM_PER_CFS = 1699.0  # as EPANET rounds it
PUMP_LPM = 60.0
SAME = 1e-4
LEAST_DROP_BAR = 4.0
"""Our edges bend at 0.05 bar, by ¼·(0.05/Δp)² of the flow, twice that of the drop: at 2.5 bar a drop moves by
2e-4, from 4 bar on by less than 1e-4."""
CHECK_BEND_BAR = 0.025
"""A check of ours reads its drop up to this much too high; EPANET's has no bend."""


@dataclass(frozen=True)
class Edge:
    """A flow at a drop between two nodes, over an orifice unless it is called otherwise.

    A check valve passes from first to second only. A hand valve that is shut stands on our side alone: a way
    that is closed is left out on theirs.
    """

    id: str
    first: str
    second: str
    flow_lpm: float
    drop_bar: float
    kind: str = "orifice"
    shut: bool = False

    @property
    def checked(self) -> bool:
        return self.kind == "check valve"

    def keys(self) -> str:
        """More keys of its part."""
        if self.checked:
            return ", opening: 0 bar"
        return (
            f", rest: {'closed' if self.shut else 'open'}, lockable: yes" if self.kind == "hand valve" else ""
        )

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
    Edge("CV1", "a", "b", 15.0, 40.0, "check valve"),
    Edge("OR4", "a", "tank", 25.0, 100.0),
    Edge("OR5", "b", "tank", 40.0, 60.0),
)
SHUT_CHECK = tuple(
    Edge("CV1", "b", "a", 15.0, 40.0, "check valve") if edge.id == "CV1" else edge for edge in OPEN_CHECK
)
PARALLEL = (
    Edge("OR1", "pump", "a", 10.0, 40.0),
    Edge("OR2", "pump", "a", 20.0, 30.0),
    Edge("OR3", "pump", "a", 25.0, 70.0),
    Edge("OR4", "a", "tank", 30.0, 50.0),
    Edge("OR5", "a", "b", 22.0, 20.0),
    Edge("OR6", "b", "tank", 15.0, 25.0),
    Edge("OR7", "b", "tank", 18.0, 80.0),
)
NARROWING = (
    Edge("FP1", "pump", "a", 60.0, 6.0, "filter"),
    Edge("HV1", "a", "b", 55.0, 8.0, "hand valve"),
    Edge("HV2", "a", "c", 50.0, 5.0, "hand valve", shut=True),
    Edge("OR1", "b", "c", 45.0, 30.0),
    Edge("OR2", "b", "tank", 12.0, 60.0),
    Edge("OR3", "c", "d", 35.0, 60.0),
    Edge("OR4", "d", "e", 25.0, 40.0),
    Edge("OR5", "c", "e", 15.0, 90.0),
    Edge("FR1", "e", "tank", 60.0, 9.0, "filter"),
)
BESIDE_A_RELIEF = (
    Edge("OR1", "pump", "a", 12.0, 40.0),
    Edge("OR2", "a", "tank", 14.0, 50.0),
    Edge("HV1", "pump", "b", 14.0, 30.0, "hand valve"),
    Edge("OR3", "b", "tank", 9.0, 90.0),
    Edge("OR4", "a", "b", 10.0, 30.0),
)
RELIEF_BAR, OPENING_RATIO = 120.0, 0.9


def by_ours(edges: tuple[Edge, ...], *, relief_bar: float = 0.0) -> tuple[dict[str, float], dict[str, float]]:
    """Pressures by node in bar and flows by edge in L/min; ``relief_bar`` puts RV1 at the pump."""
    parts = fixed_pump("40 cm3/rev")
    ports: dict[str, list[str]] = {"tank": ["TK1.S", "TK1.T", "PU1.S"], "pump": ["PU1.P"]}
    for edge in edges:
        parts += (
            f"\n{edge.id}: {{kind: {edge.kind}, where: line, rating: 3000 bar{edge.keys()},"
            f" rated flow: {edge.flow_lpm} L/min, rated drop: {edge.drop_bar} bar}}"
        )
        ports.setdefault(edge.first, []).append(f"{edge.id}.A")
        ports.setdefault(edge.second, []).append(f"{edge.id}.B")
    settings: dict[str, float] = {}
    if relief_bar:
        settings = {"RV1": relief_bar}
        parts += (
            "\nRV1: {kind: relief valve, where: pump, rating: 3000 bar, acting: direct,"
            f" rated flow: 100 L/min, opening ratio: {OPENING_RATIO}, reference flow: {PUMP_LPM} L/min,"
            f" adjuster: {screw()}}}"
        )
        ports["pump"].append("RV1.P")
        ports["tank"].append("RV1.T")
    nets = "\n".join(f"{node}: [{', '.join(there)}]" for node, there in ports.items())
    circuit = circuit_of(parts, nets, speed="1500 rpm")
    solution = solved(circuit, running(circuit, **settings))
    pressures = {node: solution.pressure_at(there[0]) for node, there in ports.items()}
    return pressures, {id_: solution.flows_lpm[id_] for id_ in (*settings, *(edge.id for edge in edges))}


def by_epanet(
    edges: tuple[Edge, ...], folder: Path, *, relief_reading_bar: float = 0.0
) -> tuple[dict[str, float], dict[str, float]]:
    """The same; ``relief_reading_bar`` puts a pressure-sustaining valve at the pump that holds it there."""
    edges = tuple(edge for edge in edges if not edge.shut)
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
    if relief_reading_bar:
        # EPANET joins no such valve to a reservoir: a wide, smooth pipe stands between.
        network.add_junction("relief_outlet", base_demand=0.0)
        head_m = METRE_PER_BAR * relief_reading_bar
        network.add_valve(
            "RV1", "pump", "relief_outlet", diameter=FOOT_M, valve_type="PSV", initial_setting=head_m
        )
        network.add_pipe("RV1_outlet", "relief_outlet", "tank", length=1e-3, diameter=FOOT_M, roughness=1e4)
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


def test_parallel_paths(tmp_path: Path) -> None:
    pressures, flows = by_ours(PARALLEL)
    their_pressures, their_flows = by_epanet(PARALLEL, tmp_path)
    assert least_drop_bar(PARALLEL, their_pressures) > LEAST_DROP_BAR
    assert pressures == pytest.approx(their_pressures, rel=SAME)
    assert flows == pytest.approx(their_flows, rel=SAME)
    # Same drop over all three: they share as their conductances, 1.58, 3.65 and 2.99.
    assert flows["OR1"] / flows["OR2"] == pytest.approx((10 / 40**0.5) / (20 / 30**0.5), rel=SAME)


def test_a_narrowing_line_with_filters_and_hand_valves(tmp_path: Path) -> None:
    pressures, flows = by_ours(NARROWING)
    their_pressures, their_flows = by_epanet(NARROWING, tmp_path)
    joined = tuple(edge for edge in NARROWING if not edge.shut)
    assert least_drop_bar(joined, their_pressures) > LEAST_DROP_BAR
    assert pressures == pytest.approx(their_pressures, rel=SAME)
    assert flows.pop("HV2") == 0.0
    assert flows == pytest.approx(their_flows, rel=SAME)


def test_a_relief_beside_other_ways(tmp_path: Path) -> None:
    """A valve that sustains our reading passes what our relief passes, and that flow gives the reading."""
    pressures, flows = by_ours(BESIDE_A_RELIEF, relief_bar=RELIEF_BAR)
    their_pressures, their_flows = by_epanet(BESIDE_A_RELIEF, tmp_path, relief_reading_bar=pressures["pump"])
    del their_pressures["relief_outlet"], their_flows["RV1_outlet"]
    assert least_drop_bar(BESIDE_A_RELIEF, their_pressures) > LEAST_DROP_BAR
    assert 5.0 < their_flows["RV1"] < PUMP_LPM - 5.0
    assert pressures == pytest.approx(their_pressures, rel=SAME)
    assert flows == pytest.approx(their_flows, rel=SAME)
    reading_bar = RELIEF_BAR * (OPENING_RATIO + (1.0 - OPENING_RATIO) * their_flows["RV1"] / PUMP_LPM)
    assert pressures["pump"] == pytest.approx(reading_bar, abs=0.1)  # half of the bend at its opening


def test_a_relief_that_stays_shut(tmp_path: Path) -> None:
    """Under its opening pressure our relief passes exactly nothing, and theirs closes."""
    pressures, flows = by_ours(LADDER, relief_bar=2000.0)
    their_pressures, their_flows = by_epanet(LADDER, tmp_path, relief_reading_bar=2000.0)
    del their_pressures["relief_outlet"], their_flows["RV1_outlet"]
    assert pressures["pump"] < OPENING_RATIO * 2000.0
    assert flows.pop("RV1") == 0.0
    assert their_flows.pop("RV1") == pytest.approx(0.0, abs=1e-3)
    assert pressures == pytest.approx(their_pressures, rel=SAME)
    assert flows == pytest.approx(their_flows, rel=SAME)
