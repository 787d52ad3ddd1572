"""What nodes at an actuator may see, and what a motor leaks by its plate."""

from __future__ import annotations

import math

import pytest
from circuit_bench import bench, cylinder, fixed_pump, hydraulic_motor

from sheets.circuit.build import build_circuit
from sheets.circuit.model import Circuit, Node
from sheets.circuit.ratings import pressure_of_force, pressure_of_torque, swept_by_area


def node_at(circuit: Circuit, port: str) -> Node:
    """Node of a port, in a net or closed."""
    return next(node for node in circuit.nodes if port in node.ports)


def test_pressure_of_a_force_is_force_over_area():
    # 60 kN on 78.54 cm² is 60 000/0.007854 Pa.
    swept = swept_by_area(bore_mm=100.0)
    assert pressure_of_force(force_kn=60.0, swept=swept) == pytest.approx(6000.0 / (25.0 * math.pi))


def test_pressure_of_a_torque_is_what_turns_it_with_power_over_flow():
    # 400 N·m at 1 rev/s is 2π·400 W; 200 cm³/s at that power is 2π·400/2e-4 Pa.
    assert pressure_of_torque(torque_nm=400.0, displacement_cm3=200.0) == pytest.approx(
        2.0 * math.pi * 400.0 / 2e-4 / 1e5
    )


@pytest.mark.parametrize("closed", [True, False])
def test_structure_limits_both_sides_of_a_cylinder_by_their_areas(closed: bool):
    nets = {"tank": "TK1.T PU1.S", "line": "PU1.P CY1.A"}
    if not closed:
        nets["rod"] = "CY1.B CY2.A"
    circuit = build_circuit(
        bench({"PU1": fixed_pump(), "CY1": cylinder(structure_force_limit_kn=60.0), "CY2": cylinder()}, nets)
    )
    cap, rod = node_at(circuit, "CY1.A"), node_at(circuit, "CY1.B")
    area_cm2 = 25.0 * math.pi
    assert (cap.rating_bar, cap.rated_by) == (pytest.approx(6000.0 / area_cm2), "CY1")
    assert (rod.rating_bar, rod.rated_by) == (pytest.approx(6000.0 / (0.51 * area_cm2)), "CY1")


def test_structure_that_stands_more_than_the_cylinder_changes_no_rating():
    circuit = build_circuit(
        bench(
            {"PU1": fixed_pump(), "CY1": cylinder(structure_force_limit_kn=400.0, rating_bar=250.0)},
            {"tank": "TK1.T PU1.S CY1.B", "line": "PU1.P CY1.A"},
        )
    )
    cap = node_at(circuit, "CY1.A")
    assert (cap.rating_bar, cap.rated_by) == (250.0, "CY1")


def test_structure_limits_both_sides_of_a_motor_and_not_its_case():
    motor = hydraulic_motor(structure_torque_limit_nm=400.0)
    circuit = build_circuit(
        bench(
            {"PU1": fixed_pump(), "HM1": motor},
            {"tank": "TK1.T PU1.S", "line": "PU1.P HM1.A", "case": "HM1.L TK1.L"},
        )
    )
    for port in ("HM1.A", "HM1.B"):
        node = node_at(circuit, port)
        assert (node.rating_bar, node.rated_by) == (pytest.approx(40.0 * math.pi), "HM1")
    assert node_at(circuit, "HM1.L").rated_by == ""


@pytest.mark.parametrize(("plate_lpm", "leaks_lpm"), [(3.5, 3.5), (None, 5.4)])
def test_motor_leaks_what_its_plate_says_or_else_what_policy_takes(plate_lpm: float, leaks_lpm: float):
    """Policy: a tenth of the pump's 54 L/min, at 350 bar."""
    motor = hydraulic_motor(volumetric_efficiency=0.9, leakage_at_rating_lpm=plate_lpm)
    circuit = build_circuit(
        bench(
            {"PU1": fixed_pump(), "HM1": motor},
            {"tank": "TK1.T PU1.S HM1.L", "line": "PU1.P HM1.A", "b": "HM1.B TK1.S"},
        )
    )
    assert circuit.actuators.case_leakage[0] == pytest.approx(leaks_lpm / 350.0)
