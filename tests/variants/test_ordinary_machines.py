"""Ordinary machines aren't refused: they pass or warn, and fail only for what is wrong with them."""

import math
from collections.abc import Callable
from dataclasses import replace

import pytest
from ordinary import COMPENSATED, LOAD_SENSING, MOBILE, TORQUE_LIMITED, Unit, fixed_text
from variant_bench import (
    amount,
    assert_good,
    edges,
    finding,
    hand_valve,
    moves,
    refusals,
    refused_adjuster,
    said,
    state,
    warnings,
)

from sheets.circuit.plant import MoveValve
from sheets.pages.compose.matter import Matter
from sheets.procedure.conditions import Condition
from sheets.procedure.steps import StepKind

Computed = Callable[[str], Matter]

BEND_BAR = 0.05


def relief_at_full_flow(unit: Unit, setting_bar: float) -> tuple[float, float, float]:
    """Reading in bar, flow in L/min, shaft power in kW: p = S·(0.95 + 0.05·(V·n − leak·p)/q_full)."""
    rise = setting_bar * 0.05 / unit.full_lpm
    reading_bar = (setting_bar * 0.95 + rise * unit.displaced_lpm) / (1 + rise * unit.leakage)
    flow_lpm = unit.displaced_lpm - unit.leakage * reading_bar
    return reading_bar, flow_lpm, reading_bar * flow_lpm / 600 / unit.overall_efficiency


def test_gear_pump_whose_relief_is_the_working_limit(computed: Computed) -> None:
    # 46.4 L/min less 0.013 L/min/bar · 180 bar leave 44.06 L/min: 180.3 · 44.06 / 528 = 15.0 kW of 17.25 kW.
    matter = computed(fixed_text())
    found = state(matter, "RV1")

    assert_good(matter)
    assert moves(found) == {("HV2", "closed")}
    assert found.flow_lpm == pytest.approx(46.4 - 0.07 * 46.4 / 250 * 180.3, abs=0.02)
    assert warnings(matter) == {
        ("gauge_accuracy", "RV1")
    }  # class 0.6 of 250 bar: 1.5 bar of a half window of 2


def test_gear_pump_with_a_motor_that_is_too_small(computed: Computed) -> None:
    # 15.05 kW are asked for; 11 · 1.15 = 12.65 kW are there.
    lost = refused_adjuster(computed(fixed_text(power="11 kW")), "RV1")
    assert lost.failure.condition is Condition.POWERED
    assert amount(lost, "asked") == pytest.approx(180.3 * 44.06 / 600 / 0.88, abs=0.05)
    assert amount(lost, "carries") == pytest.approx(12.65)


def test_compensated_pump_whose_motor_does_not_carry_the_relief(computed: Computed) -> None:
    # V·n = 102.95 L/min, q(235.2 bar) = 99.49: 235.2 · 99.49 / 600 / 0.88 = 44.3 kW of 37 · 1.15 = 42.55 kW.
    # At deadhead nothing flows: the compensator itself can be set.
    matter = computed(COMPENSATED.text())
    lost = refused_adjuster(matter, "RV1")
    _, _, shaft_kw = relief_at_full_flow(COMPENSATED, 235)

    assert shaft_kw == pytest.approx(44.3, abs=0.05)
    assert refusals(matter) == {("cannot_be_set", "RV1")}
    assert lost.failure.condition is Condition.POWERED
    assert amount(lost, "asked") == pytest.approx(shaft_kw, abs=0.02)
    assert amount(lost, "carries") == pytest.approx(37 * 1.15)
    assert "M1 would have to give 44.3 kW" in said(matter, "cannot_be_set", "RV1")
    assert moves(lost) == {("HV2", "closed")}
    assert state(matter, "PU1.compensator").reading_bar == pytest.approx(210.0, abs=0.01)


def test_motor_between_target_and_top_of_the_window_warns(computed: Computed) -> None:
    # 45 kW lie between 44.3 kW at the target and what the window's top, 239.7 bar, asks for: 45.2 kW.
    unit = replace(COMPENSATED, power="45 kW")
    matter = computed(unit.text())
    _, _, top_kw = relief_at_full_flow(unit, 1.02 * 235)

    assert_good(matter)
    assert top_kw == pytest.approx(45.16, abs=0.05)
    assert amount(finding(matter, "drive_over_at_top", "RV1"), "asked") == pytest.approx(top_kw, abs=0.05)


def test_displacement_stop_lets_the_small_motor_carry_it(computed: Computed) -> None:
    # 60 cm³ leave 87 − 3.5 = 83.5 L/min at 235 bar: 37.2 kW of 42.55 kW.
    matter = computed(replace(COMPENSATED, pump="    displacement stop: 60 cm3/rev\n").text())

    assert_good(matter)
    assert state(matter, "RV1").flow_lpm == pytest.approx(87 - COMPENSATED.leakage * 235.1, abs=0.05)
    assert edges(matter) == {("RV1", "PU1.compensator", "NEEDS_AWAY")}


