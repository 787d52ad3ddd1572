"""Single faults ask for barriers; limits just ahead, sealed ports and flows of makers decide states too.

Mixer: V·n = 104.725 L/min, 99.489 L/min at full flow. Press: valve's centre shuts all ports.
"""

import math
from collections.abc import Callable

import pytest

from sheets.amounts import Amount
from sheets.circuit.plant import Adjust, MoveValve
from sheets.circuit.verdict import Verdict
from sheets.errors import InputError
from sheets.pages.compose.matter import Matter
from sheets.pipeline import Described, steps, why_text
from sheets.procedure import answers, stages
from sheets.procedure.answers import NotFound, NotInUse
from sheets.procedure.case import Case
from sheets.procedure.changes import ADJUSTER_COST, HAND_VALVE_COST, OPENED_COST, possible_options
from sheets.procedure.conditions import Condition
from sheets.procedure.job import prepare
from sheets.procedure.rig import Rig
from sheets.procedure.steps import StageKind, StepKind
from sheets.procedure.task import Task

Changed = Callable[..., Described]
FULL_LPM = 0.95 * 71 * 1475 / 1000


def shut(*valves: str) -> set[MoveValve]:
    return {MoveValve(valve=valve, position="closed") for valve in valves}


def found(matter: Matter, adjuster: str) -> answers.TestState:
    answer = matter.procedure.search.answers[adjuster]
    assert isinstance(answer, answers.TestState), answer
    return answer


def lost(matter: Matter, adjuster: str) -> NotFound:
    answer = matter.procedure.search.answers[adjuster]
    assert isinstance(answer, NotFound), answer
    return answer


def value(data: Amount | str) -> float:
    assert isinstance(data, Amount)
    return data.value


# Barriers

PRESS_VALVE = (
    "  HV1:\n    kind: hand valve\n    name: pressure line valve\n    designation: 1-H1.4\n"
    "    where: after the pump manifold\n    rating: 5000 psi\n    rest: open\n    lockable: yes\n",
    "  HV1:\n    kind: orifice\n    name: pressure line valve\n    designation: 1-H1.4\n"
    "    where: after the pump manifold\n    rating: 5000 psi\n",
)


def port_valve(valve: str, number: int, line: str) -> tuple[str, str]:
    head = (
        f"    designation: 1-H2.{number}\n    where: line {line}, at the valve stand\n    rating: 5000 psi\n"
    )
    return (
        f"  {valve}:\n    kind: hand valve\n{head}    rest: open\n    lockable: yes\n",
        f"  {valve}:\n    kind: orifice\n{head}",
    )


def test_without_the_line_valve_the_cap_end_is_shut(changed: Changed) -> None:
    # Stuck in 'press' the spool feeds A, which is shut. Stuck in 'retract' it feeds B, but the oil at the cap
    # end has no way out: a cylinder leaks nothing, so one valve holds it both ways; a motor needs two.
    matter = steps(changed("glaze_press", PRESS_VALVE))
    state = found(matter, "PU1.compensator")
    reasons = {change.valve: failure for change, failure in state.reasons if isinstance(change, MoveValve)}

    assert set(state.changes) == shut("HV2")
    assert reasons["HV2"].condition is Condition.BARRED
    assert reasons["HV2"].data["position"] == "press"


def test_without_any_valve_the_press_has_no_barrier(changed: Changed) -> None:
    # Nothing moves at rest, and the compensator reads right there; but one stuck spool sends the slide out.
    matter = steps(changed("glaze_press", PRESS_VALVE, port_valve("HV2", 2, "A"), port_valve("HV3", 3, "B")))
    answer = lost(matter, "PU1.compensator")
    assert matter.procedure.verdict is Verdict.REFUTED
    assert (answer.failure.condition, answer.nearest) == (Condition.BARRED, ())
    assert answer.failure.data["part"] == "CY1"
    said = " ".join(why_text(matter, "PU1.compensator"))
    assert "sticks in press" in said


def test_reasons_name_the_fault(clay_mixer: Matter, glaze_press: Matter) -> None:
    def said(matter: Matter, valve: str) -> str:
        (stage,) = [one for one in matter.procedure.stages if one.kind is StageKind.DEADHEAD]
        spoken = [one for one in matter.spoken(stage) if one.step.subject == valve]
        return " ".join(line for one in spoken for line in one.lines)

    assert "press slide (CY1) moves" in said(glaze_press, "HV1")
    assert "if DV1 sticks in press" in said(glaze_press, "HV1")
    assert "if DV1 sticks in reverse" in said(clay_mixer, "HV2")
    # HV1 has a plainer one: with the lever held the mixer turns, faults or not.
    assert "sticks" not in said(clay_mixer, "HV1")


