"""Changed copies of the samples: each is refused, and for the reason that was built into it."""

from collections.abc import Callable

import pytest

from sheets.amounts import Amount, Finding, Severity
from sheets.circuit.verdict import Verdict
from sheets.errors import ExitStatus
from sheets.pages.compose.matter import Matter
from sheets.pipeline import Described, status_of, targets
from sheets.procedure.answers import NotFound, NotInUse
from sheets.procedure.conditions import Condition
from sheets.targets.settings import Origin, Targets
from sheets.wording.findings import say_finding

Refused = Callable[..., Matter]

COMPENSATOR_GIVEN = (
    "      setting: 176 bar\n      given by: machine manual, sheet 4\n      tolerance: 4 bar\n"
)


def finding(matter: Matter | Targets, code: str) -> Finding:
    among = matter.findings if isinstance(matter, Targets) else all_findings(matter)
    found = [one for one in among if one.code == code]
    assert len(found) == 1, [one.code for one in among]
    return found[0]


@pytest.fixture
def settled(changed: Callable[..., Described]) -> Callable[..., Targets]:
    """The settings of a changed sample, without a search."""
    return lambda name, *replacements: targets(changed(name, *replacements))


def all_findings(matter: Matter) -> tuple[Finding, ...]:
    return (*matter.targets.findings, *matter.procedure.findings)


def amount(finding: Finding, name: str) -> float:
    value = finding.data[name]
    assert isinstance(value, Amount)
    return value.value


def not_found(matter: Matter, adjuster: str) -> NotFound:
    answer = matter.procedure.search.answers[adjuster]
    assert isinstance(answer, NotFound), answer
    assert answer.verdict is Verdict.REFUTED
    assert matter.procedure.verdict is Verdict.REFUTED
    assert matter.procedure.stages == ()
    assert status_of(matter.targets, matter.procedure) is ExitStatus.REFUSED
    return answer


def no_valve(valve: str, before: str, name: str = "") -> tuple[tuple[str, str], ...]:
    """A hand valve made an open throttle; ``before`` stands between its kind and its rest position."""
    head = f"  {valve}:\n    kind: hand valve\n{name}{before}"
    rest = "    rest: open\n    lockable: yes\n"
    return ((head + rest, head.replace("hand valve", "orifice")),)


def test_compensator_whose_range_ends_under_the_relief(refused: Refused) -> None:
    # RV1 opens at 0.95 · 206 = 195.7 bar. With its compensator at the end of its range the pump holds 190
    # bar.
    matter = refused(
        "clay_mixer",
        (
            "      highest: 230 bar\n      raises: clockwise\n      where: the upper",
            "      highest: 190 bar\n      raises: clockwise\n      where: the upper",
        ),
    )
    answer = not_found(matter, "RV1")

    assert answer.failure.condition is Condition.FOLLOWS
    assert answer.failure.data["governs"] == "PU1.compensator"
    refusal = finding(matter, "cannot_be_set")
    assert amount(refusal, "reading") == pytest.approx(190.0, abs=0.01)
    assert amount(refusal, "target") == 206.0
    what, fix = say_finding(matter.speaker, refusal)
    assert "compensator of PU1 holds 190 bar" in what
    assert "end of its range" in what
    assert "range" in fix


def test_relief_rated_below_its_setting(refused: Refused) -> None:
    matter = refused(
        "clay_mixer", ("    rating: 315 bar\n    acting: pilot", "    rating: 200 bar\n    acting: pilot")
    )
    refusal = finding(matter, "setting_over_rating")

    assert refusal.subject == "RV1"
    assert refusal.data["rated_part"] == "RV1"
    assert (amount(refusal, "top"), amount(refusal, "rating")) == (210.0, 200.0)
    assert not_found(matter, "RV1").failure.condition is Condition.WITHIN


def test_relief_smaller_than_the_pump(settled: Callable[..., Targets]) -> None:
    found = settled("clay_mixer", ("rated flow: 200 L/min", "rated flow: 90 L/min"))
    refusal = finding(found, "relief_too_small")

    assert refusal.subject == "RV1"
    assert refusal.severity is Severity.REFUSED
    assert amount(refusal, "reaching") == pytest.approx(71 * 1475 / 1000 * 0.95)
    assert status_of(found) is ExitStatus.REFUSED


