"""The load-sensing sample against a derivation by hand from its plate values.

Pump: V·n = 71 cm³ · 1475 /min = 104.725 L/min. η_v = 0.95 at its rating of 280 bar, so it leaks
0.05 · 104.725 / 280 = 0.018701 L/min for each bar, and gives 99.489 L/min at 280 bar.

RV1 can only be read with the compensator out of the way (at its stop, 230 bar; full stroke up to 226 bar) and
the line shut: a hand valve in a working line closed, the lever held so that the load signal sees the line.
Then all of the pump's flow passes RV1. RV1 reads S at its reference flow, the pump's full flow 99.489
L/min: p = 206 · (0.95 + 0.05 · q / 99.489), q = 104.725 − 0.018701 · p, so p = 206.14 bar and q = 100.87
L/min. Shaft power 206.14 · 100.87 / 600 / 0.88 = 39.4 kW, under the 45 kW of the drive.

In that state the compensator stands at its stop, away from its target: RV1 comes first. The compensator's own
state is the same without that change; its setting is the deadhead reading. Standby needs nothing to be read:
the lever's centre drains the load signal. But a spool that stuck shifted would turn the mixer: stuck in mix
with HV1 open, or in reverse with HV2 open. One shut valve isn't enough: stuck so that the open line is fed,
the pump goes to deadhead, the motor presses into its shut side and turns by what leaks there to its case. So
both are shut. No state of the load-sensing control moves another adjuster, nor does it shift a shut line: it
is tied with both.

Gauges: G1 has 0.25 % of 400 bar = 1 bar error on divisions of 2 bar, G2 0.2 bar on 0.1 bar. Lowest rating
in reach: 250 bar (lever valve, motor). Never exceed: 250 − 1 = 249, down to a division: 248 bar on G1;
249.8 bar on G2.
"""

import math

import pytest

from sheets.circuit.plant import Adjust, MoveValve
from sheets.circuit.verdict import Verdict
from sheets.errors import ExitStatus
from sheets.pages.compose.matter import Matter
from sheets.pipeline import status_of
from sheets.procedure import answers
from sheets.procedure.conditions import Condition
from sheets.procedure.steps import StageKind, StepKind

DISPLACED_LPM = 71 * 1475 / 1000
LEAK = 0.05 * DISPLACED_LPM / 280
FULL_LPM = 0.95 * DISPLACED_LPM
SHUT_AND_HELD = {MoveValve(valve="HV1", position="closed"), MoveValve(valve="DV1", position="mix")}
BOTH_SHUT = {MoveValve(valve=valve, position="closed") for valve in ("HV1", "HV2")}
COMPENSATOR_AWAY = Adjust(adjuster="PU1.compensator", setting_bar=230.0)


def relief_reading(setting_bar: float) -> float:
    """p = S·(κ + (1 − κ)·(V·n − leak·p)/q_ref), solved for p."""
    rise = setting_bar * 0.05 / FULL_LPM
    return (setting_bar * 0.95 + rise * DISPLACED_LPM) / (1 + rise * LEAK)


def state(matter: Matter, adjuster: str) -> answers.TestState:
    return matter.procedure.search.found()[adjuster]


def test_it_may_be_issued(clay_mixer: Matter) -> None:
    assert clay_mixer.procedure.verdict is Verdict.ESTABLISHED
    assert clay_mixer.targets.findings == ()
    assert clay_mixer.procedure.findings == ()
    assert status_of(clay_mixer.targets, clay_mixer.procedure) is ExitStatus.GOOD


def test_changes_that_each_setting_needs(clay_mixer: Matter) -> None:
    assert set(state(clay_mixer, "PU1.load sensing").changes) == BOTH_SHUT
    assert set(state(clay_mixer, "PU1.compensator").changes) == SHUT_AND_HELD
    assert set(state(clay_mixer, "RV1").changes) == SHUT_AND_HELD | {COMPENSATOR_AWAY}


def test_every_change_has_its_reason(clay_mixer: Matter) -> None:
    reasons = dict(state(clay_mixer, "RV1").reasons)

    # Without the valve the mixer turns; without the lever standby governs; without the third, deadhead does.
    assert reasons[MoveValve(valve="HV1", position="closed")].data["part"] == "HM1"
    assert reasons[MoveValve(valve="DV1", position="mix")].data["governs"] == "PU1.load sensing"
    assert reasons[COMPENSATOR_AWAY].data["governs"] == "PU1.compensator"


def creep_rpm() -> float:
    """Speed of the mixer with one working line shut, the other fed at deadhead.

    The motor's fed side stands at the pump's pressure, 176 bar less the width's share and the spool's edge.
    Its load takes 640 N·m / 0.9 · 20π / 400 cm³ = 111.7 bar; the rest stands at the shut side and leaks
    there: 0.06 · 99.489 L/min / 250 bar of it a minute, through 0.4 L a turn.
    """
    leak = 0.06 * FULL_LPM / 250
    load_bar = 640 / 0.9 * 20 * math.pi / 400
    fed_bar = shut_bar = 0.0
    for _ in range(50):
        flow_lpm = leak * (fed_bar + shut_bar)
        pump_bar = 176.0 - 4.0 * flow_lpm / (DISPLACED_LPM - LEAK * 172.0)
        fed_bar = pump_bar - 24.0 * (flow_lpm / 60) ** 2
        shut_bar = fed_bar - load_bar
    return leak * shut_bar / 0.4


