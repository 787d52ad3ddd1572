"""Each single fault against figures worked out by hand, and which faults a state can have."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest
from circuit_bench import (
    bench,
    compensated,
    cylinder,
    edge,
    fixed_pump,
    load_sensing,
    many_sections,
    relief,
    spool,
)

from sheets.circuit.build import build_circuit
from sheets.circuit.faults import (
    CAN_MOVE,
    CAN_RAISE,
    Fault,
    FaultKind,
    every_fault,
    faults_of,
    faulty_circuit,
    solve_faults,
    under_fault,
)
from sheets.circuit.model import Circuit
from sheets.circuit.plant import PlantState
from sheets.circuit.solution import Solution
from sheets.circuit.solver import solve_one
from sheets.machine.model import Machine

TANK_LINE = "TK1.S TK1.T TK1.L"
BEND_BAR = 0.01
"""A relief is straight from its bend to its setting, so near its setting its bend moves little."""
STORED_BAR = 0.005
"""A node at 100 bar takes up 1e-4 L/min, over clearances that pass 0.04 L/min/bar there."""
BLOCKED = {"neutral": (), "out": ("P to A", "B to T"), "in": ("P to B", "A to T")}


def only(machine: Machine, circuit: Circuit, kind: FaultKind, part: str, position: str = "") -> Fault:
    """The one fault of that description among all that the circuit can have."""
    found = [
        f for f in every_fault(machine, circuit) if (f.kind, f.part, f.position) == (kind, part, position)
    ]
    assert len(found) == 1
    return found[0]


def running(circuit: Circuit, **settings_bar: float) -> PlantState:
    highest = {site.id: site.highest_bar for site in circuit.adjusters}
    named = {
        {"compensator": "PU1.compensator"}.get(name, name): value for name, value in settings_bar.items()
    }
    return circuit.rest_state({**highest, **named}).driven("M1", on=True)


def solved(circuit: Circuit, state: PlantState, fault: Fault) -> Solution:
    (solution,) = solve_faults(circuit, state, [fault], effects=True)
    assert solution.established
    return solution


def spool_bench(**changes: Any) -> Machine:
    """A compensated pump and a cylinder behind a spool that blocks everything at rest."""
    return bench(
        {"PU1": compensated(), "DV1": spool(BLOCKED, **changes), "CY1": cylinder(extending_load_kn=400.0)},
        {
            "tank": f"{TANK_LINE} PU1.S PU1.L DV1.T",
            "line": "PU1.P DV1.P",
            "a": "DV1.A CY1.A",
            "b": "DV1.B CY1.B",
        },
    )


def test_spool_stuck_at_rest_doesnt_shift_and_one_stuck_shifted_doesnt_come_back():
    open_centre = {**BLOCKED, "neutral": ("P to T",)}
    machine = bench(
        {"PU1": fixed_pump(volumetric_efficiency=1.0), "DV1": spool(open_centre), "CY1": cylinder()},
        {"tank": f"{TANK_LINE} PU1.S DV1.T", "line": "PU1.P DV1.P", "a": "DV1.A CY1.A", "b": "DV1.B CY1.B"},
    )
    circuit = build_circuit(machine)
    rest = running(circuit)
    out, back = (only(machine, circuit, FaultKind.SPOOL_STUCK, "DV1", name) for name in ("out", "in"))
    neutral = only(machine, circuit, FaultKind.SPOOL_STUCK, "DV1", "neutral")
    area_cm2 = math.pi * 25.0
    assert solved(circuit, rest, out).speeds["CY1"] == pytest.approx(60.0 / 6.0 / area_cm2, rel=1e-6)
    assert solved(circuit, rest, back).speeds["CY1"] == pytest.approx(
        -60.0 / 6.0 / (0.51 * area_cm2), rel=1e-5
    )
    assert solve_one(circuit, rest.moved("DV1", "out")).moving == {"CY1"}
    stuck = solved(circuit, rest.moved("DV1", "out"), neutral)
    assert stuck.moving == frozenset()
    assert stuck.pressure_at("PU1.P") == pytest.approx((60.0 / 20.0) ** 2, rel=1e-4)  # K 20 to tank


def test_leaking_spool_halves_the_pressure_between_two_equal_clearances():
    """K = 40/√4 = 20, so each clearance is 0.4: P to A to T are in series, as are P to B to T."""
    machine = spool_bench()
    circuit = build_circuit(machine)
    fault = only(machine, circuit, FaultKind.SPOOL_LEAKING, "DV1")
    assert fault.amount == pytest.approx(0.4)
    solution = solved(circuit, running(circuit, compensator=200.0), fault)
    # Compensator: p = 200 − 4·q/(60 − 0.02·196) with q = 2·0.4·√(p/2).
    pressure_bar = 200.0
    for _ in range(50):
        pressure_bar = 200.0 - 4.0 / 56.08 * 0.8 * math.sqrt(pressure_bar / 2.0)
    assert solution.pressure_at("PU1.P") == pytest.approx(pressure_bar, abs=1e-3)
    for port in ("CY1.A", "CY1.B"):
        assert solution.pressure_at(port) == pytest.approx(pressure_bar / 2.0, abs=STORED_BAR)
    assert solution.flows_lpm["PU1"] == pytest.approx(0.8 * math.sqrt(pressure_bar / 2.0), rel=1e-4)


def test_leaking_spool_leaks_beside_its_open_paths_too():
    """Held out against a load that doesn't yield: A stands at P, so all that flows is A to T and P to B."""
    machine = spool_bench()
    circuit = build_circuit(machine)
    fault = only(machine, circuit, FaultKind.SPOOL_LEAKING, "DV1")
    solution = solved(circuit, running(circuit, compensator=200.0).moved("DV1", "out"), fault)
    outlet_bar = solution.pressure_at("PU1.P")
    assert solution.flows_lpm["DV1 A to T clearance"] == pytest.approx(0.4 * math.sqrt(outlet_bar), rel=1e-3)
    assert solution.flows_lpm["DV1 P to B clearance"] == pytest.approx(0.4 * math.sqrt(outlet_bar), rel=1e-3)


