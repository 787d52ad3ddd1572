"""The sample with a fixed pump, without its hand valve: RV1 can be set with the cylinder at its stop only.

V·n = 32 cm³ · 1450 /min = 46.4 L/min, of which 0.07 · 46.4/250 = 0.013 L/min/bar leak; the reference
flow of RV1 is the full flow, 0.93 · 46.4 = 43.152 L/min. CY1: 50.265 cm² and 34.361 cm².
"""

from __future__ import annotations

from collections.abc import Callable

import pytest
from variant_bench import (
    Replacement,
    answer,
    assert_good,
    assert_refused,
    moves,
    refused_adjuster,
    said,
    state,
)

from sheets.amounts import Amount
from sheets.circuit.plant import AtStop, MoveValve
from sheets.errors import InputError
from sheets.machine.site import Policies
from sheets.pages.compose.matter import Matter
from sheets.pipeline import Described, steps
from sheets.procedure.answers import NotFound
from sheets.procedure.at_stop import Approach, find_approach
from sheets.procedure.case import Case
from sheets.procedure.changes import LEVER_COST, RUN_COST, Change
from sheets.procedure.conditions import Condition, Failure
from sheets.procedure.rig import Rig
from sheets.procedure.steps import StageKind, Step, StepKind
from sheets.procedure.task import Task, TaskKind
from sheets.procedure.work import ALL, Work

Changed = Callable[..., Described]
Replacements = tuple[Replacement, ...]
Leave = Callable[..., Replacements]
Refused = Callable[..., Matter]

PUSHED = AtStop(actuator="CY1", stop="far stop")
PUSH = MoveValve(valve="DV1", position="push")
POSITIONS = "      centre: [P to T]                 # tandem: the pump runs unloaded\n"
RETURN = "      return: [P to B, A to T]\n"


@pytest.fixture(scope="session")
def held(pusher_at_its_stop: Callable[[TaskKind], Matter]) -> Matter:
    """RV1 set with the carriage run out and held there."""
    return pusher_at_its_stop(TaskKind.SET)


@pytest.fixture(scope="session")
def commissioned(pusher_at_its_stop: Callable[[TaskKind], Matter]) -> Matter:
    return pusher_at_its_stop(TaskKind.COMMISSION)


@pytest.fixture(scope="session")
def pusher(refused: Refused, without_hand_valve: Replacements, leave: Leave) -> Refused:
    """The pusher without its hand valve and with leave, changed further."""

    def compute(*replacements: Replacement, stop: str = "extended") -> Matter:
        return refused("kiln_pusher", *without_hand_valve, *leave(stop), *replacements)

    return compute


def against(matter: Described | Matter, *changes: Change) -> Failure:
    """What is against the way to the stop in a state of RV1."""
    found = find_approach(
        Case(matter.machine, matter.circuit, matter.targets, Policies()), changes, "RV1", Work(ALL)
    )
    assert isinstance(found, Failure), found
    return found


def kinds(matter: Matter, kind: StageKind) -> list[StepKind]:
    (stage,) = (stage for stage in matter.procedure.stages if stage.kind is kind)
    return [step.kind for step in stage.steps]


def steps_of(matter: Matter, *wanted: StepKind) -> list[Step]:
    return [step for stage in matter.procedure.stages for step in stage.steps if step.kind in wanted]


def value(data: Amount | str | None) -> float:
    assert isinstance(data, Amount)
    return data.value


# The state


def test_the_carriage_held_at_its_stop_is_the_state(held: Matter) -> None:
    # What passes RV1 there: 46.4 − 0.012992 · 180.26 = 44.058 L/min. It reads
    # 180 · (0.93 + 0.07 · 44.058/43.152) = 180.264 bar.
    assert_good(held)
    found = state(held, "RV1")
    assert set(found.changes) == {PUSH, PUSHED}
    assert found.reading_bar == pytest.approx(180.264, abs=0.01)
    assert found.flow_lpm == pytest.approx(44.058, abs=0.01)
    assert found.cost == LEVER_COST + RUN_COST
    assert held.procedure.order.sequence == ("RV1",)


def test_its_speed_is_all_that_the_pump_gives(held: Matter) -> None:
    # Without its load nothing leaks but over the drop of the lever valve: up to 46.4 L/min over 50.265 cm².
    approach = state(held, "RV1").approach
    assert approach is not None
    assert (approach.at, approach.lever) == (PUSHED, PUSH)
    assert approach.speed_m_s == pytest.approx(46.4e-3 / 60.0 / 50.265e-4, rel=0.01)


def test_without_either_change_it_is_another_state(held: Matter) -> None:
    reasons = dict(state(held, "RV1").reasons)
    assert reasons[PUSHED].condition is Condition.STILL
    assert reasons[PUSH].condition is Condition.FOLLOWS