@pytest.mark.parametrize("unit", [LOAD_SENSING, MOBILE], ids=lambda unit: unit.name)
def test_load_sensing_pump(computed: Computed, unit: Unit) -> None:
    # At the relief 100 cm³ ask for 280.2 · 140.9 / 528 = 74.8 of 75 kW, 76.2 at the window's top: a warning;
    # 75 cm³ for 270.2 · 158.6 / 528 = 81.2 of 85 kW.
    matter = computed(unit.text())
    reading_bar, flow_lpm, shaft_kw = relief_at_full_flow(unit, unit.relief_bar)
    _, _, top_kw = relief_at_full_flow(unit, 1.02 * unit.relief_bar)
    carries_kw = float(unit.power.split()[0])

    assert_good(matter)
    assert shaft_kw < carries_kw
    assert (("drive_over_at_top", "RV1") in warnings(matter)) == (top_kw > carries_kw)
    assert matter.procedure.order.sequence == ("RV1", "PU1.compensator", "PU1.load sensing")
    assert edges(matter) == {("RV1", "PU1.compensator", "NEEDS_AWAY")}
    assert state(matter, "RV1").reading_bar == pytest.approx(reading_bar, abs=BEND_BAR)
    assert state(matter, "RV1").flow_lpm == pytest.approx(flow_lpm, abs=0.05)
    assert state(matter, "PU1.load sensing").reading_bar == pytest.approx(24.0, abs=0.01)
    # Relief and compensator need the signal loaded: a working line shut and the lever held towards it.
    assert "DV1" in {valve for valve, _ in moves(state(matter, "RV1"))}


def test_oil_shut_in_behind_the_check_valve_leaves_the_ls_port_established(computed: Computed) -> None:
    """RV1 begins at 50 bar under a header that keeps the 250 bar of the reading before; CV1 is shut.

    The LS port stands above the outlet. Leaking away, it is fed over CV1 again 0.5 bar below the outlet, long
    before the 24 bar at which its control acts: the reading is RV1's all the way.
    """
    matter = computed(LOAD_SENSING.text())
    (stage,) = (stage for stage in matter.procedure.stages if stage.adjuster == "RV1")
    (held,) = (step for step in stage.steps if step.kind is StepKind.HOLD_VALVE)

    assert held.reading is not None
    assert held.reading.adjuster == "RV1"
    assert held.trace is not None
    assert held.trace.established
    for run in matter.replay.runs:
        assert run.violations == ()


def test_ls_port_that_nothing_feeds_again_stays_unestablished(computed: Computed) -> None:
    # The same unit with a shut valve in its LS line: leakage alone decides the port, until a state opens it.
    text = LOAD_SENSING.text().replace(
        "  load signal: [DV1.LS, PU1.X]\n", "  load signal: [DV1.LS, HV6.A]\n  pump signal: [HV6.B, PU1.X]\n"
    )
    text = text.replace("  FR1:", hand_valve("HV6", "LS line", flow="5 L/min", rest="closed") + "  FR1:")
    matter = computed(text)

    for adjuster in matter.procedure.order.sequence:
        reasons = dict(state(matter, adjuster).reasons)
        shut = reasons[MoveValve(valve="HV6", position="open")]
        assert shut.condition is Condition.ESTABLISHED
        assert shut.data["port"] == "PU1.X"


def test_torque_limited_pump_shows_setting_and_converted_reading(computed: Computed) -> None:
    # 158.2 N·m · 20π · 1.48 = 14,711 bar·L/min: corner 140 bar at 105 L/min. p = 310 · (0.95 + 0.05·q/99.83)
    # with q = 14,711/p − 0.01501·p: 301.4 bar at 44.3 L/min.
    unit = TORQUE_LIMITED
    matter = computed(unit.text())
    power = 20 * math.pi * 158.2 * unit.speed_rpm / 1000
    low, high = 200.0, 350.0
    for _ in range(60):
        p = (low + high) / 2
        reads = 310 * (0.95 + 0.05 * (power / p - unit.leakage * p) / unit.full_lpm)
        low, high = (p, high) if reads > p else (low, p)

    assert_good(matter)
    assert low == pytest.approx(301.38, abs=0.05)
    found = state(matter, "RV1")
    assert found.reading_bar == pytest.approx(low, abs=0.08)
    assert found.flow_lpm == pytest.approx(power / low - unit.leakage * low, abs=0.1)
    assert matter.targets.settings["RV1"].target_bar == 310.0
    assert found.gauge.target_bar == pytest.approx(low, abs=0.08)
