"""Displacement stop and torque limit: what flows under each, and what stays as it was without them."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest
from circuit_bench import bench, compensated, edge, load_sensing, relief
from pydantic import ValidationError

from sheets.circuit.build import build_circuit
from sheets.circuit.drive_load import drive_loads
from sheets.circuit.faults import FaultKind, every_fault, solve_faults
from sheets.circuit.model import Circuit
from sheets.circuit.plant import PlantState
from sheets.circuit.solution import Solution
from sheets.circuit.solver import as_arrays, solve_one
from sheets.machine.model import Machine
from sheets.machine.parts import VariablePump

STOP_CM3, TORQUE_NM = 30.0, 100.0
"""Of 40 cm³ at 1500 rev/min: 45 of 60 L/min; the torque limit begins at 20π·100/40 = 157.08 bar."""
POWER_BAR_LPM = 20.0 * math.pi * TORQUE_NM * 1.5
BEGINS_BAR = 20.0 * math.pi * TORQUE_NM / 40.0


def unit(pump: VariablePump, **relief_plate: Any) -> Machine:
    return bench(
        {"PU1": pump, "RV1": relief(**relief_plate)},
        {"tank": "TK1.T PU1.S PU1.L RV1.T", "line": "PU1.P RV1.P"},
    )


def running(circuit: Circuit, *, compensator: float, **settings_bar: float) -> PlantState:
    highest = {site.id: site.highest_bar for site in circuit.adjusters}
    named = {**highest, "PU1.compensator": compensator, **settings_bar}
    return circuit.rest_state(named).driven("M1", on=True)


def solved(circuit: Circuit, state: PlantState) -> Solution:
    solution = solve_one(circuit, state)
    assert solution.established
    return solution


def test_stop_ends_the_stroke_and_leaves_leakage_as_it_was():
    circuit = build_circuit(unit(compensated(displacement_stop_cm3=STOP_CM3)))
    solution = solved(circuit, running(circuit, compensator=350.0, RV1=200.0))
    pressure_bar = solution.pressure_at("PU1.P")
    assert solution.flows_lpm["PU1"] == pytest.approx(45.0 - 0.02 * pressure_bar, rel=1e-9)
    # 45 − 0.02·p = 54·(p/200 − 0.9)/0.1, so p = (45 + 486)/2.72, but for the bend.
    assert pressure_bar == pytest.approx(531.0 / 2.72, abs=0.03)
    assert solution.strokes["PU1"] == pytest.approx(STOP_CM3 / 40.0)


def test_relief_reads_its_setting_at_the_greatest_flow_within_the_stop():
    """At its rating of 300 bar the pump gives 45 − 6 L/min: the default reference flow."""
    circuit = build_circuit(unit(compensated(displacement_stop_cm3=STOP_CM3), reference_flow_lpm=None))
    site = next(site for site in circuit.adjusters if site.id == "RV1")
    assert site.reference_flow_lpm == pytest.approx(39.0)
    assert circuit.reference_flow_lpm == pytest.approx(39.0)
    assert "reference flow" in site.policy
    solution = solved(circuit, running(circuit, compensator=350.0, RV1=300.0))
    assert solution.pressure_at("PU1.P") == pytest.approx(300.0, abs=1e-3)


def test_torque_limit_is_no_limit_of_what_a_relief_must_pass():
    """It fails as controls do, so the reference flow stays that of full stroke."""
    circuit = build_circuit(unit(compensated(torque_limit_nm=TORQUE_NM), reference_flow_lpm=None))
    assert next(s for s in circuit.adjusters if s.id == "RV1").reference_flow_lpm == pytest.approx(54.0)


@pytest.mark.parametrize("setting_bar", [200.0, 250.0, 300.0])
def test_over_its_torque_limit_a_pump_gives_constant_power(setting_bar: float):
    circuit = build_circuit(unit(compensated(torque_limit_nm=TORQUE_NM)))
    solution = solved(circuit, running(circuit, compensator=350.0, RV1=setting_bar))
    pressure_bar, flow_lpm = solution.pressure_at("PU1.P"), solution.flows_lpm["PU1"]
    assert pressure_bar > 1.1 * BEGINS_BAR
    assert flow_lpm == pytest.approx(
        TORQUE_NM * 20.0 * math.pi / pressure_bar * 1500.0 / 1000.0 - 0.02 * pressure_bar, rel=1e-9
    )
    shaft_kw = pressure_bar * (flow_lpm + 0.02 * pressure_bar) / 600.0
    assert shaft_kw == pytest.approx(2.0 * math.pi * 1500.0 / 60.0 * TORQUE_NM / 1000.0, rel=1e-9)
    hydraulic_kw = drive_loads(circuit, solution)["M1"].hydraulic_kw
    assert hydraulic_kw == pytest.approx(pressure_bar * flow_lpm / 600.0)


@pytest.mark.parametrize(("stop_cm3", "full_lpm"), [(None, 60.0), (STOP_CM3, 45.0)])
def test_below_its_torque_limit_a_pump_gives_its_full_flow(stop_cm3: float | None, full_lpm: float):
    circuit = build_circuit(unit(compensated(torque_limit_nm=TORQUE_NM, displacement_stop_cm3=stop_cm3)))
    solution = solved(circuit, running(circuit, compensator=350.0, RV1=140.0))
    pressure_bar = solution.pressure_at("PU1.P")
    assert pressure_bar < 0.95 * BEGINS_BAR
    assert solution.flows_lpm["PU1"] == pytest.approx(full_lpm - 0.02 * pressure_bar, rel=1e-9)


@pytest.mark.parametrize("limits", [{}, {"displacement_stop_cm3": 20.0}, {"torque_limit_nm": 50.0}])
def test_deadhead_and_standby_stay_exact_under_either_limit(limits: dict[str, float]):
    circuit = build_circuit(unit(load_sensing("drained", **limits)))
    state = running(circuit, compensator=290.0, **{"PU1.load sensing": 22.0})
    assert solved(circuit, state).pressure_at("PU1.P") == pytest.approx(22.0, abs=1e-3)
    circuit = build_circuit(unit(compensated(**limits)))
    solution = solved(circuit, running(circuit, compensator=290.0))
    assert solution.pressure_at("PU1.P") == pytest.approx(290.0, abs=1e-3)
    assert solution.flows_lpm["PU1"] == pytest.approx(0.0, abs=1e-3)


def test_stop_leaves_the_gain_of_a_compensator_as_it_was():
    """20 L/min of (60 − 0.02·196): 200 − 4·20/56.08 bar, with the stop as without."""
    for limits in ({}, {"displacement_stop_cm3": STOP_CM3}):
        machine = bench(
            {"PU1": compensated(**limits), "OR1": edge("orifice", 20.0, 200.0 - 80.0 / 56.08)},
            {"tank": "TK1.T PU1.S PU1.L OR1.B", "line": "PU1.P OR1.A"},
        )
        circuit = build_circuit(machine)
        solution = solved(circuit, running(circuit, compensator=200.0))
        assert solution.pressure_at("PU1.P") == pytest.approx(200.0 - 80.0 / 56.08, abs=1e-3)


def test_control_stuck_stops_at_the_stop_and_no_torque_limit_takes_stroke_away():
    machine = unit(compensated(displacement_stop_cm3=STOP_CM3, torque_limit_nm=TORQUE_NM))
    circuit = build_circuit(machine)
    fault = next(f for f in every_fault(machine, circuit) if f.kind is FaultKind.CONTROL_STUCK)
    (solution,) = solve_faults(circuit, running(circuit, compensator=150.0, RV1=260.0), [fault])
    assert solution.established
    assert solution.flows_lpm["PU1"] == pytest.approx(45.0 - 0.02 * solution.pressure_at("PU1.P"), rel=1e-9)


@pytest.mark.parametrize("widening", [1.0, 20.0, 400.0])
def test_slopes_of_a_limited_pump_are_slopes(widening: float):
    circuit = build_circuit(
        unit(load_sensing("drained", torque_limit_nm=TORQUE_NM, displacement_stop_cm3=STOP_CM3))
    )
    pressures = np.zeros((700, len(circuit.nodes)))
    pressures[:, circuit.node_of["PU1.P"]] = np.linspace(-0.5, 349.0, 700)
    states = as_arrays(
        circuit, [running(circuit, compensator=340.0, **{"PU1.load sensing": 400.0})] * len(pressures)
    )

    def net(shift_bar: float) -> np.ndarray:
        moved = pressures.copy()
        moved[:, circuit.node_of["PU1.P"]] += shift_bar
        return circuit.pumps.stamp(moved, states, widening=widening).through_lpm[:, 0]

    slopes = circuit.pumps.stamp(pressures, states, widening=widening).slopes[:, 0, 0, 0]
    assert slopes == pytest.approx((net(1e-5) - net(-1e-5)) / 2e-5, abs=1e-3)
    assert np.min(slopes) < -0.1


@pytest.mark.parametrize(
    ("limits", "key"),
    [
        ({"displacement_stop_cm3": 41.0}, "would allow more than the whole displacement"),
        ({"displacement_stop_cm3": 3.9}, "no more stroke than it leaks"),
        ({"torque_limit_nm": 28.0}, "hardly more stroke than it leaks"),  # 5.86 of 4 + 2 cm³ at 300 bar
        ({"torque_limit_nm": 0.0}, "is zero"),
    ],
)
def test_limits_that_cannot_be_true_are_refused(limits: dict[str, float], key: str):
    with pytest.raises(ValidationError, match=key):
        compensated(**limits)
    compensated(displacement_stop_cm3=40.0, torque_limit_nm=29.0)
