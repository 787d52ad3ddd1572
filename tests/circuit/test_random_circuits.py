"""Random small circuits: what must hold of every one of them, recomputed here without the arrays."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace

import numpy as np
import pytest
from circuit_bench import bench, compensated, edge, fixed_pump, relief
from hypothesis import given, settings
from hypothesis import strategies as st

from sheets.circuit.build import build_circuit
from sheets.circuit.model import Circuit
from sheets.circuit.plant import PlantState
from sheets.circuit.solution import Solution
from sheets.circuit.solver import solve, solve_one
from sheets.machine.model import Machine

NETS = 4
"""Line n0 is the pump's; the others hang on it in any manner."""


@dataclass(frozen=True, kw_only=True)
class Drawn:
    """A machine and how its parts are joined."""

    machine: Machine
    ends: dict[str, tuple[str, str]]
    shut: frozenset[str]
    setting_bar: float
    relief_bar: float


@st.composite
def circuits(draw: st.DrawFn) -> Drawn:
    """A pump, its relief, and two to six edges between lines and tank."""
    parts = {
        "PU1": draw(st.sampled_from([fixed_pump(), compensated()])),
        "RV1": relief(),
    }
    lines = [f"n{i}" for i in range(NETS)]
    ends: dict[str, tuple[str, str]] = {}
    for index in range(draw(st.integers(2, 6))):
        kind = draw(st.sampled_from(["hand valve", "orifice", "check valve"]))
        one, other = draw(st.permutations([*lines, "tank"]))[:2]
        id_ = f"E{index}"
        parts[id_] = edge(kind, draw(st.floats(2.0, 100.0)), draw(st.floats(1.0, 20.0)))
        ends[id_] = (one, other)
    hand = [id_ for id_ in ends if parts[id_].kind == "hand valve"]
    nets = {line: [] for line in [*lines, "tank"]}
    nets["n0"] += ["PU1.P", "RV1.P"]
    nets["tank"] += ["TK1.S", "TK1.T", "PU1.S", "RV1.T"]
    if parts["PU1"].kind == "variable pump":
        nets["tank"].append("PU1.L")
    for id_, (one, other) in ends.items():
        nets[one].append(f"{id_}.A")
        nets[other].append(f"{id_}.B")
    return Drawn(
        machine=bench(parts, {name: " ".join(ports) for name, ports in nets.items() if ports}),
        ends=ends,
        shut=frozenset(draw(st.sets(st.sampled_from(hand)))) if hand else frozenset(),
        setting_bar=draw(st.floats(20.0, 300.0)),
        relief_bar=draw(st.floats(20.0, 340.0)),
    )


def state_of(drawn: Drawn, circuit: Circuit) -> PlantState:
    named = {"PU1.compensator": drawn.setting_bar, "RV1": drawn.relief_bar}
    state = circuit.rest_state({site.id: named[site.id] for site in circuit.adjusters}).driven("M1", on=True)
    for valve in drawn.shut:
        state = state.moved(valve, "closed")
    return state


def solved(circuit: Circuit, state: PlantState) -> Solution:
    solution = solve_one(circuit, state)
    assert solution.established
    return solution


def flow_through(drawn: Drawn, id_: str, before_bar: float, behind_bar: float) -> float:
    """Flow of an edge by the laws as written on paper, in plain arithmetic."""
    part = drawn.machine.parts[id_]
    drop = before_bar - behind_bar
    if id_ in drawn.shut:
        return 0.0
    if part.kind == "check valve":
        conducts = part.rated_flow_lpm / math.sqrt(part.rated_drop_bar - part.opening_bar)
        beyond = drop - part.opening_bar
        drop = 0.0 if beyond <= 0.0 else beyond**2 / 0.1 if beyond < 0.05 else beyond - 0.025
    else:
        conducts = part.rated_flow_lpm / math.sqrt(part.rated_drop_bar)
    return conducts * drop / (drop**2 + 0.05**2) ** 0.25


def relief_flow(setting_bar: float, pressure_bar: float) -> float:
    bend = min(0.2, 0.1 * setting_bar / 10.0)
    beyond = pressure_bar - 0.9 * setting_bar
    lift = 0.0 if beyond <= 0.0 else beyond**2 / (2.0 * bend) if beyond < bend else beyond - bend / 2.0
    return 54.0 / (0.1 * setting_bar - bend / 2.0) * lift