def test_a_hand_valve_comes_first_where_there_is_one(refused: Refused, leave: Leave) -> None:
    matter = refused("kiln_pusher", *leave())
    assert state(matter, "RV1").changes == (MoveValve(valve="HV2", position="closed"),)
    assert not steps_of(matter, StepKind.GUARD_RUN, StepKind.RUN_TO_STOP, StepKind.LOOK_WHERE)


def test_the_other_stop_is_as_good(pusher: Refused) -> None:
    matter = pusher(stop="retracted")
    assert_good(matter)
    assert moves(state(matter, "RV1")) == {("DV1", "return")}
    assert AtStop(actuator="CY1", stop="near stop") in state(matter, "RV1").changes


# What the file has to say


@pytest.mark.parametrize("weight", ["", "    weight: 4 kN\n"], ids=["not said", "driven by itself"])
def test_leave_needs_a_file_that_says_what_drives_it(changed: Changed, leave: Leave, weight: str) -> None:
    with pytest.raises(InputError) as caught:
        changed("kiln_pusher", *leave(weight=weight))
    (problem,) = caught.value.problems
    assert "only where nothing drives it by itself" in problem.what
    assert "weight: 0 kN" in problem.fix


def test_leave_needs_a_guard_that_is_one(changed: Changed, leave: Leave) -> None:
    with pytest.raises(InputError) as caught:
        changed("kiln_pusher", *leave(guard="none"))
    (problem,) = caught.value.problems
    assert "says nothing" in problem.what


# Refused


def test_a_stop_that_the_lever_moves_away_from(pusher: Refused) -> None:
    # Only push is left: it extends, and the file gives leave to stand retracted.
    matter = pusher((RETURN, ""), stop="retracted")
    assert refused_adjuster(matter, "RV1").failure.condition is Condition.STILL
    wrong = AtStop(actuator="CY1", stop="near stop")
    failure = against(matter, PUSH, wrong)
    assert (failure.condition, failure.data["cause"]) == (Condition.REACHES, "away")


def test_a_pressure_that_does_not_bring_it_there(pusher: Refused) -> None:
    # 60 kN/0.95 over 50.265 cm² are 125.6 bar. At 130 bar it would run; the window begins at 127 bar, and
    # nine tenths of that are 114 bar: it could be read before it stands.
    matter = pusher(("setting: 180 bar", "setting: 130 bar"))
    assert_refused(matter)
    found = answer(matter, "RV1")
    assert isinstance(found, NotFound)
    assert (found.failure.condition, found.failure.data["cause"]) == (Condition.REACHES, "short")
    assert value(found.failure.data["setting"]) == pytest.approx(0.9 * 127.0, abs=1.0)
    assert "CY1 stops short of its stop" in said(matter, "cannot_be_set", "RV1")


def test_a_lever_that_is_dropped_must_leave_it_standing(pusher: Refused) -> None:
    # Without a centre the lever falls back to return: let go of, the carriage runs back.
    two = (POSITIONS, ""), ("rest position: centre", "rest position: return")
    matter = pusher(*two)
    failure = refused_adjuster(matter, "RV1").failure
    assert failure.condition is Condition.BARRED
    assert (failure.data["part"], failure.data["valve"], failure.data["position"]) == ("CY1", "DV1", "return")
    assert against(matter, PUSH, PUSHED).data["cause"] == "no lever"


def test_a_solenoid_is_no_lever(pusher: Refused) -> None:
    coils = (
        "    operated by: lever\n",
        "    operated by: solenoids\n    solenoids: {push: Y1, return: Y2}\n",
    )
    supply = "\ncontrols:\n", CONTROL_SUPPLY + "\ncontrols:\n"
    matter = pusher(coils, supply)
    assert against(matter, PUSH, PUSHED).data["cause"] == "no lever"
    assert refused_adjuster(matter, "RV1").failure.condition is Condition.REACHES
    assert "stops it when let go of" in said(matter, "cannot_be_set", "RV1")


CONTROL_SUPPLY = """
  Q2:
    kind: control supply
    voltage: 24 V
    feeds: [DV1]
    isolator: {plate: Q2 CONTROL, kind: main switch, where: column B4, action: turn to OFF, lock: padlock}
    verify: a qualified person tests for absence of voltage at the terminals of DV1
"""
SECOND = """\
  DV2:
    kind: directional valve
    where: pusher platform
    rating: 315 bar
    operated by: lever
    rest position: centre
    positions: {centre: [], out: [P to A, B to T], in: [P to B, A to T]}
    rated flow: 60 L/min
    rated drop: 4 bar
  CY2: {kind: cylinder, where: track, rating: 315 bar, bore: 50 mm, rod: 28 mm, stroke: 200 mm,
    extending load: 5 kN, retracting load: 5 kN}
  FR1:
"""