def test_dead_coil_lets_its_own_position_go_and_no_other():
    machine = spool_bench(operated_by="solenoids", solenoids={"out": "Y1", "in": "Y2"})
    circuit = build_circuit(machine)
    dead = only(machine, circuit, FaultKind.COIL_DEAD, "DV1", "out")
    rest = running(circuit, compensator=200.0)
    assert under_fault(circuit, rest.moved("DV1", "out"), dead) == (circuit, rest)
    held = rest.moved("DV1", "in")
    assert under_fault(circuit, held, dead) == (circuit, held)
    assert not any(f.kind is FaultKind.COIL_DEAD for f in every_fault(spool_bench(), circuit))  # a lever


def test_control_stuck_at_full_stroke_drives_all_of_its_flow_over_the_relief():
    """60 − 0.02·p = 54·(p/260 − 0.9)/0.1, so p·(0.02 + 540/260) = 60 + 486."""
    machine = bench(
        {"PU1": load_sensing("drained"), "RV1": relief()},
        {"tank": f"{TANK_LINE} PU1.S PU1.L RV1.T", "line": "PU1.P RV1.P"},
    )
    circuit = build_circuit(machine)
    fault = only(machine, circuit, FaultKind.CONTROL_STUCK, "PU1")
    solution = solved(circuit, running(circuit, compensator=200.0, RV1=260.0), fault)
    pressure_bar = 546.0 / (0.02 + 540.0 / 260.0)
    assert solution.pressure_at("PU1.P") == pytest.approx(pressure_bar, abs=BEND_BAR)
    assert solution.flows_lpm["RV1"] == pytest.approx(60.0 - 0.02 * pressure_bar, rel=1e-4)
    assert solution.strokes["PU1"] == pytest.approx(1.0)
    line = circuit.node_of["PU1.P"]
    assert solution.effects["PU1.compensator"][line] == 0.0
    assert solution.effects["RV1"][line] > 0.9


