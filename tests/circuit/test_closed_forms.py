"""Circuits small enough to work out by hand. Tolerances are the bends of the laws: 0.1 bar at the most."""

from __future__ import annotations

import math

import pytest
from circuit_bench import (
    bench,
    compensated,
    cylinder,
    edge,
    fixed_pump,
    hydraulic_motor,
    load_sensing,
    relief,
    screw_values,
    spool,
)

from sheets.circuit.build import build_circuit
from sheets.circuit.drive_load import drive_loads
from sheets.circuit.model import Circuit
from sheets.circuit.plant import PlantState
from sheets.circuit.solution import Solution
from sheets.circuit.solver import solve_one
from sheets.machine.parts import LoadSensingControl

TANK_LINE = "TK1.S TK1.T TK1.L"
BEND_BAR = 0.1


def running(circuit: Circuit, **settings_bar: float) -> PlantState:
    named = {
        {"compensator": "PU1.compensator", "margin": "PU1.load sensing"}.get(name, name): value
        for name, value in settings_bar.items()
    }
    return circuit.rest_state(named).driven("M1", on=True)


def solved(circuit: Circuit, state: PlantState) -> Solution:
    solution = solve_one(circuit, state, effects=True)
    assert solution.established
    return solution


def test_deadhead_reads_the_compensator_setting_and_follows_it_one_to_one():
    circuit = build_circuit(
        bench(
            {"PU1": compensated(), "RV1": relief()},
            {"tank": f"{TANK_LINE} PU1.S PU1.L RV1.T", "line": "PU1.P RV1.P"},
        )
    )
    state = running(circuit, compensator=200.0, RV1=260.0)
    solution = solved(circuit, state)
    assert solution.pressure_at("PU1.P") == pytest.approx(200.0, abs=1e-3)
    assert solution.flows_lpm["PU1"] == pytest.approx(0.0, abs=1e-3)
    assert solution.flows_lpm["RV1"] == 0.0
    # It still strokes for its own leakage: 0.02 L/min/bar of 60 L/min.
    assert solution.strokes["PU1"] == pytest.approx(200.0 * 0.02 / 60.0, abs=1e-4)
    line = circuit.node_of["PU1.P"]
    assert solution.effects["PU1.compensator"][line] == pytest.approx(1.0, abs=1e-5)
    assert solution.effects["RV1"][line] == 0.0
    # Down again as well: the pump takes its own leakage.
    held = state.adjusted("PU1.compensator", 150.0)
    lower = solved(circuit, PlantState(**{**vars(held), "pressures_bar": solution.pressures_bar}))
    assert lower.pressure_at("PU1.P") == pytest.approx(150.0, abs=1e-3)


def test_compensator_gives_full_stroke_a_width_below_its_setting():
    """An orifice sized for the full flow at 196 bar: 60 − 0.02·196 = 56.08 L/min."""
    circuit = build_circuit(
        bench(
            {"PU1": compensated(), "OR1": edge("orifice", 56.08 * 0.97, 196.0 + 4.0 * 0.03)},
            {"tank": f"{TANK_LINE} PU1.S PU1.L OR1.B", "line": "PU1.P OR1.A"},
        )
    )
    solution = solved(circuit, running(circuit, compensator=200.0))
    assert solution.flows_lpm["PU1"] == pytest.approx(0.97 * 56.08, rel=1e-3)
    assert solution.pressure_at("PU1.P") == pytest.approx(196.12, abs=0.02)


def test_standby_reads_the_load_sensing_setting_with_ls_drained():
    circuit = build_circuit(
        bench(
            {"PU1": load_sensing("drained"), "RV1": relief()},
            {"tank": f"{TANK_LINE} PU1.S PU1.L RV1.T", "line": "PU1.P RV1.P"},
        )
    )
    solution = solved(circuit, running(circuit, compensator=200.0, margin=22.0, RV1=260.0))
    assert solution.pressure_at("PU1.P") == pytest.approx(22.0, abs=1e-3)
    assert solution.effects["PU1.load sensing"][circuit.node_of["PU1.P"]] == pytest.approx(1.0, abs=1e-5)
    assert solution.effects["PU1.compensator"][circuit.node_of["PU1.P"]] == 0.0


