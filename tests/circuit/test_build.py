"""From parts and nets to nodes, families and adjusters."""

from __future__ import annotations

import math
import random

import numpy as np
import pytest
from circuit_bench import (
    POSITIONS,
    bench,
    compensated,
    cylinder,
    edge,
    fixed_pump,
    gauge_point,
    hose,
    load_sensing,
    many_sections,
    relief,
    screw_values,
    spool,
)

from sheets.circuit.build import build_circuit
from sheets.circuit.model import TANK
from sheets.circuit.solver import solve_one
from sheets.errors import InputError
from sheets.machine.model import Machine
from sheets.machine.parts import CompensatorControl, DialGauge

TANK_LINE = "TK1.S TK1.T TK1.L"


def test_hoses_join_nets_and_every_reservoir_port_is_the_tank():
    circuit = build_circuit(
        bench(
            {"PU1": compensated(), "H1": hose(), "H2": hose(), "TP1": gauge_point()},
            {
                "suction": "TK1.S PU1.S",
                "drain": "TK1.L PU1.L",
                "outlet": "PU1.P H1.A",
                "middle": "H1.B H2.A",
                "end": "H2.B TP1.P",
            },
        )
    )
    assert [node.name for node in circuit.nodes] == ["drain + suction", "end + middle + outlet"]
    assert circuit.node_of["PU1.S"] == circuit.node_of["PU1.L"] == TANK
    assert circuit.node_of["PU1.P"] == circuit.node_of["TP1.P"] == 1
    assert circuit.nodes[1].volume_l == 3.0


def test_a_node_is_rated_by_its_weakest_part_and_low_pressure_ports_only_where_the_maker_rates_them():
    circuit = build_circuit(
        bench(
            {
                "PU1": compensated(tank_rating_bar=5.0),
                "RV1": relief(),
                "H1": hose(rating_bar=280.0),
                "FR1": edge("orifice", 60.0, 1.0, rating_bar=25.0),
            },
            {
                "tank": f"{TANK_LINE} PU1.S FR1.B",
                "case": "PU1.L",
                "line": "PU1.P RV1.P H1.A",
                "end": "H1.B",
                "return": "RV1.T FR1.A",
            },
        )
    )
    rated = {node.name: (node.rating_bar, node.rated_by) for node in circuit.nodes}
    assert rated["end + line"] == (280.0, "H1")
    assert rated["case"] == (5.0, "PU1")
    assert rated["return"] == (25.0, "FR1")


def test_a_fixed_gauge_rates_its_node():
    machine = bench({"PU1": fixed_pump()}, {"tank": f"{TANK_LINE} PU1.S", "line": "PU1.P G1.P"})
    gauge = DialGauge(
        kind="dial gauge",
        range_bar=160.0,
        rating_bar=160.0,
        graduation_bar=5.0,
        accuracy_class=1.0,
        fitted_at=(),
    )
    machine = Machine.model_construct(parts=machine.parts, nets=machine.nets, gauges={"G1": gauge})
    node = build_circuit(machine).nodes[1]
    assert (node.rating_bar, node.rated_by) == (160.0, "G1")


def test_adjusters_are_named_by_part_or_by_part_and_name_in_the_order_of_the_file():
    circuit = build_circuit(
        bench(
            {"RV1": relief(), "PU1": load_sensing("drained"), "RV2": relief()},
            {"tank": f"{TANK_LINE} PU1.S PU1.L RV1.T RV2.T", "line": "PU1.P RV1.P RV2.P"},
        )
    )
    assert [site.id for site in circuit.adjusters] == ["RV1", "PU1.compensator", "PU1.load sensing", "RV2"]
    assert {site.controlled_node for site in circuit.adjusters} == {1}
    assert {site.reference_node for site in circuit.adjusters} == {TANK}


def test_policy_figures_are_used_only_where_no_plate_gives_one_and_are_named():
    no_plate = {"opening_ratio": None, "reference_flow_lpm": None}
    machine = bench(
        {
            "PU1": compensated(compensator=CompensatorControl(**screw_values())),
            "RV1": relief(**no_plate),
            "RV2": relief(acting="pilot operated", **no_plate),
            "RV3": relief(),
        },
        {"tank": f"{TANK_LINE} PU1.S PU1.L RV1.T RV2.T RV3.T", "line": "PU1.P RV1.P RV2.P RV3.P"},
    )
    sites = {site.id: site for site in build_circuit(machine).adjusters}
    assert (sites["RV1"].flow_slope, sites["RV2"].flow_slope, sites["RV3"].flow_slope) == (0.80, 0.93, 0.9)
    assert sites["RV1"].reference_flow_lpm == pytest.approx(54.0)  # full flow of the pump
    assert sites["RV1"].policy == {"opening ratio", "reference flow"}
    assert sites["RV3"].policy == frozenset()
    assert sites["PU1.compensator"].width_bar == 4.0
    assert sites["PU1.compensator"].policy == {"width"}
    assert sites["RV1"].width_bar == pytest.approx(0.2 * 350.0)
    other = build_circuit(
        machine, opening_ratio_direct=0.7, opening_ratio_pilot=0.9, control_width_bar=6.0
    ).adjusters
    sites = {site.id: site for site in other}
    assert (sites["RV1"].flow_slope, sites["RV2"].flow_slope, sites["RV3"].flow_slope) == (0.7, 0.9, 0.9)
    assert sites["PU1.compensator"].width_bar == 6.0