def test_every_change_of_every_state_has_its_reason(any_sample: Matter) -> None:
    for state in any_sample.procedure.search.found().values():
        assert [change for change, _ in state.reasons] == list(state.changes)


def test_opening_what_is_shut_in_service_costs_more_than_a_screw(clay_mixer: Matter) -> None:
    costs = {one.touches: one.cost for one in possible_options(clay_mixer.machine, clay_mixer.circuit)}
    assert costs["HV1"] == costs["HV2"] == HAND_VALVE_COST
    assert costs["BV1"] == OPENED_COST > costs["RV1"] == ADJUSTER_COST


# Near misses


def test_near_misses_in_their_order(any_sample: Matter) -> None:
    order = list(Condition)
    alike = order.index(Condition.ALONE)
    for answer in any_sample.procedure.search.answers.values():
        if isinstance(answer, NotInUse):
            continue
        conditions = [miss.failure.condition for miss in answer.near_misses]
        assert len(conditions) == len(set(conditions)) <= 6
        known = [one for one in conditions if one is not Condition.ESTABLISHED]
        ranks = [max(order.index(one), alike) for one in known]
        assert ranks == sorted(ranks, reverse=True)


def test_nearest_misses_by_hand(clay_mixer: Matter, glaze_press: Matter) -> None:
    # The press at rest is right for its compensator, save for a fault.
    (miss,) = found(glaze_press, "PU1.compensator").near_misses
    assert (miss.changes, miss.failure.condition) == ((), Condition.BARRED)
    # RV1 with the line shut: the compensator holds 176 bar, 30 bar away; nothing else comes as near.
    first = found(clay_mixer, "RV1").near_misses[0]
    assert set(first.changes) == {*shut("HV1"), MoveValve(valve="DV1", position="mix")}
    assert first.failure.condition is Condition.FOLLOWS
    assert value(first.failure.data["target"]) - value(first.failure.data["reading"]) == pytest.approx(30.0)


def test_why_says_state_reasons_and_misses_in_order(glaze_press: Matter) -> None:
    lines = list(why_text(glaze_press, "RV1"))
    misses = found(glaze_press, "RV1").near_misses
    told = [line.split(":")[0].strip() for line in lines if line.startswith("      ")]
    assert told == [miss.failure.condition.value for miss in misses]
    text = "\n".join(lines)
    assert text.index("HV1") < text.index("Nearest states")
    with pytest.raises(InputError) as caught:
        list(why_text(glaze_press, "RV9"))
    assert "RV1" in caught.value.problems[0].fix


# The order of moves


def job_of(matter: Matter) -> tuple[stages.Job, Rig]:
    case = Case(matter.machine, matter.circuit, matter.targets, matter.speaker.policies)
    procedure = matter.procedure
    job = prepare(case, Task(), procedure.search.found(), procedure.order.sequence)
    return job, Rig(matter.machine, matter.circuit, case.base)


def test_a_lever_is_held_only_once_its_line_is_shut(clay_mixer: Matter) -> None:
    # Held first, the mixer would turn; HV1 first, nothing does.
    job, rig = job_of(clay_mixer)
    (line,), lever = tuple(shut("HV1")), MoveValve(valve="DV1", position="mix")
    for given in ([lever, line], [line, lever]):
        assert stages._gentlest(job, rig, given) == [line, lever]


def test_without_a_gentle_order_moves_stay_as_they_are(clay_mixer: Matter) -> None:
    # The step itself is then refused, as every step that moves something.
    job, rig = job_of(clay_mixer)
    lever, other = MoveValve(valve="DV1", position="mix"), MoveValve(valve="HV2", position="closed")
    assert stages._gentlest(job, rig, [lever, other]) == [lever, other]


# Just ahead

ENDS = tuple(
    (
        f"      highest: 230 bar\n      raises: clockwise\n      where: the {which}",
        f"      highest: 260 bar\n      raises: clockwise\n      where: the {which}",
    )
    for which in ("upper", "hexagon")
)
PER_TURN = ("      width: 4 bar\n      per turn: 35 bar\n", "      width: 4 bar\n")