@pytest.mark.parametrize(
    ("port", "end", "reads"),
    [
        ("drained", "compensator end", 22.0),
        ("fed", "standby end", 200.0),
        ("sealed", "standby end", 22.0),
        ("sealed", "compensator end", 200.0),
    ],
)
def test_ls_port_in_no_net(port: str, end: str, reads: float):
    circuit = build_circuit(
        bench({"PU1": load_sensing(port)}, {"tank": f"{TANK_LINE} PU1.S PU1.L", "line": "PU1.P"}),
        sealed_ls=end,
    )
    solution = solved(circuit, running(circuit, compensator=200.0, margin=22.0))
    assert solution.pressure_at("PU1.P") == pytest.approx(reads, abs=0.01)
    assert circuit.sealed_ports == (("PU1.X",) if port == "sealed" else ())
    assert solution.loose_ports == (frozenset({"PU1.X"}) if port == "sealed" else frozenset())


def throttled(load_kn: float) -> Circuit:
    """One cylinder behind a hand valve that passes 20 L/min at 24 bar; its far side is the LS line."""
    return build_circuit(
        bench(
            {
                "PU1": load_sensing(),
                "HV1": edge("hand valve", 20.0, 24.0),
                "CY1": cylinder(extending_load_kn=load_kn),
            },
            {
                "tank": f"{TANK_LINE} PU1.S PU1.L CY1.B",
                "line": "PU1.P HV1.A",
                "load": "HV1.B CY1.A PU1.X",
            },
        )
    )


def test_load_sensing_holds_the_same_drop_and_speed_at_two_loads():
    area_cm2 = math.pi * 25.0
    readings = []
    for load_bar in (50.0, 150.0):
        circuit = throttled(load_kn=load_bar * area_cm2 / 100.0)
        solution = solved(circuit, running(circuit, compensator=250.0, margin=24.0 + 5.0 * 20.0 / 54.0))
        # standby = differential + width·q/full flow, so this setting leaves 24 bar at 20 L/min.
        assert solution.pressure_at("CY1.A") == pytest.approx(load_bar, abs=BEND_BAR)
        assert solution.pressure_at("PU1.P") - solution.pressure_at("PU1.X") == pytest.approx(24.0, abs=1e-2)
        assert solution.speeds["CY1"] == pytest.approx(20.0 / 6.0 / area_cm2, rel=1e-3)
        assert solution.moving == {"CY1"}
        readings.append(solution)
    # All that differs is what seeps inside the pump out of the LS line: 0.001·√Δp of 20 L/min.
    assert readings[0].speeds["CY1"] == pytest.approx(readings[1].speeds["CY1"], rel=5e-4)


def test_width_follows_from_standby_and_differential():
    values = screw_values(
        highest_bar=40.0,
        setting_bar=27.0,
        given_by="pump maker's plate",
        differential_bar=24.0,
        differential_flow_lpm=20.0,
        port_not_connected="drained",
    )
    machine = bench(
        {"PU1": load_sensing(load_sensing=LoadSensingControl(**values))},
        {"tank": f"{TANK_LINE} PU1.S PU1.L", "line": "PU1.P"},
    )
    site = next(site for site in build_circuit(machine).adjusters if site.id == "PU1.load sensing")
    assert site.width_bar == pytest.approx(3.0 * 54.0 / 20.0)
    assert site.policy == frozenset()