def test_rest_position_comes_first_and_a_path_is_one_edge_in_every_position():
    circuit = build_circuit(
        bench(
            {
                "DV1": spool(POSITIONS, signal=True),
                "HV1": edge("hand valve", 10.0, 1.0, rest="closed"),
            },
            {
                "tank": f"{TANK_LINE} DV1.T HV1.B",
                "p": "DV1.P HV1.A",
                "a": "DV1.A",
                "b": "DV1.B",
                "ls": "DV1.LS",
            },
        )
    )
    assert circuit.positions == {"DV1": ("neutral", "in", "out"), "HV1": ("closed", "open")}
    assert circuit.ways.ids == (
        "DV1 A to LS",
        "DV1 A to T",
        "DV1 B to LS",
        "DV1 B to T",
        "DV1 LS to T",
        "DV1 P to A",
        "DV1 P to B",
        "HV1",
    )
    signals = circuit.ways.conductance[[0, 2, 4]]
    assert signals == pytest.approx([1.0, 1.0, 1.0])  # 2 L/min at 4 bar
    assert circuit.ways.conductance[[1, 3, 5, 6]] == pytest.approx([20.0] * 4)


def test_order_of_parts_and_nets_changes_nothing():
    machine = many_sections(3)
    rng = random.Random(8)
    first = None
    for _ in range(3):
        parts, nets = list(machine.parts.items()), list(machine.nets.items())
        rng.shuffle(parts)
        rng.shuffle(nets)
        nets = [(name, tuple(rng.sample(ports, len(ports)))) for name, ports in nets]
        circuit = build_circuit(Machine.model_construct(parts=dict(parts), nets=dict(nets), gauges={}))
        settings = {site.id: 0.6 * site.highest_bar for site in circuit.adjusters}
        state = circuit.rest_state(settings).driven("M1", on=True).moved("DV1", "out")
        solution = solve_one(circuit, state)
        assert solution.established
        found = ([node.name for node in circuit.nodes], solution.pressures_bar, solution.flows_lpm)
        first = first or found
        assert found == first


def test_cylinder_port_with_a_plug_is_a_volume_of_its_own():
    circuit = build_circuit(
        bench(
            {"PU1": compensated(), "CY1": cylinder(plugged=("B",))},
            {"tank": f"{TANK_LINE} PU1.S PU1.L", "line": "PU1.P CY1.A"},
        )
    )
    closed = circuit.nodes[int(circuit.actuators.node_b[0])]
    assert closed.name == "CY1.B"
    assert closed.rating_bar == 350.0
    assert "CY1.B" not in circuit.node_of
    assert circuit.actuators.swept_a[0] == pytest.approx(6.0 * math.pi * 25.0)


@pytest.mark.parametrize(
    ("parts", "nets", "where"),
    [
        ({"PU1": load_sensing()}, {"tank": "PU1.S PU1.L", "line": "PU1.P"}, "port not connected"),
        ({"PU1": compensated()}, {"tank": "PU1.L", "line": "PU1.P"}, "PU1"),
        ({"PU1": fixed_pump(driven_by="M9")}, {"tank": "PU1.S", "line": "PU1.P"}, "driven by"),
        ({"RV1": relief(plugged=("T",))}, {"line": "RV1.P"}, "RV1"),
        ({"RV1": relief()}, {"line": "RV1.P", "other": "RV1.P RV1.T"}, "nets"),
    ],
    ids=["LS port unknown", "no suction", "no drive", "relief to nowhere", "port in two nets"],
)
def test_what_decides_a_pressure_and_is_missing_is_refused_by_name(parts, nets, where):
    with pytest.raises(InputError) as caught:
        build_circuit(bench(parts, {**nets, "tank": f"{TANK_LINE} {nets.get('tank', '')}"}))
    problem = caught.value.problems[0]
    assert where in problem.where
    assert problem.what
    assert problem.fix


def test_residuals_are_scaled_by_the_full_flow_of_all_pumps():
    circuit = build_circuit(
        bench(
            {"PU1": fixed_pump(), "PU2": compensated()},
            {"tank": f"{TANK_LINE} PU1.S PU2.S PU2.L", "one": "PU1.P", "two": "PU2.P"},
        )
    )
    assert circuit.reference_flow_lpm == pytest.approx(108.0)
    assert np.all(circuit.pumps.displaced_lpm == 60.0)
