"""The compensated sample, worked in psi, against a derivation by hand from its plate values.

Pump: V·n = 45 cm³ · 1760 /min = 79.2 L/min. η_v = 0.95 at 4600 psi, so it gives 75.24 L/min there and leaks
3.96 L/min / 4600 psi for each psi. The valve's centre blocks all ports: the line is shut at rest, so the
compensator reads its setting as soon as the drive runs, and RV1 once the compensator is at its stop (3800
psi). A spool that sticks shifted would send the cylinder out at the pump's whole flow, 77 L/min / (6 · 78.5
cm²) = 0.164 m/s, so HV1 is shut before the start: then nothing past it can move.

RV1 there: p = 3300 · (0.95 + 0.05 · q/75.24), q = 79.2 − 3.96 · p/4600, so p = 3302.4 psi, q = 76.36 L/min;
shaft power 227.7 bar · 76.36 / 600 / 0.88 = 32.9 kW, under 40 hp · 1.15 = 34.3 kW.

The LS port is fed from the outlet inside the pump: that control sees the same pressure on both of its sides
and never asks for anything, whatever the screw.

G1: 0.25 % of 5000 psi = 12.5 psi on divisions of 20 psi. With HV1 shut the hose is out of reach, but in
service the pressure that is set comes to hose and cylinder, 4000 psi each. Never exceed: 3987.5, down to a
division: 3980 psi. Accuracy ratio 60 / 12.5 = 4.8.
"""

import math

import pytest

from sheets.circuit.plant import Adjust, MoveValve
from sheets.circuit.verdict import Verdict
from sheets.pages.compose.matter import Matter
from sheets.procedure.answers import NotInUse
from sheets.procedure.conditions import Condition
from sheets.wording.findings import say_not_in_use

PSI = 0.45359237 * 9.80665 / 0.0254**2 / 1e5  # one pound force on one square inch, in bar
DISPLACED_LPM = 45 * 1760 / 1000
FULL_LPM = 0.95 * DISPLACED_LPM
LEAK_PER_PSI = 0.05 * DISPLACED_LPM / 4600
SHUT = MoveValve(valve="HV1", position="closed")


def test_it_may_be_issued(glaze_press: Matter) -> None:
    assert glaze_press.procedure.verdict is Verdict.ESTABLISHED
    assert glaze_press.targets.refusals == ()
    assert glaze_press.procedure.findings == ()


def test_changes_that_each_setting_needs(glaze_press: Matter) -> None:
    found = glaze_press.procedure.search.found()

    assert set(found) == {"PU1.compensator", "RV1"}
    assert found["PU1.compensator"].changes == (SHUT,)
    shut, change = found["RV1"].changes
    assert shut == SHUT
    assert isinstance(change, Adjust)
    assert change.adjuster == "PU1.compensator"
    assert change.setting_bar == pytest.approx(3800 * PSI)


@pytest.mark.parametrize("adjuster", ["PU1.compensator", "RV1"])
def test_the_line_is_shut_against_a_stuck_spool(glaze_press: Matter, adjuster: str) -> None:
    # The cylinder goes out, with 100 kN · 10 / 0.95 / 78.54 cm² = 134 bar, or back: out is tried first.
    failure = dict(glaze_press.procedure.search.found()[adjuster].reasons)[SHUT]

    assert failure.condition is Condition.BARRED
    told = {name: failure.data[name] for name in ("fault", "valve", "position", "part")}
    assert told == {"fault": "spool stuck", "valve": "DV1", "position": "press", "part": "CY1"}
    speed = failure.data["speed"]
    assert not isinstance(speed, str)
    # The valve's edge takes 20 gal/min at 75 psi, so its two edges take some 6 bar: the pump stands near 140.
    flow_lpm = DISPLACED_LPM - LEAK_PER_PSI * 142 / PSI
    assert speed.value == pytest.approx(flow_lpm / (6 * math.pi * 10**2 / 4), rel=2e-3)


def test_edge_and_sequence(glaze_press: Matter) -> None:
    order = glaze_press.procedure.order
    assert {(edge.before, edge.after) for edge in order.edges} == {("RV1", "PU1.compensator")}
    assert order.ties == ()
    assert order.sequence == ("RV1", "PU1.compensator")


def test_a_fed_load_sensing_control_is_not_in_use(glaze_press: Matter) -> None:
    answer = glaze_press.procedure.search.answers["PU1.load sensing"]
    assert isinstance(answer, NotInUse)
    assert answer.by_law

    (sentence,) = say_not_in_use(glaze_press.speaker, glaze_press.procedure)
    assert "PU1" in sentence
    assert "isn't in use" in sentence
    assert "both sides" in sentence
    # No step, and no refusal, is about it.
    subjects = {step.subject for stage in glaze_press.procedure.stages for step in stage.steps}
    assert "PU1.load sensing" not in subjects
    findings = (*glaze_press.targets.findings, *glaze_press.procedure.findings)
    assert "PU1.load sensing" not in {finding.subject for finding in findings}


def test_readings_in_psi(glaze_press: Matter) -> None:
    found = glaze_press.procedure.search.found()
    rise = 3300 * 0.05 / FULL_LPM
    relief_psi = (3300 * 0.95 + rise * DISPLACED_LPM) / (1 + rise * LEAK_PER_PSI)

    assert relief_psi == pytest.approx(3302.4, abs=0.1)
    assert found["RV1"].reading_bar / PSI == pytest.approx(relief_psi, abs=0.3)
    assert found["RV1"].flow_lpm == pytest.approx(DISPLACED_LPM - LEAK_PER_PSI * relief_psi, abs=0.02)
    assert found["PU1.compensator"].reading_bar / PSI == pytest.approx(2800, abs=0.1)


def test_windows_stand_on_divisions_in_psi(glaze_press: Matter) -> None:
    expected = {"RV1": (3240, 3360), "PU1.compensator": (2740, 2860)}
    for adjuster, window in expected.items():
        choice = glaze_press.procedure.search.found()[adjuster].gauge
        shown = (choice.window.low_bar / PSI, choice.window.high_bar / PSI)
        assert shown == pytest.approx(window, abs=1e-6)
        assert choice.never_exceed_bar / PSI == pytest.approx(3980, abs=1e-6)
        assert choice.accuracy_ratio == pytest.approx(60 / 12.5)


def test_relief_closes_again_over_the_compensator(glaze_press: Matter) -> None:
    # 0.92 · 3240 = 2980.8 psi; the compensator's top 2860 psi and 5 bar (72.5 psi) ask for 2932.5 psi.
    assert 2860 + 5 / PSI < 0.92 * 3240
    needed = glaze_press.targets.settings["RV1"].derivations[0].result.value
    assert needed / PSI == pytest.approx((2860 + 5 / PSI) / 0.92)


def test_shaft_power_at_the_relief(glaze_press: Matter) -> None:
    stage = next(stage for stage in glaze_press.procedure.stages if stage.adjuster == "RV1")
    highest_kw = max(step.trace.drive_kw for step in stage.steps if step.trace is not None)
    horsepower_kw = 550 * 0.3048 * 0.45359237 * 9.80665 / 1000  # 550 ft·lbf/s
    assert highest_kw == pytest.approx(3302.4 * PSI * 76.357 / 600 / 0.88, rel=1e-3)
    assert highest_kw < 40 * horsepower_kw * 1.15
