"""Act, solve, settle: cylinders run to their stops, motors go on, memory is carried."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from circuit_bench import bench, compensated, cylinder, edge, fixed_pump, hydraulic_motor, relief, spool

from sheets.circuit import newton
from sheets.circuit import step as module
from sheets.circuit.build import build_circuit
from sheets.circuit.model import Circuit
from sheets.circuit.plant import Adjust, MoveValve, StartDrive, StopDrive
from sheets.circuit.solver import solve
from sheets.circuit.step import Outcome, take_step, take_steps

TANK_LINE = "TK1.S TK1.T TK1.L"
PRESS = {"centre": (), "out": ("P to A", "B to T"), "in": ("P to B", "A to T")}


@pytest.fixture(scope="module")
def press() -> Circuit:
    return build_circuit(
        bench(
            {"PU1": compensated(), "DV1": spool(PRESS), "CY1": cylinder(extending_load_kn=30.0)},
            {
                "tank": f"{TANK_LINE} PU1.S PU1.L DV1.T",
                "line": "PU1.P DV1.P",
                "a": "DV1.A CY1.A",
                "b": "DV1.B CY1.B",
            },
        )
    )


def test_a_moving_cylinder_runs_to_its_stop_and_keeps_its_pressure_when_blocked_and_stopped(press: Circuit):
    start = take_step(press, press.rest_state({"PU1.compensator": 160.0}), StartDrive(drive="M1"))
    assert start.outcome is Outcome.STILL
    out = take_step(press, start.state, MoveValve(valve="DV1", position="out"))
    assert out.outcome is Outcome.STILL
    assert out.moved == {"CY1"}
    assert out.state.travel["CY1"] == "far stop"
    assert len(out.passes) == 2
    assert out.passes[0].speeds["CY1"] > 0.0
    assert out.passes[0].pressure_at("CY1.A") < 60.0 < out.passes[1].pressure_at("CY1.A")
    assert out.solution.pressure_at("CY1.A") == pytest.approx(160.0, abs=0.01)

    centred = take_step(press, out.state, MoveValve(valve="DV1", position="centre"))
    off = take_step(press, centred.state, StopDrive(drive="M1"))
    assert off.outcome is Outcome.STILL
    assert off.solution.pressure_at("CY1.A") == pytest.approx(160.0, abs=0.01)

    back = take_step(
        press,
        take_step(press, off.state, StartDrive(drive="M1")).state,
        MoveValve(valve="DV1", position="in"),
    )
    assert back.state.travel["CY1"] == "near stop"
    assert back.moved == {"CY1"}


def test_without_running_to_stops_the_first_pass_is_the_last(press: Circuit):
    state = press.rest_state({"PU1.compensator": 160.0}).driven("M1", on=True)
    step = take_step(press, state, MoveValve(valve="DV1", position="out"), runs=())
    assert step.outcome is Outcome.MOVING
    assert step.state.travel["CY1"] == "between"
    assert len(step.passes) == 1


def test_a_cylinder_that_is_named_runs_from_anywhere_and_the_others_do_not(press: Circuit):
    """Where it stood before doesn't count: that it is said to stand at its stop moves it all the same."""
    state = press.rest_state({"PU1.compensator": 160.0}).driven("M1", on=True).standing("CY1", "far stop")
    out = MoveValve(valve="DV1", position="out")
    step = take_step(press, state, out, runs=("CY1",))
    assert (step.outcome, step.moved, step.state.travel["CY1"]) == (Outcome.STILL, {"CY1"}, "far stop")
    assert len(step.passes) == 2

    other = take_step(press, state.standing("CY1", "between"), out, runs=("CY2",))
    assert (other.outcome, other.moved) == (Outcome.MOVING, {"CY1"})
    assert other.state.travel["CY1"] == "between"


def test_a_cylinder_stops_short_where_the_pressure_does_not_suffice(press: Circuit):
    # 30 kN over 78.54 cm² are 38.2 bar.
    for setting_bar, moved, travel in ((35.0, set(), "between"), (45.0, {"CY1"}, "far stop")):
        state = press.rest_state({"PU1.compensator": setting_bar}).driven("M1", on=True)
        step = take_step(press, state, MoveValve(valve="DV1", position="out"), runs=("CY1",))
        assert (step.outcome, step.moved, step.state.travel["CY1"]) == (Outcome.STILL, moved, travel)


