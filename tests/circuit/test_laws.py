"""Each law alone: its points, its zeros, its slopes."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from circuit_bench import bench, edge, fixed_pump, hydraulic_motor, many_sections, relief

from sheets.circuit.build import build_circuit
from sheets.circuit.equations import balance, by_settings, jacobian
from sheets.circuit.smooth import conductance, orifice_flow, ramp, smaller
from sheets.circuit.solver import as_arrays
from sheets.circuit.stamp import StateArrays


def row(*values: float) -> np.ndarray:
    return np.array([values], dtype=np.float64)


def test_ramp_is_nothing_below_zero_then_a_parabola_then_straight():
    value, slope = ramp(x=row(-3.0, 0.0, 0.1, 0.2, 5.0), width=0.2)
    assert value[0] == pytest.approx([0.0, 0.0, 0.01 / 0.4, 0.1, 4.9])
    assert value[0, 0] == 0.0
    assert slope[0] == pytest.approx([0.0, 0.0, 0.5, 1.0, 1.0])


def test_smaller_is_exact_away_from_the_corner_and_an_eighth_of_the_width_below_it_in_the_corner():
    value, _, _ = smaller(a=row(1.0, 9.0, 5.0), b=row(9.0, 1.0, 5.0), width=0.8)
    assert value[0] == pytest.approx([1.0, 1.0, 4.9], abs=1e-12)


def test_orifice_meets_its_rated_point_and_passes_zero_smoothly():
    edge_k = conductance(rated_flow_lpm=80.0, rated_drop_bar=4.0)
    assert edge_k == 40.0
    flow, slope = orifice_flow(drop_bar=row(4.0, -4.0, 0.0), conductance=edge_k)
    assert flow[0] == pytest.approx([80.0, -80.0, 0.0], rel=1e-4)
    assert slope[0, 2] == pytest.approx(40.0 / np.sqrt(0.05))


def test_closed_way_conducts_exactly_nothing_either_way():
    machine = bench({"HV1": edge("hand valve", 60.0, 1.0)}, {"t": "TK1.T", "a": "HV1.A", "b": "HV1.B"})
    circuit = build_circuit(machine)
    states = [circuit.rest_state({}).moved("HV1", position) for position in ("closed", "open")]
    pressures = np.array([[0.0, 300.0, 1.0], [0.0, 300.0, 1.0]])
    stamp = circuit.ways.stamp(pressures, as_arrays(circuit, states))
    assert stamp.through_lpm[0, 0] == 0.0
    assert not np.any(stamp.slopes[0])
    assert stamp.through_lpm[1, 0] == pytest.approx(60.0 * np.sqrt(299.0), rel=1e-6)


def test_check_passes_one_way_and_its_rated_drop_holds_its_spring():
    machine = bench(
        {"CV1": edge("check valve", 60.0, 2.5, opening_bar=0.5)}, {"t": "TK1.T", "a": "CV1.A", "b": "CV1.B"}
    )
    circuit = build_circuit(machine)
    pressures = np.array([[0.0, 2.5, 0.0], [0.0, 0.5, 0.0], [0.0, 0.0, 400.0]])
    flow = circuit.checks.stamp(pressures, widening=1.0).through_lpm[:, 0]
    assert flow[0] == pytest.approx(60.0, rel=0.01)  # the bend takes 0.025 of 2 bar
    assert flow[1] == 0.0
    assert flow[2] == 0.0


@pytest.mark.parametrize("setting_bar", [20.0, 150.0, 315.0])
def test_relief_passes_its_reference_flow_at_its_setting_and_nothing_at_its_opening(setting_bar: float):
    machine = bench({"RV1": relief(opening_ratio=0.9)}, {"t": "TK1.T RV1.T", "p": "RV1.P"})
    circuit = build_circuit(machine)
    arrays = as_arrays(circuit, [circuit.rest_state({"RV1": setting_bar})])
    at = [
        circuit.reliefs.stamp(np.array([[0.0, p]]), arrays, widening=1.0).through_lpm[0, 0]
        for p in (setting_bar, 0.9 * setting_bar, -5.0)
    ]
    assert at[0] == pytest.approx(54.0, rel=1e-12)
    assert at[1:] == [0.0, 0.0]


def test_motor_leaks_what_its_volumetric_efficiency_leaves_at_its_rating():
    machine = bench(
        {"PU1": fixed_pump(), "HM1": hydraulic_motor(volumetric_efficiency=0.9, load_torque_nm=2000.0)},
        {"t": "TK1.T PU1.S HM1.L", "p": "PU1.P", "a": "HM1.A", "b": "HM1.B"},
    )
    circuit = build_circuit(machine)
    # A tenth of the pump's full flow of 54 L/min at 350 bar, from each side to the case.
    assert circuit.actuators.case_leakage[0] == pytest.approx(5.4 / 350.0)
    assert circuit.actuators.cross_leakage[0] == 0.0
    pressures = np.zeros((1, len(circuit.nodes)))
    pressures[0, circuit.node_of["HM1.A"]] = 350.0
    stamp = circuit.actuators.stamp(pressures, as_arrays(circuit, [circuit.rest_state({})]), widening=1.0)
    assert stamp.inflow_lpm[0, 0] == pytest.approx([-5.4, 0.0, 5.4])  # held by its load, so it only leaks
    assert circuit.actuators.swept_a[0] == 0.2
    # 2000 N·m on 200 cm³: 2000·20π/200 bar
    assert circuit.actuators.load_forward_bar[0] == pytest.approx(628.3185, rel=1e-6)


def every_law() -> tuple[object, StateArrays, np.ndarray]:
    """Random pressures around every bend of a circuit with every family."""
    circuit = build_circuit(many_sections(2), sealed_ls="compensator end")
    rng = np.random.default_rng(5)
    count, batch = len(circuit.nodes), 60
    states = [
        circuit.rest_state(
            {site.id: rng.uniform(site.lowest_bar, site.highest_bar) for site in circuit.adjusters}
        )
        for _ in range(batch)
    ]
    states = [
        (state if i % 5 else state.moved("HV1", "closed")).driven("M1", on=bool(i % 7)).moved("DV0", "out")
        for i, state in enumerate(states)
    ]
    pressures = rng.uniform(-0.98, 250.0, (batch, count))
    pressures[:30] = rng.uniform(-0.98, 0.6, (30, count))
    # Half of them where a control or a relief is at work.
    for i, state in enumerate(states[30:], start=30):
        outlet, line = circuit.node_of["PU1.P"], circuit.node_of["RV1.P"]
        pressures[i, outlet] = state.settings_bar["PU1.compensator"] - rng.uniform(-1.0, 5.0)
        pressures[i, circuit.node_of["PU1.X"]] = pressures[i, outlet] - rng.uniform(5.0, 45.0)
        pressures[i, line] = state.settings_bar["RV1"] * rng.uniform(0.92, 1.0)
    pressures[:, 0] = 0.0
    return circuit, as_arrays(circuit, states), pressures


@pytest.mark.parametrize("widening", [1.0, 20.0])
def test_jacobian_is_the_slope_of_the_residuals(widening: float):
    circuit, arrays, pressures = every_law()
    slopes = jacobian(circuit, balance(circuit, arrays, pressures, widening=widening))
    step = 1e-6
    worst = 0.0
    for node in range(1, pressures.shape[1]):
        ahead, back = pressures.copy(), pressures.copy()
        ahead[:, node] += step
        back[:, node] -= step
        by_difference = (
            balance(circuit, arrays, ahead, widening=widening).residual_lpm
            - balance(circuit, arrays, back, widening=widening).residual_lpm
        ) / (2.0 * step)
        scale = np.abs(slopes[:, :, node - 1]) + 1.0
        worst = max(worst, float(np.max(np.abs(by_difference - slopes[:, :, node - 1]) / scale)))
    assert worst < 1e-3


def test_setting_slopes_are_slopes_by_the_settings():
    circuit, arrays, pressures = every_law()
    slopes = by_settings(circuit, balance(circuit, arrays, pressures))
    assert np.max(np.abs(slopes)) > 1.0
    step = 1e-6
    for index in range(len(circuit.adjusters)):
        residuals = []
        for sign in (1.0, -1.0):
            settings = arrays.settings_bar.copy()
            settings[:, index] += sign * step
            moved = replace(arrays, settings_bar=settings)
            residuals.append(balance(circuit, moved, pressures).residual_lpm)
        by_difference = -(residuals[0] - residuals[1]) / (2.0 * step)
        assert by_difference == pytest.approx(slopes[:, :, index], rel=1e-3, abs=1e-3)
