"""The fixed-pump sample against a derivation by hand from its plate values.

Pump: V·n = 32 cm³ · 1450 /min = 46.4 L/min; η_v = 0.93 at 250 bar: 43.152 L/min there, leak 0.012992
L/min/bar. The tandem centre lets it run unloaded: HV2, DV1 and the filter take 0.5·(q/80)² + 4·(q/60)² +
0.5·(q/100)² = 2.7 bar. Were HV2 shut before the start and RV1 stuck, nothing would limit the line below
46.4 / 0.012992 = 3571 bar. So the drive starts unloaded and HV2 is closed under the gauge.

RV1 with HV2 shut: p = 180 · (0.93 + 0.07 · q/43.152), q = 46.4 − 0.012992 · p, so p = 180.26 bar, q =
44.06 L/min; shaft power 180.26 · 44.06 / 600 / 0.88 = 15.0 kW, under 15 · 1.15 = 17.25 kW.

Window by policy: 2 % of 180 bar = 3.6 bar: settings 176.4 … 183.6, readings 176.7 … 183.9 bar; divisions
of 2 bar. Nobody reads a fifth of a division, 0.4 bar, so both ends stand as they were set, and inward they
are 178 … 182. Never exceed: 250 − 0.625, down to a division: 248 bar.
"""

import math

import pytest

from sheets.circuit.plant import MoveValve
from sheets.circuit.verdict import Verdict
from sheets.pages.compose.matter import Matter
from sheets.procedure.steps import Stage, StageKind, StepKind

DISPLACED_LPM = 32 * 1450 / 1000
LEAK = 0.07 * DISPLACED_LPM / 250
FULL_LPM = 0.93 * DISPLACED_LPM
SHUT = MoveValve(valve="HV2", position="closed")


def relief_reading(setting_bar: float) -> float:
    rise = setting_bar * 0.07 / FULL_LPM
    return (setting_bar * 0.93 + rise * DISPLACED_LPM) / (1 + rise * LEAK)


def stage_of(matter: Matter, kind: StageKind) -> Stage:
    return next(stage for stage in matter.procedure.stages if stage.kind is kind)


def test_it_may_be_issued(kiln_pusher: Matter) -> None:
    assert kiln_pusher.procedure.verdict is Verdict.ESTABLISHED
    assert kiln_pusher.targets.findings == ()
    assert kiln_pusher.procedure.findings == ()


def test_state_and_order(kiln_pusher: Matter) -> None:
    found = kiln_pusher.procedure.search.found()
    assert set(found) == {"RV1"}
    assert set(found["RV1"].changes) == {SHUT}
    assert kiln_pusher.procedure.order.edges == ()
    assert kiln_pusher.procedure.order.sequence == ("RV1",)


def test_reading_window_and_limits(kiln_pusher: Matter) -> None:
    found = kiln_pusher.procedure.search.found()["RV1"]

    assert relief_reading(180.0) == pytest.approx(180.264, abs=0.001)
    assert found.reading_bar == pytest.approx(relief_reading(180.0), abs=0.02)
    assert found.flow_lpm == pytest.approx(DISPLACED_LPM - LEAK * 180.264, abs=0.01)
    setting = kiln_pusher.targets.settings["RV1"]
    assert (setting.low_bar, setting.high_bar) == pytest.approx((176.4, 183.6))
    assert relief_reading(183.6) - 183.6 < 0.2 * 2.0
    assert (found.gauge.window.low_bar, found.gauge.window.high_bar) == (178.0, 182.0)
    assert found.gauge.never_exceed_bar == 248.0
    assert found.gauge.accuracy_ratio == pytest.approx(2.0 / 0.625)


def test_work_pressure_stays_below(kiln_pusher: Matter) -> None:
    # 60 kN at 95 % on 50.27 cm² (80 mm) is 125.7 bar at the cap end. The pump gives some 44.6 L/min then,
    # and the rod end 0.684 of it: HV2 and the valve's two edges and the filter take about 0.16 + 2.21 +
    # 1.03 · 0.684 bar.
    area_cm2 = math.pi * 8.0**2 / 4
    share = 1 - (4.5 / 8.0) ** 2
    flow_lpm = DISPLACED_LPM - LEAK * 129
    back_bar = (4 / 60**2 + 0.5 / 100**2) * (share * flow_lpm) ** 2
    work_bar = 60_000 / 10 / area_cm2 / 0.95 + share * back_bar + (0.5 / 80**2 + 4 / 60**2) * flow_lpm**2
    derivation = kiln_pusher.targets.settings["RV1"].derivations[0]
    demand = next(amount.value for name, amount, _ in derivation.inputs if name == "work pressure")

    assert demand == pytest.approx(work_bar, abs=0.2)
    assert derivation.result.value == pytest.approx(demand * 1.05 / 0.93)
    assert 1.05 * work_bar < 0.93 * 176.4


def test_valve_is_closed_after_an_unloaded_start(kiln_pusher: Matter) -> None:
    deadhead = stage_of(kiln_pusher, StageKind.DEADHEAD)
    assert not any(step.subject == "HV2" and step.data.get("position") == "closed" for step in deadhead.steps)

    steps = stage_of(kiln_pusher, StageKind.AS_FOUND).steps
    kinds = [step.kind for step in steps]
    start = steps[kinds.index(StepKind.START)]
    close = steps[kinds.index(StepKind.CLOSE_GRADUALLY)]
    assert kinds.index(StepKind.START) < kinds.index(StepKind.CLOSE_GRADUALLY) < kinds.index(StepKind.READ)
    assert close.subject == "HV2"
    assert start.trace is not None
    unloaded_bar = (0.5 / 80**2 + 4 / 60**2 + 0.5 / 100**2) * DISPLACED_LPM**2
    assert max(start.trace.pressures_bar) == pytest.approx(unloaded_bar, abs=0.05)
    assert close.reading is not None
    assert close.reading.stop_above_bar < 250.0


def test_valve_opens_again_before_every_stop(kiln_pusher: Matter) -> None:
    open_line = True
    for stage in kiln_pusher.procedure.stages:
        for step in stage.steps:
            if step.kind is StepKind.CLOSE_GRADUALLY:
                open_line = False
            elif step.kind is StepKind.OPEN_AGAIN:
                open_line = True
            elif step.kind in (StepKind.START, StepKind.PRESS_STOP):
                assert open_line, f"{step.kind} in {stage.kind} with the line shut"


def test_shaft_power(kiln_pusher: Matter) -> None:
    power_kw = relief_reading(180.0) * (DISPLACED_LPM - LEAK * 180.264) / 600 / 0.88
    highest_kw = max(
        step.trace.drive_kw
        for stage in kiln_pusher.procedure.stages
        for step in stage.steps
        if step.trace is not None
    )
    assert highest_kw == pytest.approx(power_kw, rel=1e-3)
    assert highest_kw < 15 * 1.15