def test_an_adjustment_changes_the_setting_in_the_state(press: Circuit):
    state = press.rest_state({"PU1.compensator": 160.0}).driven("M1", on=True)
    step = take_step(press, state, Adjust(adjuster="PU1.compensator", setting_bar=90.0))
    assert step.state.settings_bar["PU1.compensator"] == 90.0
    assert step.solution.pressure_at("PU1.P") == pytest.approx(90.0, abs=1e-3)


def test_a_motor_has_no_stop_and_goes_on():
    circuit = build_circuit(
        bench(
            {"PU1": fixed_pump(), "HM1": hydraulic_motor(load_torque_nm=100.0), "RV1": relief()},
            {"tank": f"{TANK_LINE} PU1.S HM1.B HM1.L RV1.T", "line": "PU1.P HM1.A RV1.P"},
        )
    )
    step = take_step(circuit, circuit.rest_state({"RV1": 200.0}), StartDrive(drive="M1"))
    assert step.outcome is Outcome.MOVING
    assert step.moved == {"HM1"}
    assert step.state.travel["HM1"] == "between"


def test_two_cylinders_that_drive_each_other_end_in_one_order_each_on_its_stop():
    """Two cylinders in parallel: the lighter one runs first, then the heavier one."""
    circuit = build_circuit(
        bench(
            {
                "PU1": compensated(),
                "CY1": cylinder(extending_load_kn=80.0),
                "CY2": cylinder(extending_load_kn=20.0),
                "HV1": edge("hand valve", 40.0, 2.0, rest="closed"),
            },
            {
                "tank": f"{TANK_LINE} PU1.S PU1.L CY1.B CY2.B",
                "line": "PU1.P HV1.A",
                "cap": "HV1.B CY1.A CY2.A",
            },
        )
    )
    state = circuit.rest_state({"PU1.compensator": 160.0}).driven("M1", on=True)
    step = take_step(circuit, state, MoveValve(valve="HV1", position="open"))
    assert step.passes[0].moving == {"CY2"}
    assert step.passes[1].moving == {"CY1"}
    assert set(step.state.travel.values()) == {"far stop"}
    assert step.outcome is Outcome.STILL


def test_a_cylinder_that_would_run_to_and_fro_is_cycling(monkeypatch: pytest.MonkeyPatch, press: Circuit):
    """No circuit of today's parts does it, so the second solve is told the other way."""
    speeds = iter([0.1, -0.1, 0.1, -0.1])

    def to_and_fro(circuit, states):
        speed = np.array([[next(speeds)]])
        return replace(solve(circuit, states), moving=np.array([[True]]), speeds=speed)

    monkeypatch.setattr(module, "solve", to_and_fro)
    step = take_step(press, press.rest_state({"PU1.compensator": 160.0}), None)
    assert step.outcome is Outcome.CYCLING


def test_no_solution_is_its_own_outcome_and_the_memory_is_not_overwritten(
    press: Circuit, monkeypatch: pytest.MonkeyPatch
):
    state = press.rest_state({"PU1.compensator": 160.0})
    for limit in ("BOUNDED_STEPS", "NEWTON_STEPS", "TIME_STEPS"):
        monkeypatch.setattr(newton, limit, 1)
    step = take_step(press, state, StartDrive(drive="M1"))
    assert step.outcome is Outcome.NOT_ESTABLISHED
    assert step.state.pressures_bar == state.pressures_bar
    assert step.state.running == {"M1"}


def test_steps_taken_together_are_the_steps_taken_alone(press: Circuit):
    state = press.rest_state({"PU1.compensator": 160.0}).driven("M1", on=True)
    steps = [
        (state, MoveValve(valve="DV1", position="out")),
        (state, StopDrive(drive="M1")),
        (state, None),
        (state, MoveValve(valve="DV1", position="in")),
    ]
    together = take_steps(press, steps)
    for (before, action), outcome in zip(steps, together, strict=True):
        alone = take_step(press, before, action)
        assert outcome.state == alone.state
        assert outcome.outcome is alone.outcome
        assert [one.pressures_bar for one in outcome.passes] == [one.pressures_bar for one in alone.passes]