def test_cylinder_extends_and_retracts_in_the_ratio_of_its_areas():
    circuit = build_circuit(
        bench(
            {
                "PU1": fixed_pump(volumetric_efficiency=1.0),
                "DV1": spool(
                    {"neutral": ("P to T",), "out": ("P to A", "B to T"), "in": ("P to B", "A to T")}
                ),
                "CY1": cylinder(),
            },
            {
                "tank": f"{TANK_LINE} PU1.S DV1.T",
                "line": "PU1.P DV1.P",
                "a": "DV1.A CY1.A",
                "b": "DV1.B CY1.B",
            },
        )
    )
    state = running(circuit)
    out, back = (solved(circuit, state.moved("DV1", position)) for position in ("out", "in"))
    assert out.speeds["CY1"] == pytest.approx(60.0 / 6.0 / (math.pi * 25.0), rel=1e-6)
    assert back.speeds["CY1"] / out.speeds["CY1"] == pytest.approx(
        -(100.0**2) / (100.0**2 - 70.0**2), rel=1e-5
    )
    # What the rod side gives back is less than what the cap side takes, by the ratio of areas.
    assert out.flows_lpm["DV1 B to T"] == pytest.approx(60.0 * 0.51, rel=1e-6)


def test_motor_turns_by_flow_over_displacement_and_asks_for_its_torque():
    circuit = build_circuit(
        bench(
            {"PU1": fixed_pump(volumetric_efficiency=1.0), "HM1": hydraulic_motor(load_torque_nm=300.0)},
            {"tank": f"{TANK_LINE} PU1.S HM1.B HM1.L", "line": "PU1.P HM1.A"},
        )
    )
    solution = solved(circuit, running(circuit))
    assert solution.speeds["HM1"] == pytest.approx(300.0, rel=1e-5)  # 60 L/min of 200 cm³
    assert solution.pressure_at("PU1.P") == pytest.approx(300.0 * 20.0 * math.pi / 200.0, abs=BEND_BAR)


def test_hung_load_turns_a_motor_backward_only_when_oil_can_leave():
    parts = {
        "HM1": hydraulic_motor(driving_torque_nm=200.0, has_case_drain=False),
        "HV1": edge("hand valve", 20.0, 10.0, rest="closed"),
    }
    circuit = build_circuit(bench(parts, {"tank": f"{TANK_LINE} HV1.B HM1.B", "a": "HM1.A HV1.A"}))
    held = solved(circuit, circuit.rest_state({}))
    assert held.moving == frozenset()
    assert held.pressure_at("HM1.A") == pytest.approx(200.0 * 20.0 * math.pi / 200.0, abs=BEND_BAR)
    let_go = solved(circuit, circuit.rest_state({}).moved("HV1", "open"))
    assert let_go.speeds["HM1"] == pytest.approx(-20.0 * math.sqrt(6.2832) / 0.2, rel=0.01)


@pytest.mark.parametrize("flow_lpm", [54.0, 30.0, 6.0])
def test_relief_at_partial_flow_reads_on_its_line(flow_lpm: float):
    """S·(κ + (1 − κ)·q/q_ref) with S = 200, κ = 0.9, q_ref = 54."""
    circuit = build_circuit(
        bench(
            {"PU1": fixed_pump(volumetric_efficiency=1.0, displacement_cm3=flow_lpm / 1.5), "RV1": relief()},
            {"tank": f"{TANK_LINE} PU1.S RV1.T", "line": "PU1.P RV1.P"},
        )
    )
    solution = solved(circuit, running(circuit, RV1=200.0))
    assert solution.pressure_at("PU1.P") == pytest.approx(200.0 * (0.9 + 0.1 * flow_lpm / 54.0), abs=BEND_BAR)
    follows = solution.effects["RV1"][circuit.node_of["PU1.P"]]
    assert follows == pytest.approx(0.9 + 0.1 * flow_lpm / 54.0, abs=1e-3)


