"""Hazards stand before the steps that bring them, with figures worked out by hand."""

from collections.abc import Callable

import pytest

from sheets.amounts import Amount, Severity
from sheets.circuit.verdict import Verdict
from sheets.hazards.assess import Hazard, HazardKind
from sheets.pages.compose.matter import Matter
from sheets.procedure.steps import StageKind, StepKind

HIGHEST_BAR = {"PU-07": 230.0, "PU-12": 3800 * 0.0689476, "PU-03": 210.2}
"""Whoever turned a screw last may have left it at its end: there the lowest of what limits the line lets no
more come. A relief takes 0.2 bar from closed to full flow at the least."""


def by_kind(matter: Matter, kind: HazardKind) -> dict[tuple[int, int], Hazard]:
    return {
        place: hazard
        for place, hazards in matter.hazards.items()
        for hazard in hazards
        if hazard.kind is kind
    }


def value(hazard: Hazard, name: str) -> float:
    amount = hazard.data[name]
    assert isinstance(amount, Amount)
    return amount.value


def test_each_kind_once_a_stage_and_before_a_step_that_is_there(any_sample: Matter) -> None:
    for number, stage in enumerate(any_sample.procedure.stages):
        kinds = [
            hazard.kind
            for (at, _), hazards in any_sample.hazards.items()
            if at == number
            for hazard in hazards
        ]
        assert len(kinds) == len(set(kinds))
        assert all(place < len(stage.steps) for at, place in any_sample.hazards if at == number)


def test_electricity_before_the_first_test_of_a_dangerous_voltage(any_sample: Matter) -> None:
    for number, stage in enumerate(any_sample.procedure.stages):
        if stage.kind not in (StageKind.ISOLATE, StageKind.LOCK_AGAIN):
            continue
        tests = [
            place
            for place, step in enumerate(stage.steps)
            if step.kind is StepKind.VERIFY_DEAD and any_sample.machine.energy[step.subject].voltage_v > 60
        ]
        found = {
            place: hazard
            for (at, place), hazard in by_kind(any_sample, HazardKind.ELECTRICITY).items()
            if at == number
        }
        assert set(found) == {min(tests)}
        assert all(hazard.signal == "DANGER" for hazard in found.values())


def test_start_warns_of_everything_that_can_move(any_sample: Matter) -> None:
    starts = [
        (number, place)
        for number, stage in enumerate(any_sample.procedure.stages)
        for place, step in enumerate(stage.steps)
        if step.kind is StepKind.START
    ]
    warned = by_kind(any_sample, HazardKind.START)
    assert set(warned) == set(starts)
    for hazard in warned.values():
        for actuator in any_sample.circuit.actuators.ids:
            assert actuator in str(hazard.data["moves"])


def test_relieving_is_warned_of_before_the_first_vent(any_sample: Matter) -> None:
    warned = by_kind(any_sample, HazardKind.RELIEVING) | by_kind(any_sample, HazardKind.SETTLING)
    kinds = (StageKind.ISOLATE, StageKind.LOCK_AGAIN)
    assert {any_sample.procedure.stages[at].kind for at, _ in warned} == set(kinds)
    for (at, place), hazard in warned.items():
        step = any_sample.procedure.stages[at].steps[place]
        assert step.kind in (StepKind.OPEN_VENT, StepKind.WORK_LEVER)
        assert (step.kind is StepKind.WORK_LEVER) == (hazard.kind is HazardKind.SETTLING)
        assert value(hazard, "pressure") == pytest.approx(HIGHEST_BAR[any_sample.machine.tag], abs=0.01)


def test_injection_wherever_a_powered_stage_holds_pressure(any_sample: Matter) -> None:
    warned = dict(by_kind(any_sample, HazardKind.INJECTION).keys())
    for number, stage in enumerate(any_sample.procedure.stages):
        pressed = stage.powered and any(
            step.trace is not None
            and max(step.trace.pressures_bar) >= 7.0
            and step.kind in (StepKind.HOLD_VALVE, StepKind.CLOSE_GRADUALLY, StepKind.COME_UP)
            for step in stage.steps
        )
        if pressed:
            assert number in warned, stage.kind
            first = next(
                place
                for place, step in enumerate(stage.steps)
                if step.kind in (StepKind.HOLD_VALVE, StepKind.CLOSE_GRADUALLY, StepKind.COME_UP)
            )
            assert warned[number] <= first
        if not stage.powered:
            assert number not in warned