def test_motor_too_small(refused: Refused) -> None:
    matter = refused("clay_mixer", ("power: 45 kW", "power: 38 kW"))
    answer = not_found(matter, "RV1")

    assert answer.failure.condition is Condition.POWERED
    refusal = finding(matter, "cannot_be_set")
    assert refusal.data["drive"] == "M1"
    assert amount(refusal, "asked") == pytest.approx(206.143 * 100.87 / 600 / 0.88, rel=1e-3)  # 39.4 kW
    assert amount(refusal, "carries") == 38.0


def test_motor_that_is_just_large_enough_is_not_refused(refused: Refused) -> None:
    # 39.4 kW at the target; at the window's top 210.14 bar · 100.79 / 600 / 0.88 = 40.1 kW: a warning only.
    matter = refused("clay_mixer", ("power: 45 kW", "power: 40 kW"))
    warning = finding(matter, "drive_over_at_top")

    assert warning.severity is Severity.WARNING
    assert amount(warning, "asked") == pytest.approx(40.1, abs=0.05)
    assert matter.procedure.verdict is Verdict.ESTABLISHED


def test_gauge_too_coarse(refused: Refused) -> None:
    # Twice the half width of 3.6 bar around 180.3 bar: 173 … 187.5 holds one division of 10 bar, three of
    # 5 bar.
    matter = refused("kiln_pusher", ("graduation: 2 bar", "graduation: 10 bar"))
    answer = not_found(matter, "RV1")

    assert answer.failure.condition is Condition.SEEN
    assert amount(finding(matter, "cannot_be_set"), "graduation") == 10.0


def test_coarse_gauge_widens_a_policy_window_to_three_divisions(refused: Refused) -> None:
    matter = refused("kiln_pusher", ("graduation: 2 bar", "graduation: 5 bar"))
    window = matter.procedure.search.found()["RV1"].gauge.window
    assert (window.low_bar, window.high_bar) == (175.0, 185.0)
    assert matter.procedure.verdict is Verdict.ESTABLISHED


def test_gauge_with_an_error_wider_than_the_window(refused: Refused) -> None:
    # Class 1.6 of 250 bar is 4 bar; half of the window 178 … 182 is 2 bar.
    matter = refused("kiln_pusher", ("accuracy class: 0.25", "accuracy class: 1.6"))
    assert not_found(matter, "RV1").failure.condition is Condition.SEEN
    assert amount(finding(matter, "cannot_be_set"), "accuracy_ratio") == pytest.approx(2 / 4)


def test_gauge_under_three_to_one_warns(refused: Refused) -> None:
    # Class 0.4 of 250 bar is 1 bar: 2 / 1 = 2 to 1.
    matter = refused("kiln_pusher", ("accuracy class: 0.25", "accuracy class: 0.4"))
    warning = finding(matter, "gauge_accuracy")
    assert warning.severity is Severity.WARNING
    assert amount(warning, "accuracy_ratio") == pytest.approx(2.0)


def test_gauge_that_the_screw_at_its_stop_over_ranges(refused: Refused) -> None:
    # RV1 at its stop, 210 bar, reads 210.2 bar; the gauge carries 205 bar.
    matter = refused(
        "kiln_pusher", ("range: 250 bar\n    rating: 300 bar", "range: 205 bar\n    rating: 205 bar")
    )
    assert not_found(matter, "RV1").failure.condition is Condition.SEEN
    refusal = finding(matter, "cannot_be_set")
    assert amount(refusal, "over") == pytest.approx(210.2, abs=0.2)
    assert amount(refusal, "most") == 205.0


def test_screw_that_passes_a_rating_at_its_stop(refused: Refused) -> None:
    # Turned in to its stop RV1 holds 260 bar, over the 250 bar of pump and hose; nothing else limits them.
    matter = refused(
        "kiln_pusher",
        (
            "      highest: 210 bar                 # ends below the lowest rating, 250 bar\n",
            "      highest: 260 bar\n",
        ),
    )
    answer = not_found(matter, "RV1")
    assert answer.failure.condition is Condition.WITHIN
    assert amount(finding(matter, "cannot_be_set"), "rating") == 250.0


