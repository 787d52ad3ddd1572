"""Groups that are cut off keep their oil: over a shutdown, when they join, when a block is taken away."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from circuit_bench import bench, compensated, cylinder, edge, fixed_pump, hose, many_sections, relief

from sheets.circuit.build import build_circuit
from sheets.circuit.model import Circuit
from sheets.circuit.plant import PlantState
from sheets.circuit.solver import solve, solve_one

TANK_LINE = "TK1.S TK1.T TK1.L"


def follow(circuit: Circuit, state: PlantState) -> PlantState:
    """The state with the pressures that it settles at."""
    solution = solve_one(circuit, state)
    assert solution.established
    return replace(state, pressures_bar=solution.pressures_bar)


def three_volumes() -> Circuit:
    """Three nets behind one another, the second of them twice as large: two nets joined by a hose."""
    return build_circuit(
        bench(
            {
                "PU1": compensated(),
                "HV1": edge("hand valve", 40.0, 1.0),
                "HV2": edge("hand valve", 40.0, 1.0, rest="closed"),
                "BV1": edge("hand valve", 10.0, 50.0, rest="closed"),
                "H1": hose(),
            },
            {
                "tank": f"{TANK_LINE} PU1.S PU1.L BV1.B",
                "line": "PU1.P HV1.A BV1.A",
                "middle": "HV1.B H1.A",
                "middle end": "H1.B HV2.A",
                "end": "HV2.B",
            },
        )
    )


def test_pressure_stays_after_shutdown_and_groups_that_join_share_their_oil():
    circuit = three_volumes()
    state = follow(circuit, circuit.rest_state({"PU1.compensator": 180.0}).driven("M1", on=True))
    off = follow(circuit, state.driven("M1", on=False))
    middle, end = circuit.node_of["HV1.B"], circuit.node_of["HV2.B"]
    assert off.pressures_bar[middle] == pytest.approx(180.0, abs=1e-3)
    assert off.pressures_bar[end] == 0.0
    cut = follow(circuit, off.moved("HV1", "closed"))
    joined = follow(circuit, cut.moved("HV2", "open"))
    # Two litres at 180 bar and one at none.
    assert joined.pressures_bar[middle] == pytest.approx(120.0, abs=1e-3)
    assert joined.pressures_bar[end] == pytest.approx(120.0, abs=1e-3)
    # The line before HV1 never noticed; then it is bled, and the rest still has its pressure.
    assert joined.pressures_bar[circuit.node_of["PU1.P"]] == pytest.approx(180.0, abs=1e-3)
    bled = follow(circuit, joined.moved("BV1", "open"))
    assert bled.pressures_bar[circuit.node_of["PU1.P"]] == pytest.approx(0.0, abs=0.01)
    assert bled.pressures_bar[middle] == pytest.approx(120.0, abs=1e-3)


def test_groups_that_are_cut_off_do_not_drift_in_a_thousand_solves():
    circuit = three_volumes()
    state = follow(circuit, circuit.rest_state({"PU1.compensator": 180.0}).driven("M1", on=True))
    state = follow(circuit, state.driven("M1", on=False).moved("HV1", "closed"))
    first = state.pressures_bar
    for turn in range(300):
        state = follow(circuit, state.moved("BV1", "open" if turn % 2 else "closed"))
    middle = circuit.node_of["HV1.B"]
    assert state.pressures_bar[middle] == pytest.approx(first[middle], abs=1e-9)


def test_relief_lets_a_trapped_group_down_to_its_opening_and_no_further():
    circuit = build_circuit(
        bench(
            {"PU1": compensated(), "CV1": edge("check valve", 60.0, 3.0), "RV1": relief()},
            {"tank": f"{TANK_LINE} PU1.S PU1.L RV1.T", "line": "PU1.P CV1.A", "held": "CV1.B RV1.P"},
        )
    )
    state = circuit.rest_state({"PU1.compensator": 180.0, "RV1": 300.0}).driven("M1", on=True)
    off = follow(circuit, follow(circuit, state).driven("M1", on=False))
    held = circuit.node_of["RV1.P"]
    assert off.pressures_bar[held] == pytest.approx(179.5, abs=0.05)  # less the spring of the check
    opened = follow(circuit, off.adjusted("RV1", 100.0))
    assert opened.pressures_bar[held] == pytest.approx(90.0, abs=0.01)
    closed = follow(circuit, opened.adjusted("RV1", 300.0))
    # The check was still letting the last of the line's oil through, at the foot of its bend.
    assert closed.pressures_bar[held] == pytest.approx(opened.pressures_bar[held], abs=1e-3)


def test_pump_whose_drive_stands_passes_exactly_nothing():
    circuit = build_circuit(bench({"PU1": fixed_pump()}, {"tank": f"{TANK_LINE} PU1.S", "line": "PU1.P"}))
    state = replace(circuit.rest_state({}), pressures_bar=(0.0, 150.0))
    solution = solve_one(circuit, state)
    assert solution.flows_lpm["PU1"] == 0.0
    assert solution.pressures_bar[1] == 150.0


def test_weight_on_a_shut_cylinder_is_held_by_its_oil():
    """20 kN on 78.54 cm² are 25.46 bar; nothing moves until the valve opens."""
    circuit = build_circuit(
        bench(
            {
                "CY1": cylinder(weight_kn=20.0),
                "HV1": edge("hand valve", 20.0, 10.0, rest="closed"),
            },
            {"tank": f"{TANK_LINE} CY1.B HV1.B", "cap": "CY1.A HV1.A"},
        )
    )
    held = solve_one(circuit, circuit.rest_state({}))
    assert held.pressure_at("CY1.A") == pytest.approx(25.46, abs=0.06)
    assert held.moving == frozenset()
    sinking = solve_one(circuit, circuit.rest_state({}).moved("HV1", "open"))
    assert sinking.speeds["CY1"] < 0.0
    assert sinking.moving == {"CY1"}


def test_volume_of_cut_off_groups_is_conserved_in_mixed_random_states():
    """Own bookkeeping: joined by open ways and passing valves, without pumps, pistons that move or voids."""
    circuit = build_circuit(many_sections(2))
    rng = np.random.default_rng(11)
    settings = {site.id: site.highest_bar for site in circuit.adjusters}
    states = []
    for _ in range(120):
        held = rng.uniform(0.0, 180.0, len(circuit.nodes))
        held[0] = 0.0
        states.append(
            replace(
                circuit.rest_state(settings),
                positions={valve: str(rng.choice(names)) for valve, names in circuit.positions.items()},
                pressures_bar=tuple(held.tolist()),
                travel=dict.fromkeys(circuit.actuators_ids, "near stop"),
            )
        )
    batch = solve(circuit, states)
    assert np.all(batch.established)
    checked = 0
    for index, state in enumerate(states):
        for group in cut_off_groups(circuit, batch.one(index).flows_lpm, state):
            volumes = np.array([circuit.nodes[node].volume_l for node in group])
            before = np.array([state.pressures_bar[node] for node in group]) @ volumes
            after = batch.pressures_bar[index][list(group)] @ volumes
            if not (batch.moving[index].any() or (batch.void_flows_lpm[index][list(group)] > 0.0).any()):
                assert after == pytest.approx(before, abs=1e-5)
                checked += 1
    assert checked > 200


def cut_off_groups(circuit: Circuit, flows_lpm: dict[str, float], state: PlantState) -> list[set[int]]:
    """Sets of nodes that oil joins, by flooding; those with the tank or a piston side in them left out."""
    pairs = []
    for i, valve in enumerate(circuit.ways.valve):
        names = list(circuit.positions.values())[valve] if valve >= 0 else ()
        at = list(circuit.positions)[valve] if valve >= 0 else ""
        if valve < 0 or circuit.ways.opens[i, names.index(state.positions[at])]:
            pairs.append((int(circuit.ways.first[i]), int(circuit.ways.second[i])))
    for family in (circuit.checks, circuit.reliefs):
        for i, id_ in enumerate(family.ids):
            if flows_lpm[id_] > 0.0:
                pairs.append((int(family.first[i]), int(family.second[i])))
    groups = [{node} for node in range(len(circuit.nodes))]
    for one, other in pairs:
        left = next(group for group in groups if one in group)
        right = next(group for group in groups if other in group)
        if left is not right:
            groups.remove(right)
            left |= right
    sides = {int(n) for n in (*circuit.actuators.node_a, *circuit.actuators.node_b)}
    return [group for group in groups if 0 not in group and not group & sides]
