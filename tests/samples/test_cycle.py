"""The samples at work, from the solver, against closed forms: standby, deadhead, and moving at two loads."""

import math
from collections.abc import Callable

import pytest

from sheets.circuit.model import Circuit
from sheets.circuit.plant import PlantState
from sheets.circuit.solution import Solution
from sheets.circuit.solver import solve_one
from sheets.pages.compose.matter import Matter
from sheets.pipeline import Described

Changed = Callable[..., Described]


def run(circuit: Circuit, settings_bar: dict[str, float], **positions: str) -> Solution:
    state: PlantState = circuit.rest_state(settings_bar)
    for drive in circuit.drives:
        state = state.driven(drive, on=True)
    for valve, position in positions.items():
        state = state.moved(valve, position)
    solution = solve_one(circuit, state)
    assert solution.established
    return solution


SETTINGS = {
    "clay_mixer": {"RV1": 206.0, "PU1.compensator": 176.0, "PU1.load sensing": 27.0},
    "glaze_press": {"RV1": 227.5, "PU1.compensator": 193.0, "PU1.load sensing": 20.7},
    "kiln_pusher": {"RV1": 180.0},
}

# Clay mixer: load sensing

DISPLACED_LPM = 71 * 1475 / 1000
FULL_LPM = 0.95 * DISPLACED_LPM
LEAK = 0.05 * DISPLACED_LPM / 280
WIDTH_BAR = 3.0 * FULL_LPM / 60.0  # 3 bar less at 60 L/min


def heat_of_leakage_kw(pressure_bar: float, leak: float) -> float:
    """A pump on a shut line: what leaks inside falls from the outlet pressure to nothing."""
    return pressure_bar * leak * pressure_bar / 600


def test_standby_and_deadhead(clay_mixer: Matter) -> None:
    circuit, settings = clay_mixer.circuit, SETTINGS["clay_mixer"]
    standby = run(circuit, settings)
    deadhead = run(circuit, settings, HV1="closed", DV1="mix")

    assert standby.pressure_at("PU1.P") == pytest.approx(27.0, abs=0.01)
    assert standby.pressure_at("PU1.X") == pytest.approx(0.0, abs=0.01)
    assert standby.moving == frozenset()
    assert deadhead.pressure_at("PU1.P") == pytest.approx(176.0, abs=0.01)
    assert deadhead.pressure_at("PU1.X") == pytest.approx(deadhead.pressure_at("PU1.P"), abs=0.01)
    # No flow leaves the pump: its stroke makes up for its own leakage, and for what its LS bleed, 0.001
    # L/min/√bar, lets through to the drained signal: 0.001 · √27 = 0.0052 L/min.
    lost_lpm = LEAK * 27.0 + 0.001 * math.sqrt(27.0)
    assert standby.strokes["PU1"] == pytest.approx(lost_lpm / DISPLACED_LPM, rel=1e-3)
    assert deadhead.strokes["PU1"] == pytest.approx(LEAK * 176.0 / DISPLACED_LPM, rel=0.01)


def mixer(changed: Changed, torque_nm: int) -> Solution:
    described = changed("clay_mixer", ("load torque: 640 N m", f"load torque: {torque_nm} N m"))
    return run(described.circuit, SETTINGS["clay_mixer"], DV1="mix")


@pytest.mark.parametrize("torque_nm", [200, 640])
def test_pump_follows_the_load(changed: Changed, torque_nm: int) -> None:
    moving = mixer(changed, torque_nm)
    flow_lpm = moving.flows_lpm["PU1"]
    load_bar = torque_nm / 0.9 * 20 * math.pi / 400

    assert moving.moving == {"HM1"}
    motor_bar = moving.pressure_at("HM1.A") - moving.pressure_at("HM1.B")
    assert motor_bar == pytest.approx(load_bar, abs=0.1)  # 0.1 bar is what the model leaves over to move
    assert moving.pressure_at("PU1.X") == pytest.approx(moving.pressure_at("DV1.A"), abs=0.01)
    # Differential = standby − width · q/Q; just as much falls over the lever valve's edge, 60 L/min at 24
    # bar.
    differential_bar = moving.pressure_at("PU1.P") - moving.pressure_at("PU1.X")
    assert differential_bar == pytest.approx(27.0 - WIDTH_BAR * flow_lpm / FULL_LPM, abs=0.01)
    assert differential_bar == pytest.approx(24.0 * (flow_lpm / 60) ** 2, abs=0.05)
    assert flow_lpm == pytest.approx(60.0, abs=0.05)