@given(circuits())
@settings(max_examples=60, deadline=None)
def test_what_flows_into_each_line_flows_out_of_it(drawn: Drawn):
    circuit = build_circuit(drawn.machine)
    solution = solved(circuit, state_of(drawn, circuit))
    into = dict.fromkeys(drawn.machine.nets, 0.0)

    def pressure(line: str) -> float:
        return solution.pressures_bar[circuit.node_of[drawn.machine.nets[line][0]]]

    for id_, (one, other) in drawn.ends.items():
        flow = flow_through(drawn, id_, pressure(one), pressure(other))
        assert solution.flows_lpm[id_] == pytest.approx(flow, rel=1e-6, abs=1e-6)
        into[one] -= flow
        into[other] += flow
    at_pump = pressure("n0")
    into["n0"] -= relief_flow(drawn.relief_bar, at_pump)
    leak = 0.02 * at_pump
    if drawn.machine.parts["PU1"].kind == "fixed pump":
        into["n0"] += 60.0 - leak
    else:
        # Between the bends at full stroke and at none, the control's straight line; near them, in between.
        full_at_limit = 60.0 - 0.02 * (drawn.setting_bar - 4.0)
        asked = full_at_limit * (drawn.setting_bar - at_pump) / 4.0
        net = max(min(60.0 - leak, asked), -leak)
        assert solution.flows_lpm["PU1"] == pytest.approx(net, abs=0.06 * 60.0 / 8.0)
        into["n0"] += solution.flows_lpm["PU1"]
    for line, flow in into.items():
        if line != "tank":
            # What is left is what the step of memory stores: a millionth of the pressure for each litre.
            assert flow == pytest.approx(1e-6 * pressure(line), abs=2e-7 + 1e-9 * 120.0)


@given(circuits(), st.floats(0.5, 30.0))
@settings(max_examples=40, deadline=None)
def test_raising_a_setting_never_lowers_a_pressure(drawn: Drawn, by_bar: float):
    circuit = build_circuit(drawn.machine)
    state = state_of(drawn, circuit)
    low = solved(circuit, state).pressures_bar
    for site in circuit.adjusters:
        high = solved(circuit, state.adjusted(site.id, state.settings_bar[site.id] + by_bar)).pressures_bar
        assert all(b >= a - 1e-5 for a, b in zip(low, high, strict=True))


@given(circuits())
@settings(max_examples=40, deadline=None)
def test_a_closed_valve_is_as_good_as_no_valve(drawn: Drawn):
    circuit = build_circuit(drawn.machine)
    solution = solved(circuit, state_of(drawn, circuit))
    assert all(solution.flows_lpm[valve] == 0.0 for valve in drawn.shut)
    parts = {id_: part for id_, part in drawn.machine.parts.items() if id_ not in drawn.shut}
    nets = {
        name: tuple(port for port in ports if port.split(".")[0] not in drawn.shut)
        for name, ports in drawn.machine.nets.items()
    }
    less = build_circuit(Machine.model_construct(parts=parts, nets=nets, gauges={}))
    without = solved(less, state_of(replace(drawn, shut=frozenset()), less))
    for node in circuit.nodes:
        for port in node.ports:
            if port.split(".")[0] not in drawn.shut:
                assert without.pressure_at(port) == pytest.approx(solution.pressure_at(port), abs=1e-5)


@given(circuits(), st.lists(st.floats(0.0, 250.0), min_size=NETS + 1, max_size=NETS + 1))
@settings(max_examples=60, deadline=None)
def test_with_the_drive_off_no_oil_is_made_or_lost(drawn: Drawn, held_bar: list[float]):
    circuit = build_circuit(drawn.machine)
    before = (0.0, *held_bar[: len(circuit.nodes) - 1])
    state = replace(state_of(drawn, circuit).driven("M1", on=False), pressures_bar=before)
    solution = solved(circuit, state)
    outflow = sum(
        flow_through(
            drawn,
            id_,
            *(solution.pressures_bar[circuit.node_of[f"{id_}.{port}"]] for port in "AB"),
        )
        * ((other == "tank") - (one == "tank"))
        for id_, (one, other) in drawn.ends.items()
    )
    at_pump = solution.pressures_bar[circuit.node_of["PU1.P"]]
    outflow += relief_flow(drawn.relief_bar, at_pump)
    lost = 1e-6 * (sum(before) - sum(solution.pressures_bar))
    # The flow that the solver gives is one implicit step of the memory: exactly what the lines gave up.
    assert outflow == pytest.approx(lost, abs=1e-9)
    assert solution.flows_lpm["PU1"] == 0.0
    if outflow == 0.0:
        assert sum(solution.pressures_bar) == pytest.approx(sum(before), abs=1e-4)


@given(circuits(), st.randoms(use_true_random=False))
@settings(max_examples=30, deadline=None)
def test_order_of_the_file_changes_nothing(drawn: Drawn, shuffler):
    parts, nets = list(drawn.machine.parts.items()), list(drawn.machine.nets.items())
    shuffler.shuffle(parts)
    shuffler.shuffle(nets)
    one = build_circuit(drawn.machine)
    other = build_circuit(Machine.model_construct(parts=dict(parts), nets=dict(nets), gauges={}))
    first, second = (solved(circuit, state_of(drawn, circuit)) for circuit in (one, other))
    assert first.pressures_bar == second.pressures_bar
    assert first.flows_lpm == second.flows_lpm


@given(circuits(), st.lists(st.floats(0.0, 300.0), min_size=NETS + 1, max_size=NETS + 1))
@settings(max_examples=40, deadline=None)
def test_the_start_of_the_iteration_changes_nothing(drawn: Drawn, start_bar: list[float]):
    circuit = build_circuit(drawn.machine)
    state = state_of(drawn, circuit)
    start = np.array([start_bar[: len(circuit.nodes)]])
    own, other = solve(circuit, [state]), solve(circuit, [state], start=start)
    assert own.established[0]
    assert other.established[0]
    assert np.max(np.abs(own.pressures_bar - other.pressures_bar)) < 1e-5