def test_hot_oil_where_a_relief_turns_power_to_heat(clay_mixer: Matter) -> None:
    # RV1: 206.14 bar · 100.87 L/min / 600 = 34.66 kW, over the pump's 0.88 all that the drive gives: 39.4 kW.
    # In 250 L: 39.4 / (250 · 0.87 · 1.88) = 0.0963 K/s; from 55 to 65 °C that is 104 s, so the policy's 60 s
    # hold. Standby passes nothing: no warning there.
    warned = {
        clay_mixer.procedure.stages[at].adjuster: hazard
        for (at, _), hazard in by_kind(clay_mixer, HazardKind.HOT_OIL).items()
    }
    assert value(warned["RV1"], "power") == pytest.approx(206.14 * 100.87 / 600 / 0.88, rel=1e-3)
    assert value(warned["RV1"], "rise") == pytest.approx(0.0963, abs=2e-4)
    assert value(warned["RV1"], "seconds") == 60.0
    assert value(warned["RV1"], "limit") == 65.0
    assert "PU1.load sensing" not in warned


def test_little_oil_shortens_a_try(refused: Callable[..., Matter]) -> None:
    # 180 bar · 43.2 L/min / 600 / 0.865 = 15 kW. 20 L take up 32.7 kJ/K, so 10 K last 21.8 s: 20 s.
    little = refused("kiln_pusher", ("    volume: 120 L", "    volume: 20 L"))
    warned = by_kind(little, HazardKind.HOT_OIL)
    assert warned
    assert {value(hazard, "seconds") for hazard in warned.values()} == {20.0}
    assert all(finding.code != "oil_heats_too_fast" for finding in little.procedure.findings)
    (at, place), _ = next(iter(warned.items()))
    said = little.spoken(little.procedure.stages[at])[place].warnings
    assert any("After 20 s take the pressure off" in line for one in said for line in one.lines)


@pytest.mark.parametrize(
    ("change", "seconds"),
    [
        # 8 L take up 13.1 kJ/K: 10 K in 8.7 s.
        (("    volume: 120 L", "    volume: 8 L"), 8.0),
        # 196 kJ/K, but no room between the window and the limit.
        (("  limit temperature: 65 °C", "  limit temperature: 55 °C"), 0.0),
    ],
)
def test_too_little_time_for_a_try_is_refused_with_its_figures(
    refused: Callable[..., Matter], change: tuple[str, str], seconds: float
) -> None:
    matter = refused("kiln_pusher", change)
    assert matter.procedure.verdict is Verdict.REFUTED
    (found,) = (one for one in matter.procedure.findings if one.code == "oil_heats_too_fast")
    assert found.severity is Severity.REFUSED
    assert found.subject == "TK1"
    assert found.data["seconds"] == Amount(value=seconds, quantity="time_s")
    assert found.data["least"] == Amount(value=10.0, quantity="time_s")


def test_movement_where_only_a_valve_keeps_it_still(clay_mixer: Matter) -> None:
    # With HV1 open, 60 L/min less 0.0239 L/min/bar · 133 bar of leakage turn 0.4 L: 142 rev/min.
    warned = by_kind(clay_mixer, HazardKind.MOVEMENT)
    stages = {clay_mixer.procedure.stages[at].kind for at, _ in warned}

    assert stages == {StageKind.AS_FOUND, StageKind.SET, StageKind.CHECK}
    leak = 0.06 * 0.95 * 71 * 1475 / 1000 / 250
    for (at, place), hazard in warned.items():
        step = clay_mixer.procedure.stages[at].steps[place]
        assert (step.kind, step.subject) == (StepKind.HOLD_VALVE, "DV1")
        assert "HM1" in str(hazard.data["moves"])
        assert (hazard.data["valve"], hazard.data["position"]) == ("HV1", "closed")
        assert value(hazard, "speed") == pytest.approx((60 - leak * 133) / 0.4, rel=0.01)


def test_blocked_centre_asks_for_no_warning_of_movement(glaze_press: Matter) -> None:
    # No valve is shifted in any of its steps.
    assert by_kind(glaze_press, HazardKind.MOVEMENT) == {}