def test_same_speed_at_both_loads(changed: Changed) -> None:
    light, heavy = mixer(changed, 200), mixer(changed, 640)

    assert light.flows_lpm["PU1"] == pytest.approx(heavy.flows_lpm["PU1"], abs=0.01)
    # What differs is the motor's leakage: each side leaks 0.06 · Q / 250 bar to its case.
    leak = 0.06 * FULL_LPM / 250
    for solution in (light, heavy):
        turning = solution.flows_lpm["PU1"] - leak * solution.pressure_at("HM1.A")
        assert solution.speeds["HM1"] == pytest.approx(turning / 0.4, rel=1e-3)
    slip = leak * (heavy.pressure_at("HM1.A") - light.pressure_at("HM1.A")) / 0.4
    assert light.speeds["HM1"] - heavy.speeds["HM1"] == pytest.approx(slip, rel=0.01)
    assert slip < 0.04 * light.speeds["HM1"]


def test_heat_saved_at_rest(clay_mixer: Matter) -> None:
    # A spool run far out of the way never asks for less: the compensator alone holds the line.
    circuit, settings = clay_mixer.circuit, SETTINGS["clay_mixer"]
    alone = run(circuit, {**settings, "PU1.load sensing": 1000.0})
    senses = run(circuit, settings)

    assert alone.pressure_at("PU1.P") == pytest.approx(176.0, abs=0.01)
    heat_kw = [
        solution.pressure_at("PU1.P") * solution.strokes["PU1"] * DISPLACED_LPM / 600
        for solution in (alone, senses)
    ]
    saved_kw = heat_of_leakage_kw(176.0, LEAK) - heat_of_leakage_kw(27.0, LEAK)  # 0.966 − 0.023
    assert saved_kw == pytest.approx(0.943, abs=0.001)
    assert heat_kw[0] - heat_kw[1] == pytest.approx(saved_kw, rel=0.01)


def test_heat_saved_while_moving(changed: Changed) -> None:
    # At the same speed a compensator alone would hold near 176 bar, and the spool would turn the rest to
    # heat.
    light = mixer(changed, 200)
    flow_lpm = light.flows_lpm["PU1"]
    load_bar = 200 / 0.9 * 20 * math.pi / 400
    heat_kw = (light.pressure_at("PU1.P") - load_bar) * flow_lpm / 600
    full_at_limit = DISPLACED_LPM - LEAK * 172.0
    compensated_bar = 176.0 - 4.0 * flow_lpm / full_at_limit
    alone_kw = (compensated_bar - load_bar) * flow_lpm / 600

    assert heat_kw < alone_kw
    assert alone_kw - heat_kw == pytest.approx(
        (compensated_bar - light.pressure_at("PU1.P")) * flow_lpm / 600
    )
    # Pump at 34.9 + 24 + what the way back takes, 24 · (q_B/60)² at most: 82.9 bar at most, 9 kW are saved.
    assert alone_kw - heat_kw > (173.0 - 83.0) * 60 / 600


def test_compensator_alone_moves_as_fast_as_the_line_lets_it(clay_mixer: Matter) -> None:
    # The pump holds 176 bar less its width; all that the load doesn't take falls over the two edges.
    moving = run(clay_mixer.circuit, {**SETTINGS["clay_mixer"], "PU1.load sensing": 1000.0}, DV1="mix")
    flow_lpm = moving.flows_lpm["PU1"]
    full_at_limit = DISPLACED_LPM - LEAK * 172.0
    assert moving.pressure_at("PU1.P") == pytest.approx(176.0 - 4.0 * flow_lpm / full_at_limit, abs=0.05)
    assert flow_lpm > 60.0


# Glaze press: a compensated pump and a cylinder


def test_press_deadheads_at_rest(glaze_press: Matter) -> None:
    solution = run(glaze_press.circuit, SETTINGS["glaze_press"])
    assert solution.pressure_at("PU1.P") == pytest.approx(193.0, abs=0.01)
    assert solution.moving == frozenset()