def test_another_device_that_limits_the_screw_at_its_stop(refused: Refused) -> None:
    # The compensator alone would pass 250 bar at its stop of 260 bar; RV1, set before it, holds 206 bar.
    matter = refused(
        "clay_mixer",
        (
            "      highest: 230 bar\n      raises: clockwise\n      where: the upper",
            "      highest: 260 bar\n      raises: clockwise\n      where: the upper",
        ),
    )
    assert matter.procedure.verdict is Verdict.ESTABLISHED
    place = matter.procedure.order.sequence.index
    assert place("RV1") < place("PU1.compensator")


def test_no_gauge_on_the_line(refused: Refused) -> None:
    matter = refused("kiln_pusher", ("fitted at: [TP1]", "fitted at: [TP2]"))
    answer = not_found(matter, "RV1")

    assert answer.failure.condition is Condition.SEEN
    refusal = finding(matter, "cannot_be_set")
    assert refusal.data["line"] == "pump line"
    assert "no gauge" in say_finding(matter.speaker, refusal)[0]


def test_no_hand_valve_in_the_working_lines(refused: Refused) -> None:
    # Nothing holds the mixer still while the lever is held: it would turn.
    replacements = [
        replacement
        for valve, number, line in (("HV1", "2", "line A"), ("HV2", "3", "line B"))
        for replacement in no_valve(
            valve,
            f"    designation: 1-H3.{number}\n"
            f"    where: {line}, at the operator's platform\n"
            "    rating: 315 bar\n",
        )
    ]
    matter = refused("clay_mixer", *replacements)

    for adjuster in ("RV1", "PU1.compensator"):
        answer = not_found(matter, adjuster)
        assert answer.failure.condition is Condition.STILL
        assert answer.failure.data["part"] == "HM1"
    refusal = next(one for one in all_findings(matter) if one.code == "cannot_be_set")
    what, fix = say_finding(matter.speaker, refusal)
    assert "HM1 moves" in what
    assert "hand valve" in fix


def test_no_hand_valve_after_a_fixed_pump(refused: Refused) -> None:
    before = (
        "    designation: 1-H1.4\n"
        "    where: after the pump manifold, beyond RV1 and TP1\n"
        "    rating: 315 bar\n"
    )
    matter = refused("kiln_pusher", *no_valve("HV2", before, "    name: pressure line valve\n"))
    answer = not_found(matter, "RV1")
    assert answer.failure.condition is Condition.STILL
    assert answer.failure.data["part"] == "CY1"


def test_what_a_search_cannot_reach_is_never_called_not_in_use(refused: Refused) -> None:
    # A relief that protects is in use, also where the compensator keeps every setting state under it.
    matter = refused(
        "clay_mixer",
        (
            "      highest: 230 bar\n      raises: clockwise\n      where: the upper",
            "      highest: 190 bar\n      raises: clockwise\n      where: the upper",
        ),
    )
    assert not any(isinstance(answer, NotInUse) for answer in matter.procedure.search.answers.values())


def test_compensator_under_the_work_pressure(settled: Callable[..., Targets]) -> None:
    found = settled("clay_mixer", ("      setting: 176 bar\n", "      setting: 120 bar\n"))
    refusal = finding(found, "limit_under_work")

    assert refusal.severity is Severity.REFUSED
    assert refusal.subject == "PU1.compensator"
    assert amount(refusal, "bottom") == 116.0
    assert amount(refusal, "demand") == pytest.approx(mixer_demand_bar(), abs=0.3)
    assert status_of(found) is ExitStatus.REFUSED


def test_compensator_close_to_the_work_pressure_warns(settled: Callable[..., Targets]) -> None:
    # 165 − 4 = 161 bar carries the work (157 bar), but not with the reserve of 5 % (165 bar).
    found = settled("clay_mixer", ("      setting: 176 bar\n", "      setting: 165 bar\n"))
    warning = finding(found, "limit_close_to_work")
    assert warning.severity is Severity.WARNING
    assert amount(warning, "needed") == pytest.approx(mixer_demand_bar() * 1.05, abs=0.3)