def test_a_compensator_just_ahead_limits_the_relief_at_its_stop(changed: Changed) -> None:
    # Both screws end at 260 bar, over the 250 bar of valve and motor. The compensator stands at the window's
    # top + half a window + its width: 210 + 4 + 4 = 218 bar: there the relief at its stop meets it.
    matter = steps(changed("clay_mixer", *ENDS))
    (away,) = [change for change in found(matter, "RV1").changes if isinstance(change, Adjust)]

    assert (matter.procedure.verdict, matter.replay.verdict) == (Verdict.ESTABLISHED,) * 2
    assert away == Adjust(adjuster="PU1.compensator", setting_bar=218.0)
    (stage,) = [one for one in matter.procedure.stages if one.adjuster == "RV1"]
    assert StepKind.RUN_IN not in {step.kind for step in stage.steps}
    (ahead,) = [one for one in matter.spoken(stage) if one.step.kind is StepKind.RUN_AHEAD]
    assert value(ahead.step.data["setting"]) == 218.0
    assert value(ahead.step.data["change"]) == pytest.approx(218 - 176)
    assert ahead.step.data["of"] == "RV1"
    text = " ".join((ahead.order, *ahead.lines))
    assert "218 bar" in text
    assert "1.2" in text  # 42 bar at 35 bar a turn


def test_how_far_ahead_cannot_be_counted_without_its_turns(changed: Changed) -> None:
    matter = steps(changed("clay_mixer", *ENDS, PER_TURN))
    answer = lost(matter, "RV1")
    assert matter.procedure.verdict is Verdict.REFUTED
    assert answer.failure.condition is Condition.WITHIN
    assert value(answer.failure.data["rating"]) == 250.0


def test_ahead_must_end_short_of_the_lowest_rating(changed: Changed) -> None:
    # With ± 20 bar on the relief, ahead is 226 + 20 + 4 = 250 bar: not short of the line's 250 bar.
    wide = (
        "      setting: 206 bar\n      given by: machine manual, sheet 4\n      tolerance: 4 bar\n",
        "      setting: 206 bar\n      given by: machine manual, sheet 4\n      tolerance: 20 bar\n",
    )
    narrower = (wide[0], wide[1].replace("20 bar", "19 bar"))  # 225 + 19 + 4 = 248 bar
    assert lost(steps(changed("clay_mixer", *ENDS, wide)), "RV1").failure.condition is Condition.WITHIN
    (away,) = [
        change
        for change in found(steps(changed("clay_mixer", *ENDS, narrower)), "RV1").changes
        if isinstance(change, Adjust)
    ]
    assert away.setting_bar == pytest.approx(248.0)


# Ports that are cut off

FED = "port not connected: fed          # maker's drawing: joined to the outlet inside the control"


def test_sealed_port_without_the_makers_word(changed: Changed) -> None:
    # Leakage alone decides whether the pump stands at standby or at deadhead.
    matter = steps(changed("glaze_press", (FED, "port not connected: sealed")))
    for adjuster in ("PU1.compensator", "RV1"):
        failure = lost(matter, adjuster).failure
        assert (failure.condition, failure.data["port"]) == (Condition.ESTABLISHED, "PU1.X")
    assert matter.procedure.verdict is Verdict.REFUTED
    assert matter.procedure.stages == ()


def test_sealed_port_with_the_makers_word(changed: Changed) -> None:
    # The drawing shows no bleed: outlet pressure reaches the port, and the compensator governs.
    sealed = "port not connected: sealed\n      sealed without bleed: yes"
    matter = steps(changed("glaze_press", (FED, sealed)))
    assert set(found(matter, "PU1.compensator").changes) == shut("HV1")
    assert found(matter, "PU1.compensator").reading_bar == pytest.approx(2800 * 0.0689475729, abs=0.05)
    assert matter.procedure.verdict is Verdict.ESTABLISHED


# Values that belong to a flow

STANDBY = (
    "      setting: 27 bar                  # standby: LS at tank, no flow\n"
    "      given by: machine manual, sheet 4\n",
    "      given by: machine manual, sheet 4\n",
)
WIDTH = (
    "      differential: 24 bar\n      differential flow: 60 L/min\n",
    "      differential: 24 bar\n      differential flow: 60 L/min\n      width: 5 bar\n",
)


def bypass(rated_lpm: float, drop_bar: float) -> tuple[tuple[str, str], ...]:
    """A hand valve from the pressure line to tank, shut in service."""
    valve = (
        "  HV9:\n    kind: hand valve\n    name: bypass valve\n    where: pressure manifold, rear\n"
        "    rating: 315 bar\n    rest: closed\n    lockable: yes\n"
        f"    rated flow: {rated_lpm} L/min\n    rated drop: {drop_bar} bar\n\n"
    )
    return (
        ("  TP1:\n    kind: test point\n", valve + "  TP1:\n    kind: test point\n"),
        ("BV1.A, TP1.P, TP2.P, DV1.P]", "BV1.A, HV9.A, TP1.P, TP2.P, DV1.P]"),
        ("RV1.T, BV1.B, FR1.B,", "RV1.T, BV1.B, HV9.B, FR1.B,"),
    )