def test_a_spool_that_sticks_and_moves_another_cylinder(pusher: Refused) -> None:
    # 5 kN/0.95 over 19.6 cm² are 27 bar: with DV2 stuck out CY2 moves while CY1 is held at its stop.
    matter = pusher(
        ("  FR1:\n", SECOND),
        ("  valve: [H1.B, DV1.P]", "  valve: [H1.B, DV1.P, DV2.P]"),
        (
            "  return: [DV1.T, FR1.A]",
            "  return: [DV1.T, DV2.T, FR1.A]\n  a2: [DV2.A, CY2.A]\n  b2: [DV2.B, CY2.B]",
        ),
    )
    failure = refused_adjuster(matter, "RV1").failure
    assert failure.condition is Condition.BARRED
    assert (failure.data["part"], failure.data["valve"]) == ("CY2", "DV2")
    on_the_way = against(matter, PUSH, PUSHED)
    assert (on_the_way.condition, on_the_way.data["part"]) == (Condition.BARRED, "CY2")


ROD_VALVE = """\
  HV4: {kind: hand valve, where: line B, rating: 400 bar, rest: open, lockable: yes, rated flow: 80 L/min,
    rated drop: 0.5 bar}
  FR1:
"""


def test_a_rod_side_that_is_shut_stands_above_the_supply(pusher: Refused) -> None:
    # With RV1 at its stop 46.4 − 0.012992 · 210.18 = 43.669 L/min pass it, so it holds
    # 210 · (0.93 + 0.07 · 43.669/43.152) = 210.18 bar. HV4 shut by a slip, and no load:
    # 0.5 bar kept by its seals (policy), (210.18 − 0.5) · 50.265/34.361 = 306.7 bar; CY1 carries 250.
    matter = pusher(
        ("  FR1:\n", ROD_VALVE),
        ("  line B: [DV1.B, TP3.P, CY1.B]", "  line B: [DV1.B, HV4.A]\n  rod: [HV4.B, TP3.P, CY1.B]"),
    )
    failure = against(matter, PUSH, PUSHED)
    assert (failure.condition, failure.data["line"], failure.data["part"]) == (Condition.WITHIN, "rod", "CY1")
    assert value(failure.data["pressure"]) == pytest.approx(306.7, abs=0.2)


def test_oil_that_nothing_lets_out_afterwards(pusher: Refused) -> None:
    check = (
        "  CV1: {kind: check valve, where: line A, rating: 400 bar, opening: 0.5 bar, rated flow: 60 L/min,\n"
        "    rated drop: 2 bar}\n  FR1:\n"
    )
    matter = pusher(
        ("  FR1:\n", check),
        ("  line A: [DV1.A, TP2.P, CY1.A]", "  line A: [DV1.A, CV1.A]\n  cap: [CV1.B, TP2.P, CY1.A]"),
    )
    failure = against(matter, PUSH, PUSHED)
    assert (failure.data["cause"], failure.data["line"]) == ("shut in", "cap")


# The steps


def test_only_the_step_that_says_so_moves_it_and_its_guard_comes_before(held: Matter) -> None:
    for stage in held.procedure.stages:
        for before, step in zip(stage.steps, stage.steps[1:], strict=False):
            assert (step.runs == PUSHED) == (step.kind is StepKind.RUN_TO_STOP)
            if step.runs is not None:
                assert (before.kind, before.subject) == (StepKind.GUARD_RUN, "CY1")
                assert step.actions == (PUSH,)
            assert step.trace is None or not step.trace.moving
    assert len(steps_of(held, StepKind.RUN_TO_STOP)) == 3  # as found, set, read again


def test_the_lever_is_held_from_the_run_to_the_last_reading(held: Matter) -> None:
    after = kinds(held, StageKind.SET)
    assert after[after.index(StepKind.GUARD_RUN) :] == [
        StepKind.GUARD_RUN,
        StepKind.RUN_TO_STOP,
        StepKind.TURN_BELOW,
        StepKind.COME_UP,
        StepKind.LOCK_NUT,
        StepKind.READ_AGAIN,
        StepKind.LET_GO,
        *([StepKind.PRESS_STOP] if after[-1] is StepKind.PRESS_STOP else []),
    ]


def test_every_run_is_warned_of_before_it(held: Matter, commissioned: Matter) -> None:
    for matter in (held, commissioned):
        for stage in matter.procedure.stages:
            for one in matter.spoken(stage):
                told = [warning for warning in one.warnings if "runs to its stop" in warning.hazard]
                assert len(told) == (one.step.runs is not None)
                assert all(warning.signal == "DANGER" for warning in told)