def test_both_lines_are_shut_for_standby_against_a_stuck_spool(clay_mixer: Matter) -> None:
    assert creep_rpm() == pytest.approx(3.81, abs=0.01)
    reasons = dict(state(clay_mixer, "PU1.load sensing").reasons)
    assert set(reasons) == BOTH_SHUT
    for valve, position in (("HV1", "mix"), ("HV2", "reverse")):
        failure = reasons[MoveValve(valve=valve, position="closed")]
        assert failure.condition is Condition.BARRED
        told = {name: failure.data[name] for name in ("fault", "valve", "position", "part")}
        assert told == {"fault": "spool stuck", "valve": "DV1", "position": position, "part": "HM1"}
        speed = failure.data["speed"]
        assert not isinstance(speed, str)
        assert speed.value == pytest.approx(creep_rpm(), rel=1e-3)


def test_edges_and_ties(clay_mixer: Matter) -> None:
    order = clay_mixer.procedure.order
    edges = {(edge.before, edge.after) for edge in order.edges}

    assert ("RV1", "PU1.compensator") in edges
    assert not any("PU1.load sensing" in edge for edge in edges)
    tied = [tie for tie in order.ties if "PU1.load sensing" in tie]
    assert {other for tie in tied for other in tie} == {"RV1", "PU1.compensator", "PU1.load sensing"}
    assert order.sequence == ("RV1", "PU1.compensator", "PU1.load sensing")  # ties from the highest down


def test_readings_in_the_test_states(clay_mixer: Matter) -> None:
    assert state(clay_mixer, "PU1.compensator").reading_bar == pytest.approx(176.0, abs=0.01)
    assert state(clay_mixer, "PU1.load sensing").reading_bar == pytest.approx(27.0, abs=0.01)
    relief = state(clay_mixer, "RV1")
    assert relief_reading(206.0) == pytest.approx(206.143, abs=0.001)
    assert relief.reading_bar == pytest.approx(relief_reading(206.0), abs=0.02)
    assert relief.flow_lpm == pytest.approx(DISPLACED_LPM - LEAK * 206.143, abs=0.02)


def test_windows_and_never_exceed(clay_mixer: Matter) -> None:
    # Given ± 4 bar lies on divisions of 2 bar; RV1's window converts to 202.14 … 210.14 bar, which nobody can
    # read apart from 202 … 210. Standby ± 1 bar is given, too.
    expected = {
        "RV1": ("G1", 202.0, 210.0, 248.0, 4.0),
        "PU1.compensator": ("G1", 172.0, 180.0, 248.0, 4.0),
        "PU1.load sensing": ("G2", 26.0, 28.0, 249.8, 5.0),
    }
    for adjuster, (gauge, low, high, never, accuracy) in expected.items():
        choice = state(clay_mixer, adjuster).gauge
        assert choice.gauge == gauge
        assert (choice.window.low_bar, choice.window.high_bar) == pytest.approx((low, high))
        assert choice.never_exceed_bar == pytest.approx(never)
        assert choice.accuracy_ratio == pytest.approx(accuracy)


def test_relief_closes_again_over_the_compensator(clay_mixer: Matter) -> None:
    # ρ · bottom = 0.92 · 202 = 185.84 bar, top + gap = 180 + 5 = 185 bar: 0.84 bar are left.
    derivation = clay_mixer.targets.settings["RV1"].derivations[0]
    assert derivation.result.value == pytest.approx(185 / 0.92)
    assert clay_mixer.targets.settings["RV1"].low_bar > 185 / 0.92


def test_width_of_the_load_sensing_control(clay_mixer: Matter) -> None:
    # Standby 27 bar at no flow, 24 bar at 60 L/min: 3 bar for 60 L/min, so to full flow 3 · 99.489/60.
    site = next(site for site in clay_mixer.circuit.adjusters if site.id == "PU1.load sensing")
    assert site.width_bar == pytest.approx(3.0 * FULL_LPM / 60.0)


def test_shaft_power_at_the_relief(clay_mixer: Matter) -> None:
    stage = next(stage for stage in clay_mixer.procedure.stages if stage.adjuster == "RV1")
    come_up = next(step for step in stage.steps if step.kind is StepKind.COME_UP)
    assert come_up.trace is not None
    pressure_bar = relief_reading(206.0)
    power_kw = pressure_bar * (DISPLACED_LPM - LEAK * pressure_bar) / 600
    assert come_up.trace.relief_kw == pytest.approx(power_kw, rel=1e-3)
    assert come_up.trace.drive_kw == pytest.approx(power_kw / 0.88, rel=1e-3)
    assert come_up.trace.drive_kw < 45.0


def test_the_line_is_shut_before_the_first_start(clay_mixer: Matter) -> None:
    deadhead = next(stage for stage in clay_mixer.procedure.stages if stage.kind is StageKind.DEADHEAD)
    placed = {step.subject: step.data["position"] for step in deadhead.steps}
    assert placed["HV1"] == "closed"
    assert placed["HV3"] == "open"  # the suction valve
    assert placed["BV1"] == "closed"
    assert placed["DV1"] == "neutral"


def test_raised_compensator_is_said_to_hold_at_first(clay_mixer: Matter) -> None:
    # The compensator stands at its stop when its own turn comes: RV1 holds 206 bar until it is below.
    stage = next(stage for stage in clay_mixer.procedure.stages if stage.adjuster == "PU1.compensator")
    turn = next(step for step in stage.steps if step.kind is StepKind.TURN_BELOW)
    assert turn.data["held_by"] == "RV1"