def mixer_demand_bar() -> float:
    """Pump pressure while the mixer turns under its load.

    Standby 27 bar, 24 bar at 60 L/min: the lever's edge, 60 L/min at 24 bar, passes just 60 L/min. The
    motor asks for 640 N·m / 0.9 · 2π / 400 cm³ = 111.7 bar. Half of its leakage, 0.06 · 99.489 L/min over
    250 bar a side, leaves at A; what leaves at A doesn't come back over the second edge.
    """
    motor_bar = 640 / 0.9 * 20 * 3.141592653589793 / 400
    leak = 0.06 * 71 * 1475 / 1000 * 0.95 / 250
    back_bar, flow_lpm = 0.0, 60.0
    for _ in range(30):
        side_a = motor_bar + back_bar
        through = flow_lpm - leak * side_a  # turns the motor
        at_b = through - leak * back_bar
        back_bar = (24 / 60**2 + 0.5 / 150**2 + 0.5 / 160**2) * at_b**2
    return 24.0 + (0.5 / 150**2) * flow_lpm**2 + motor_bar + back_bar


def test_relief_under_the_compensator(settled: Callable[..., Targets]) -> None:
    # The compensator's window reaches 180 bar.
    found = settled("clay_mixer", ("      setting: 206 bar\n", "      setting: 178 bar\n"))
    refusal = finding(found, "relief_under_compensator")

    assert refusal.severity is Severity.REFUSED
    assert amount(refusal, "other_top") == 180.0
    assert status_of(found) is ExitStatus.REFUSED


def test_relief_that_opens_at_deadhead(settled: Callable[..., Targets]) -> None:
    # 0.95 · 185 = 175.75 bar is under 176 bar, and the opening ratio stands on the plate: refused.
    found = settled("clay_mixer", ("      setting: 206 bar\n", "      setting: 185 bar\n"))
    refusal = finding(found, "relief_passes_at_deadhead")
    assert refusal.severity is Severity.REFUSED
    assert amount(refusal, "opens") == pytest.approx(0.95 * 185)


def test_relief_that_may_stay_open_warns(settled: Callable[..., Targets]) -> None:
    # 0.92 · (200 − 4) = 180.3 bar; 185 bar are needed.
    found = settled("clay_mixer", ("      setting: 206 bar\n", "      setting: 200 bar\n"))
    warning = finding(found, "relief_may_stay_open")
    assert warning.severity is Severity.WARNING
    assert amount(warning, "needed") == pytest.approx(185 / 0.92)


def test_compensator_whose_value_is_not_given_is_computed(refused: Refused) -> None:
    matter = refused("clay_mixer", (COMPENSATOR_GIVEN, ""))
    setting = matter.targets.settings["PU1.compensator"]
    state = matter.procedure.search.found()["PU1.compensator"]
    needed_bar = mixer_demand_bar() * 1.05

    assert setting.origin is Origin.COMPUTED
    # The whole window carries the work: its half is the larger of 2 % and 3 bar.
    assert setting.low_bar == pytest.approx(needed_bar, abs=0.3)
    assert setting.target_bar == pytest.approx(max(needed_bar / 0.98, needed_bar + 3), abs=0.3)
    # On divisions of 2 bar, inward, 165.0 … 171.7 would be 166 … 170 at most: 2 to 1 with G1's error of 1
    # bar. G2 reads steps of 0.1 bar.
    assert state.gauge.gauge == "G2"
    assert state.gauge.window.low_bar >= setting.low_bar - 0.2 * 0.1
    assert state.gauge.window.high_bar <= setting.high_bar + 0.2 * 0.1
    steps_up = state.gauge.target_bar / 0.1
    assert steps_up == pytest.approx(round(steps_up), abs=1e-6)  # rounded up to a step
    assert 0.0 <= state.gauge.target_bar - setting.target_bar + 1e-6 < 0.1


def test_value_that_nothing_gives_or_computes(refused: Refused) -> None:
    matter = refused(
        "clay_mixer",
        (
            "      setting: 27 bar                  # standby: LS at tank, no flow\n"
            "      given by: machine manual, sheet 4\n",
            "",
        ),
        ("      differential: 24 bar\n      differential flow: 60 L/min\n", ""),
    )
    refusal = finding(matter, "value_not_given")
    assert refusal.subject == "PU1.load sensing"
    assert status_of(matter.targets, matter.procedure) is ExitStatus.REFUSED