def test_pressure_in_the_tank_line_adds_to_a_relief():
    """54 L/min over an edge of 54 L/min at 6 bar."""
    circuit = build_circuit(
        bench(
            {
                "PU1": fixed_pump(volumetric_efficiency=1.0, displacement_cm3=36.0),
                "RV1": relief(),
                "FR1": edge("orifice", 54.0, 6.0),
            },
            {"tank": f"{TANK_LINE} PU1.S FR1.B", "line": "PU1.P RV1.P", "return": "RV1.T FR1.A"},
        )
    )
    solution = solved(circuit, running(circuit, RV1=200.0))
    assert solution.pressure_at("RV1.T") == pytest.approx(6.0, abs=1e-3)
    assert solution.pressure_at("RV1.P") == pytest.approx(206.0, abs=2e-3)


def test_case_pressure_adds_to_a_compensator():
    """At deadhead the case line carries 0.02 L/min/bar of leakage; its edge passes 4 L/min at 3 bar."""
    circuit = build_circuit(
        bench(
            {"PU1": compensated(), "FR1": edge("orifice", 4.0, 3.0)},
            {"tank": f"{TANK_LINE} PU1.S FR1.B", "line": "PU1.P", "case": "PU1.L FR1.A"},
        )
    )
    solution = solved(circuit, running(circuit, compensator=200.0))
    case_bar = solution.pressure_at("PU1.L")
    assert case_bar == pytest.approx(3.0, abs=1e-2)
    assert solution.pressure_at("PU1.P") == pytest.approx(200.0 + case_bar, abs=1e-3)


def test_blocked_rod_side_is_intensified_by_the_ratio_of_areas():
    circuit = build_circuit(
        bench(
            {"PU1": compensated(), "CY1": cylinder(), "HV1": edge("hand valve", 40.0, 1.0, rest="closed")},
            {
                "tank": f"{TANK_LINE} PU1.S PU1.L HV1.B",
                "line": "PU1.P CY1.A",
                "rod": "CY1.B HV1.A",
            },
        )
    )
    solution = solved(circuit, running(circuit, compensator=150.0))
    # Seals that break away at 0.5 bar over the bore (policy) leave 149.5 bar to be held: 149.5/0.51 = 293.1.
    assert solution.pressure_at("CY1.B") == pytest.approx((150.0 - 0.5) / 0.51, abs=2.0 * BEND_BAR)
    assert solution.moving == frozenset()
    assert max(solution.pressures_bar) > 290.0  # far above anything that the pump gives


def test_void_forms_behind_a_closed_suction_valve_and_nothing_falls_below_minus_one_bar():
    circuit = build_circuit(
        bench(
            {
                "PU1": fixed_pump(),
                "RV1": relief(),
                "HV1": edge("hand valve", 200.0, 0.1),
            },
            {"tank": f"{TANK_LINE} HV1.A RV1.T", "suction": "HV1.B PU1.S", "line": "PU1.P RV1.P"},
        )
    )
    state = running(circuit, RV1=150.0)
    assert solved(circuit, state).voids == frozenset()
    shut = solved(circuit, state.moved("HV1", "closed"))
    assert shut.voids == {circuit.node_of["PU1.S"]}
    assert -1.0 < shut.pressure_at("PU1.S") < -0.95


def test_drive_load_is_pressure_times_flow_over_600_and_over_the_efficiency():
    circuit = build_circuit(
        bench(
            {"PU1": fixed_pump(volumetric_efficiency=1.0, displacement_cm3=36.0), "RV1": relief()},
            {"tank": f"{TANK_LINE} PU1.S RV1.T", "line": "PU1.P RV1.P"},
        )
    )
    state = running(circuit, RV1=200.0)
    load = drive_loads(circuit, solved(circuit, state))["M1"]
    assert load.hydraulic_kw == pytest.approx(18.0, rel=1e-6)  # 200 bar, 54 L/min
    assert load.shaft_kw == pytest.approx(22.5, rel=1e-6)  # 0.8 overall
    off = drive_loads(circuit, solved(circuit, state.driven("M1", on=False)))["M1"]
    assert (off.hydraulic_kw, off.shaft_kw) == (0.0, 0.0)
