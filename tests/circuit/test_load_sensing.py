"""Standby from a differential, what a reading at flow is judged by, both ends of a sealed port."""

from __future__ import annotations

import math
from typing import Any

import pytest
from circuit_bench import bench, cylinder, edge, load_sensing, screw_values
from pydantic import ValidationError

from sheets.circuit.build import both_ends, build_circuit
from sheets.circuit.load_sensing import differential_at_flow, standby_from_differential, standby_of
from sheets.circuit.model import AdjusterSite, Circuit
from sheets.circuit.plant import PlantState
from sheets.circuit.solver import solve_one
from sheets.errors import InputError
from sheets.machine.model import Machine
from sheets.machine.parts import LoadSensingControl

STANDBY_BAR = 24.0 + 5.0 * 20.0 / 54.0
"""24 bar at 20 of 54 L/min, 5 bar wide."""


def control(**changes: Any) -> LoadSensingControl:
    plate = {
        "highest_bar": 40.0,
        "given_by": "data sheet",
        "differential_bar": 24.0,
        "differential_flow_lpm": 20.0,
        "width_bar": 5.0,
    }
    values = screw_values(**{**plate, **changes})
    return LoadSensingControl(**{key: value for key, value in values.items() if value is not None})


def throttled(*, pump: dict[str, Any] | None = None, **changes: Any) -> Machine:
    """A cylinder behind a hand valve that passes 20 L/min at 24 bar; its far side is the LS line."""
    return bench(
        {
            "PU1": load_sensing(load_sensing=control(**changes), **(pump or {})),
            "HV1": edge("hand valve", 20.0, 24.0),
            "CY1": cylinder(extending_load_kn=math.pi * 25.0),
        },
        {"tank": "TK1.T PU1.S PU1.L CY1.B", "line": "PU1.P HV1.A", "load": "HV1.B CY1.A PU1.X"},
    )


def running(circuit: Circuit, *, standby: float) -> PlantState:
    settings_bar = {"PU1.compensator": 200.0, "PU1.load sensing": standby}
    return circuit.rest_state(settings_bar).driven("M1", on=True)


def site_of(circuit: Circuit) -> AdjusterSite:
    return next(site for site in circuit.adjusters if site.id == "PU1.load sensing")


def test_standby_is_the_differential_and_the_share_of_the_width_that_its_flow_takes():
    figures = {"flow_lpm": 20.0, "width_bar": 5.0, "full_flow_lpm": 54.0}
    assert standby_from_differential(differential_bar=24.0, **figures) == pytest.approx(25.851852, abs=1e-6)
    assert differential_at_flow(standby_bar=STANDBY_BAR, **figures) == pytest.approx(24.0)


@pytest.mark.parametrize("pump", [{}, {"displacement_stop_cm3": 20.0}])
def test_pump_set_to_that_standby_holds_the_differential_at_its_flow(pump: dict[str, float]):
    machine = throttled(pump=pump)
    standby_bar = standby_of(machine, "PU1", width_bar=5.0)
    assert standby_bar == pytest.approx(STANDBY_BAR)
    circuit = build_circuit(machine)
    solution = solve_one(circuit, running(circuit, standby=standby_bar))
    assert solution.flows_lpm["PU1"] == pytest.approx(20.0, rel=1e-3)
    assert solution.pressure_at("PU1.P") - solution.pressure_at("PU1.X") == pytest.approx(24.0, abs=1e-2)
    site = site_of(circuit)
    assert site.signal_node == circuit.node_of["PU1.X"]
    assert site.reference_flow_lpm == 0.0
    assert differential_at_flow(
        standby_bar=standby_bar, flow_lpm=20.0, width_bar=site.width_bar, full_flow_lpm=site.width_flow_lpm
    ) == pytest.approx(24.0)


def test_a_given_standby_stands_and_no_value_is_none():
    assert standby_of(throttled(setting_bar=30.0), "PU1", width_bar=5.0) == 30.0
    nothing = {"differential_bar": None, "differential_flow_lpm": None, "given_by": None}
    assert standby_of(throttled(**nothing), "PU1", width_bar=5.0) is None
    assert standby_of(throttled(), "CY1", width_bar=5.0) is None


def test_a_policy_width_is_not_held_against_the_range():
    # 25.85 bar by a width that nobody gives; the range ends at 25 bar. With the width on the plate: refused.
    unknown = throttled(width_bar=None, highest_bar=25.0)
    assert standby_of(unknown, "PU1", width_bar=5.0) == pytest.approx(STANDBY_BAR)


@pytest.mark.parametrize(
    ("changes", "where", "what"),
    [
        ({"differential_flow_lpm": 54.1}, "differential flow", "54"),
        ({"differential_flow_lpm": 54.1, "width_bar": None}, "differential flow", "54"),
        ({"differential_flow_lpm": 54.1, "setting_bar": 30.0}, "differential flow", "54"),
        ({"highest_bar": 25.0}, "differential", "25.9"),
        ({"lowest_bar": 26.0}, "differential", "25.9"),
    ],
)
def test_a_differential_that_this_pump_cannot_have_is_refused(
    changes: dict[str, float], where: str, what: str
):
    with pytest.raises(InputError) as refused:
        standby_of(throttled(**changes), "PU1", width_bar=5.0)
    (problem,) = refused.value.problems
    assert problem.where == f"parts, PU1, load sensing, {where}"
    assert what in problem.what


def test_a_differential_in_place_of_a_standby_needs_a_source_and_may_be_sealed():
    with pytest.raises(ValidationError, match="differential has no source"):
        control(given_by=None)
    assert control(may_be_set=False, seal="lead").has_value
    with pytest.raises(ValidationError, match="isn't given"):
        control(may_be_set=False, differential_bar=None, differential_flow_lpm=None, given_by=None)


@pytest.mark.parametrize("inside", ["drained", "fed"])
def test_a_port_that_is_drained_or_fed_inside_is_not_without_bleed(inside: str):
    with pytest.raises(ValidationError, match="not without bleed"):
        control(port_not_connected=inside, sealed_without_bleed=True)
    assert control(port_not_connected="sealed", sealed_without_bleed=True).sealed_without_bleed
    assert control(sealed_without_bleed=True).sealed_without_bleed
    assert not control().sealed_without_bleed


def test_both_ends_of_a_sealed_port_stand_at_standby_and_at_the_compensator():
    machine = bench({"PU1": load_sensing("sealed")}, {"tank": "TK1.T PU1.S PU1.L", "line": "PU1.P"})
    circuits = both_ends(machine)
    assert [circuit.sealed_end for circuit in circuits] == ["standby end", "compensator end"]
    readings = [
        solve_one(circuit, running(circuit, standby=22.0)).pressure_at("PU1.P") for circuit in circuits
    ]
    assert readings == pytest.approx([22.0, 200.0], abs=0.01)
    assert [site_of(circuit).signal_node for circuit in circuits] == [None, None]


@pytest.mark.parametrize("inside", ["drained", "fed"])
def test_one_circuit_where_no_leakage_decides(inside: str):
    machine = bench({"PU1": load_sensing(inside)}, {"tank": "TK1.T PU1.S PU1.L", "line": "PU1.P"})
    (circuit,) = both_ends(machine, control_width_bar=6.0)
    assert circuit.sealed_ports == ()