def test_differential_with_its_width_gives_the_standby(changed: Changed) -> None:
    # 24 + 5 · 60 / 99.489 = 27.015 bar, read with LS at tank and no flow.
    matter = steps(changed("clay_mixer", STANDBY, WIDTH))
    setting = matter.targets.settings["PU1.load sensing"]
    standby_bar = 24.0 + 5.0 * 60.0 / FULL_LPM

    assert standby_bar == pytest.approx(27.015, abs=0.001)
    assert setting.target_bar == pytest.approx(standby_bar)
    assert setting.at_flow_lpm is None
    state = found(matter, "PU1.load sensing")
    assert set(state.changes) == shut("HV1", "HV2")
    assert state.reading_bar == pytest.approx(standby_bar, abs=0.005)


def test_differential_without_width_and_without_a_way_at_that_flow(changed: Changed) -> None:
    matter = steps(changed("clay_mixer", STANDBY))
    failure = lost(matter, "PU1.load sensing").failure
    assert failure.condition is Condition.AT_FLOW
    assert value(failure.data["wanted"]) == 60.0
    assert value(failure.data["flow"]) < 54.0
    assert matter.procedure.verdict is Verdict.REFUTED


def test_differential_without_width_is_read_at_its_flow(changed: Changed) -> None:
    # The bypass takes 65 L/min at 28 bar, so 65 · √(24/28) = 60.2 L/min at 24 bar. With LS at tank the outlet
    # is the differential: 24 bar at 60 L/min, whatever the width. With a stuck spool and HV1, HV2 open, the
    # load signal sends the pump to full stroke, and the bypass takes it at 28 · (99.5/65)² = 66 bar. At
    # work the mixer asks for 111.7 bar and would stay; with an empty drum it turns, so both valves are shut.
    matter = steps(changed("clay_mixer", STANDBY, *bypass(65, 28)))
    setting = matter.targets.settings["PU1.load sensing"]
    state = found(matter, "PU1.load sensing")

    assert setting.at_flow_lpm == 60.0
    all_of_it_bar = 28 * (FULL_LPM / 65) ** 2
    assert all_of_it_bar < 640 / 0.9 * 20 * math.pi / 400
    assert set(state.changes) == {MoveValve(valve="HV9", position="open"), *shut("HV1", "HV2")}
    for valve in ("HV1", "HV2"):
        without = dict(state.reasons)[MoveValve(valve=valve, position="closed")]
        assert (without.condition, without.data["idle"]) == (Condition.BARRED, "idle")
    flow_lpm = 65 * math.sqrt(state.reading_bar / 28)
    assert flow_lpm == pytest.approx(60.0, abs=0.5)
    assert state.reading_bar == pytest.approx(24.0, abs=0.1)
    reason = dict(state.reasons)[MoveValve(valve="HV9", position="open")]
    assert reason.condition is Condition.AT_FLOW
    assert (matter.procedure.verdict, matter.replay.verdict) == (Verdict.ESTABLISHED,) * 2


def test_flow_within_a_tenth_of_the_stated_one_only(changed: Changed) -> None:
    # The bypass takes 37 L/min at 24 bar, and with it the bleed valve 20 · √(24/50) = 13.9: 51, not 54 to 66.
    matter = steps(changed("clay_mixer", STANDBY, *bypass(40, 28)))
    assert lost(matter, "PU1.load sensing").failure.condition is Condition.AT_FLOW


def test_two_valves_together_may_make_the_flow(changed: Changed) -> None:
    # 49 · √(24/28) = 45.4 L/min through the bypass and 13.9 through the bleed valve: 59.2.
    matter = steps(changed("clay_mixer", STANDBY, *bypass(49, 28)))
    opened = {MoveValve(valve=valve, position="open") for valve in ("HV9", "BV1")}
    assert opened <= set(found(matter, "PU1.load sensing").changes)


def test_valve_that_a_state_opens_passes_its_rated_flow_at_most(changed: Changed) -> None:
    # The same curve, rated at 50 L/min: √(24/16.568) · 50 = 60.2 L/min would run through it.
    matter = steps(changed("clay_mixer", STANDBY, *bypass(50, 28 * (50 / 65) ** 2)))
    failure = lost(matter, "PU1.load sensing").failure
    assert (failure.condition, failure.data["valve"]) == (Condition.THROUGH, "HV9")
    assert value(failure.data["flow"]) == pytest.approx(60.2, abs=0.5)
    assert value(failure.data["rated"]) == 50.0