def fixed_and_relief(**more: Any) -> Machine:
    return bench(
        {"PU1": fixed_pump(), "RV1": relief(), **more},
        {
            "tank": f"{TANK_LINE} PU1.S RV1.T " + " ".join(f"{part}.B" for part in more),
            "line": "PU1.P RV1.P " + " ".join(f"{part}.A" for part in more),
        },
    )


def test_relief_stuck_shut_leaves_the_pump_nothing_but_its_own_leakage():
    machine = fixed_and_relief()
    circuit = build_circuit(machine)
    solution = solved(
        circuit, running(circuit, RV1=200.0), only(machine, circuit, FaultKind.RELIEF_STUCK_SHUT, "RV1")
    )
    assert solution.pressure_at("PU1.P") == pytest.approx(60.0 / 0.02, rel=1e-4)  # less what a node stores
    assert solution.flows_lpm["RV1"] == 0.0


def test_relief_stuck_open_holds_its_band_and_no_more():
    """60 − 0.02·p = 54·p/(0.1·200) below a bend of 0.1 bar; 54 L/min would read 20 bar."""
    machine = fixed_and_relief()
    circuit = build_circuit(machine)
    state = running(circuit, RV1=200.0)
    solution = solved(circuit, state, only(machine, circuit, FaultKind.RELIEF_STUCK_OPEN, "RV1"))
    assert solution.pressure_at("PU1.P") == pytest.approx(60.0 / 2.72, abs=0.1)
    # The sound one: 60 − 0.02·p = 54·(p/200 − 0.9)/0.1.
    assert solve_one(circuit, state).pressure_at("PU1.P") == pytest.approx(546.0 / 2.72, abs=BEND_BAR)


def test_leaking_check_passes_two_hundredths_of_its_edge_backward_only():
    """K = 100/√(2.5 − 0.5), of which 2 %; an orifice of the same figure behind it halves the pressure."""
    leak = 0.02 * 100.0 / math.sqrt(2.0)
    machine = bench(
        {
            "PU1": fixed_pump(),
            "RV1": relief(),
            "CV1": edge("check valve", 100.0, 2.5),
            "OR1": edge("orifice", 10.0 * leak, 100.0),
        },
        {"tank": f"{TANK_LINE} PU1.S RV1.T OR1.B", "line": "PU1.P RV1.P CV1.B", "behind": "CV1.A OR1.A"},
    )
    circuit = build_circuit(machine)
    state = running(circuit, RV1=200.0)
    fault = only(machine, circuit, FaultKind.CHECK_LEAKING, "CV1")
    assert solve_one(circuit, state).pressure_at("CV1.A") == 0.0
    solution = solved(circuit, state, fault)
    outlet_bar = solution.pressure_at("PU1.P")
    assert solution.pressure_at("CV1.A") == pytest.approx(outlet_bar / 2.0, abs=0.05)
    assert solution.flows_lpm["CV1 backward"] == pytest.approx(leak * math.sqrt(outlet_bar / 2.0), rel=1e-3)
    assert solution.flows_lpm["CV1"] == 0.0
    pressures = np.zeros((1, len(circuit.nodes)))
    pressures[0, circuit.node_of["CV1.A"]] = 50.0
    forward = faulty_circuit(circuit, fault).checks.stamp(pressures, widening=1.0).through_lpm[0]
    assert forward[1] == 0.0


def test_plugged_bleed_passes_nothing_so_the_relief_takes_all():
    machine = fixed_and_relief(OR1=edge("orifice", 30.0, 100.0))
    circuit = build_circuit(machine)
    state = running(circuit, RV1=200.0)
    assert solve_one(circuit, state).flows_lpm["OR1"] > 40.0
    solution = solved(circuit, state, only(machine, circuit, FaultKind.BLEED_PLUGGED, "OR1"))
    assert solution.flows_lpm["OR1"] == 0.0
    assert solution.pressure_at("PU1.P") == pytest.approx(546.0 / 2.72, abs=BEND_BAR)