def test_a_relief_that_is_backed_out_moves_it_while_it_comes_up(commissioned: Matter) -> None:
    # 30 bar hold it short of what 60 kN need, 125.6 bar; 0.95 of the window's bottom, 178 bar, run it out.
    assert_good(commissioned)
    after = kinds(commissioned, StageKind.SET)
    assert after[after.index(StepKind.GUARD_RUN) :][:4] == [
        StepKind.GUARD_RUN,
        StepKind.HOLD_RUNNING,
        StepKind.RAISE_TO_STOP,
        StepKind.COME_UP,
    ]
    first, second = steps_of(commissioned, StepKind.HOLD_RUNNING, StepKind.RAISE_TO_STOP)
    cap = commissioned.circuit.node_of["CY1.A"]
    assert first.trace is not None
    assert first.trace.pressures_bar[cap] < 40.0
    assert second.trace is not None
    assert second.trace.pressures_bar[cap] == pytest.approx(0.95 * 178.0, rel=0.01)
    assert first.runs == second.runs == PUSHED


@pytest.mark.parametrize("kind", [TaskKind.READ, TaskKind.COMMISSION], ids=lambda kind: kind.value)
def test_other_tasks_hold_too(pusher_at_its_stop: Callable[[TaskKind], Matter], kind: TaskKind) -> None:
    assert_good(pusher_at_its_stop(kind))


def test_a_new_relief_holds_too(changed: Changed, without_hand_valve: Replacements, leave: Leave) -> None:
    new = Task(kind=TaskKind.REPLACE, part="RV1")
    matter = steps(changed("kiln_pusher", *without_hand_valve, *leave()), new)
    assert_good(matter)
    assert steps_of(matter, StepKind.RAISE_TO_STOP)


def test_replay_ends_the_work_where_it_stops_short(held: Matter) -> None:
    # Backed out, 30 bar don't move 60 kN: the first run says to stop, and nothing is read.
    (run,) = (run for run in held.replay.runs if run.start.name == "all backed out")
    assert run.stopped_at is not None
    stage, step = run.stopped_at
    assert held.procedure.stages[stage].kind is StageKind.AS_FOUND
    assert held.procedure.stages[stage].steps[step].kind is StepKind.RUN_TO_STOP
    assert run.violations == ()


def test_a_gauge_that_stays_on_the_machine_does_not_spare_the_lockout(pusher: Refused) -> None:
    # Nothing is fitted, but the cap side stays under pressure: it is relieved by the lever, drive off.
    matter = pusher(
        ("    fitted at: [TP1]\n", ""),
        ("  pump line: [PU1.P, RV1.P, TP1.P, HV2.A]", "  pump line: [PU1.P, RV1.P, TP1.P, G1.P, HV2.A]"),
    )
    assert_good(matter)
    again = kinds(matter, StageKind.LOCK_AGAIN)
    assert StepKind.WORK_LEVER in again
    worked = [step for step in steps_of(matter, StepKind.WORK_LEVER) if "line A" in str(step.data["lines"])]
    assert worked[-1].trace is not None
    assert worked[-1].trace.pressures_bar[matter.circuit.node_of["CY1.A"]] == pytest.approx(0.0, abs=0.1)


@pytest.mark.parametrize(
    ("setting_bar", "position", "codes"),
    [
        (60.0, "push", {"step_stops_short"}),
        (180.0, "return", {"step_moves", "step_stops_short"}),
        (180.0, "push", set()),
    ],
)
def test_a_run_is_tried_as_it_is_written(
    held: Matter, setting_bar: float, position: str, codes: set[str]
) -> None:
    # 60 bar are less than the 125.6 that 60 kN need; return runs it to its other stop.
    case = Case(held.machine, held.circuit, held.targets, Policies())
    rig = Rig(held.machine, held.circuit, case.base.adjusted("RV1", setting_bar))
    move = MoveValve(valve="DV1", position=position)
    rig.do(StepKind.RUN_TO_STOP, "DV1", move, runs=PUSHED)
    assert {one.code for one in rig.findings} == codes


# The words


def words(matter: Matter) -> str:
    spoken = (one for stage in matter.procedure.stages for one in matter.spoken(stage))
    return "\n".join(text for one in spoken for text in (one.order, *one.lines))


def test_the_page_says_where_to_stand_what_runs_and_what_to_do_with_it(held: Matter) -> None:
    text = words(held)
    assert "Check that nobody and nothing is within reach of pusher carriage (CY1)." in text
    assert (
        "Guard: the chain is closed. Who holds the lever stands here: pusher platform, behind the rail."
        in text
    )
    assert "Go on holding when pusher carriage stands at its stop." in text
    assert "If it stops short, let go and press emergency stop E1." in text
    assert "Before work: its operator brings it back." in text


def test_an_approach_is_data_of_the_state(held: Matter) -> None:
    found = find_approach(
        Case(held.machine, held.circuit, held.targets, Policies()), (PUSH, PUSHED), "RV1", Work(ALL)
    )
    assert isinstance(found, Approach)
    assert found == state(held, "RV1").approach