def press_load_bar(solution: Solution) -> tuple[float, float]:
    """Pressures that the press has at its cap and rod end, and those that its load asks for."""
    area = math.pi * 10.0**2 / 4
    ring = area - math.pi * 5.6**2 / 4
    if solution.speeds["CY1"] > 0:
        asked = 100_000 / 10 / 0.95 / area
        return solution.pressure_at("CY1.A") - solution.pressure_at("CY1.B") * ring / area, asked
    asked = 20_000 / 10 / 0.95 / ring
    return solution.pressure_at("CY1.B") - solution.pressure_at("CY1.A") * area / ring, asked


@pytest.mark.parametrize("position", ["press", "retract"])
def test_press_moves_with_the_whole_flow(glaze_press: Matter, position: str) -> None:
    # Load pressures stay far below the compensator: full stroke, V·n less the leakage at that pressure.
    solution = run(glaze_press.circuit, SETTINGS["glaze_press"], DV1=position)
    displaced = 45 * 1760 / 1000
    leak = 0.05 * displaced / glaze_press.machine.parts["PU1"].model_dump()["rating_bar"]
    has, asked = press_load_bar(solution)

    assert solution.moving == {"CY1"}
    assert has == pytest.approx(asked, abs=0.2)
    assert solution.flows_lpm["PU1"] == pytest.approx(
        displaced - leak * solution.pressure_at("PU1.P"), rel=1e-3
    )
    area = math.pi * 10.0**2 / 4
    side = area if position == "press" else area - math.pi * 5.6**2 / 4
    assert abs(solution.speeds["CY1"]) == pytest.approx(solution.flows_lpm["PU1"] / (6 * side), rel=1e-3)


def test_speeds_in_the_ratio_of_areas(glaze_press: Matter, kiln_pusher: Matter) -> None:
    for matter, name, bore, rod, out, back in (
        (glaze_press, "glaze_press", 100, 56, "press", "retract"),
        (kiln_pusher, "kiln_pusher", 80, 45, "push", "return"),
    ):
        extending = run(matter.circuit, SETTINGS[name], DV1=out)
        retracting = run(matter.circuit, SETTINGS[name], DV1=back)
        ratio = bore**2 / (bore**2 - rod**2)
        by_flow = retracting.flows_lpm["PU1"] / extending.flows_lpm["PU1"]  # a little leaks more under load

        assert by_flow == pytest.approx(1.0, abs=0.04)
        assert -retracting.speeds["CY1"] / extending.speeds["CY1"] == pytest.approx(ratio * by_flow, rel=1e-3)


@pytest.mark.parametrize("load_kn", [30, 60])
def test_pusher_speed_hardly_depends_on_the_load(changed: Changed, load_kn: int) -> None:
    described = changed("kiln_pusher", ("extending load: 60 kN", f"extending load: {load_kn} kN"))
    solution = run(described.circuit, SETTINGS["kiln_pusher"], DV1="push")
    displaced = 32 * 1450 / 1000
    area = math.pi * 8.0**2 / 4
    share = 1 - (4.5 / 8.0) ** 2

    asked = load_kn * 1000 / 10 / 0.95 / area
    has = solution.pressure_at("CY1.A") - share * solution.pressure_at("CY1.B")
    assert has == pytest.approx(asked, abs=0.2)
    flow = displaced - 0.07 * displaced / 250 * solution.pressure_at("PU1.P")
    assert solution.flows_lpm["PU1"] == pytest.approx(flow, rel=1e-3)
    assert solution.speeds["CY1"] == pytest.approx(flow / (6 * area), rel=1e-3)
    assert solution.flows_lpm["RV1"] == 0.0


def test_fixed_pump_turns_all_power_to_heat_at_its_relief(kiln_pusher: Matter) -> None:
    # Unloaded 2.7 bar · 46.4 L/min = 0.2 kW; over the relief 180.3 bar · 44.1 L/min = 13.2 kW.
    unloaded = run(kiln_pusher.circuit, SETTINGS["kiln_pusher"])
    shut = run(kiln_pusher.circuit, SETTINGS["kiln_pusher"], HV2="closed")
    heat_kw = [
        solution.pressure_at("PU1.P") * solution.flows_lpm["PU1"] / 600 for solution in (unloaded, shut)
    ]
    assert heat_kw[0] == pytest.approx(2.68 * 46.4 / 600, abs=0.01)
    assert heat_kw[1] == pytest.approx(180.26 * 44.06 / 600, abs=0.01)
    assert shut.flows_lpm["RV1"] == pytest.approx(shut.flows_lpm["PU1"], abs=1e-3)