def test_clogged_filter_drops_a_hundred_times_as_much_at_the_same_flow():
    """60 L/min at 0.2 bar when clean; nothing leaks at an efficiency of 1, so 20 bar when clogged."""
    machine = bench(
        {"PU1": fixed_pump(volumetric_efficiency=1.0), "FR1": edge("filter", 60.0, 0.2)},
        {"tank": f"{TANK_LINE} PU1.S FR1.B", "line": "PU1.P FR1.A"},
    )
    circuit = build_circuit(machine)
    fault = only(machine, circuit, FaultKind.FILTER_CLOGGED, "FR1")
    assert solved(circuit, running(circuit), fault).pressure_at("PU1.P") == pytest.approx(20.0, rel=1e-4)


def test_worn_pump_loses_fifteen_hundredths_of_its_flow_at_its_rating():
    """η_v 0.9 becomes 0.75: 0.25·60/300 = 0.05 L/min/bar."""
    machine = fixed_and_relief()
    circuit = build_circuit(machine)
    state = running(circuit, RV1=200.0)
    solution = solved(circuit, state, only(machine, circuit, FaultKind.PUMP_WORN, "PU1"))
    assert solution.pressure_at("PU1.P") == pytest.approx(546.0 / 2.75, abs=BEND_BAR)
    assert solution.flows_lpm["PU1"] == pytest.approx(60.0 - 0.05 * 546.0 / 2.75, rel=1e-4)


def test_a_state_has_the_faults_that_its_valves_and_drives_leave_room_for():
    machine = spool_bench(operated_by="solenoids", solenoids={"out": "Y1", "in": "Y2"})
    circuit = build_circuit(machine)

    def described(state: PlantState, **narrowed: Any) -> list[tuple[FaultKind, str]]:
        return [(f.kind, f.position) for f in faults_of(machine, circuit, state, **narrowed)]

    rest = running(circuit)
    stuck, leaking, coil = FaultKind.SPOOL_STUCK, FaultKind.SPOOL_LEAKING, FaultKind.COIL_DEAD
    assert described(rest, kinds=CAN_MOVE) == [(stuck, "in"), (stuck, "out"), (leaking, "")]
    assert described(rest.moved("DV1", "out"), kinds=CAN_MOVE) == [
        (stuck, "neutral"),
        (leaking, ""),
        (coil, "out"),
    ]
    assert described(rest, kinds=CAN_RAISE) == [(FaultKind.CONTROL_STUCK, "")]
    assert described(rest.driven("M1", on=False), kinds=CAN_RAISE) == []
    assert (FaultKind.PUMP_WORN, "") in described(rest)


def test_every_kind_of_fault_is_found_and_a_state_of_the_sound_circuit_is_one_of_the_faulty_circuit():
    machine = many_sections(1)
    machine.parts["FI1"] = edge("filter", 100.0, 0.5)
    solenoids = {"operated_by": "solenoids", "solenoids": {"out": "Y1", "in": "Y2"}}
    machine.parts["DV0"] = spool(machine.parts["DV0"].positions, signal=True, **solenoids)
    machine.nets["return"] = (*machine.nets["return"], "FI1.A")
    machine.nets["tank"] = (*machine.nets["tank"], "FI1.B")
    circuit = build_circuit(machine)
    faults = every_fault(machine, circuit)
    assert {fault.kind for fault in faults} == set(FaultKind)
    state = running(circuit).moved("DV0", "out")
    together = solve_faults(circuit, state, faults, effects=True)
    sound = solve_one(circuit, state)
    near = solve_faults(circuit, state, faults, start_bar=sound.pressures_bar)
    for one, other in zip(together, near, strict=True):
        assert other.pressures_bar == pytest.approx(one.pressures_bar, abs=1e-5)
    for fault, solution in zip(faults, together, strict=True):
        changed, faulty = under_fault(circuit, state, fault)
        assert changed.nodes is circuit.nodes
        alone = solve_one(changed, faulty, effects=True)
        assert alone.established, fault
        assert alone.pressures_bar == solution.pressures_bar, fault
        assert alone.effects == solution.effects, fault
