"""Right procedures hold from every start; wrong ones are refused by the invariant that they break."""

import ast
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import pytest

import sheets
from sheets.amounts import Severity, bar
from sheets.circuit.plant import Adjust, AtStop, MoveValve, StartDrive
from sheets.circuit.verdict import Verdict
from sheets.pages.compose.matter import Matter
from sheets.pipeline import Described, steps
from sheets.procedure.steps import Procedure, Stage, StageKind, Step, StepKind
from sheets.procedure.task import Task, TaskKind
from sheets.trial import replay as module
from sheets.trial.invariants import CHECKS, Invariant
from sheets.trial.replay import Replay, Run, findings_of, replay, starts_of

PACKAGE = Path(sheets.__file__).parent
Changed = Callable[..., Described]


# The sound ones


def test_samples_hold_from_every_start(any_sample: Matter) -> None:
    assert any_sample.replay.verdict is Verdict.ESTABLISHED
    assert any_sample.replay.violations == ()
    assert findings_of(any_sample.replay) == ()


@pytest.mark.parametrize("kind", [TaskKind.READ, TaskKind.COMMISSION])
@pytest.mark.parametrize("name", ["clay_mixer", "glaze_press", "kiln_pusher"])
def test_other_tasks_hold_too(changed: Changed, name: str, kind: TaskKind) -> None:
    matter = steps(changed(name), Task(kind=kind))
    assert (matter.procedure.verdict, matter.replay.verdict) == (Verdict.ESTABLISHED,) * 2


@pytest.mark.parametrize(
    ("name", "part"),
    [
        ("clay_mixer", "RV1"),
        ("clay_mixer", "PU1"),
        ("glaze_press", "RV1"),
        ("glaze_press", "PU1"),
        ("kiln_pusher", "RV1"),
    ],
)
def test_replacements_hold_too(changed: Changed, name: str, part: str) -> None:
    matter = steps(changed(name), Task(kind=TaskKind.REPLACE, part=part))
    assert (matter.procedure.verdict, matter.replay.verdict) == (Verdict.ESTABLISHED,) * 2


def test_every_step_is_traced_up_to_where_a_run_stops(any_sample: Matter) -> None:
    every = [
        (at, place)
        for at, stage in enumerate(any_sample.procedure.stages)
        for place in range(len(stage.steps))
    ]
    for run in any_sample.replay.runs:
        expected = every[: every.index(run.stopped_at) + 1] if run.stopped_at else every
        assert [(one.stage, one.step) for one in run.trace] == [(0, -1), *expected]


# Starts


def test_starts_of_a_machine(clay_mixer: Matter) -> None:
    # Two as printed, all out, and each of three adjusters at its stop; each with the work loads and without.
    starts = {start.name: start for start in starts_of(clay_mixer.circuit, clay_mixer.targets)}
    target = {"RV1": 206.0, "PU1.compensator": 176.0, "PU1.load sensing": 27.0}

    assert len(starts) == 12
    loaded = {name: start for name, start in starts.items() if start.loaded}
    assert {f"{name}, no work load" for name in loaded} == starts.keys() - loaded.keys()
    assert {name for name, start in loaded.items() if start.as_printed} == {"all at target", "in service"}
    assert {name for name, start in loaded.items() if start.in_service} == {"in service"}
    assert starts["all at target"].settings_bar == starts["in service"].settings_bar == target
    assert starts["all backed out"].settings_bar == {
        "RV1": 50.0,
        "PU1.compensator": 40.0,
        "PU1.load sensing": 12.0,
    }
    assert starts["RV1 at its stop"].settings_bar == {**target, "RV1": 230.0}


def run_of(result: Replay, name: str) -> Run:
    return next(run for run in result.runs if run.start.name == name)


def stop_of(matter: Matter, name: str) -> tuple[StageKind, StepKind, str] | None:
    where = run_of(matter.replay, name).stopped_at
    if where is None:
        return None
    stage = matter.procedure.stages[where[0]]
    return stage.kind, stage.steps[where[1]].kind, stage.steps[where[1]].subject


def test_where_the_mixer_tells_to_stop(clay_mixer: Matter) -> None:
    # Standby at the control's stop is 34 bar and backed out 12 bar; the start accepts 24 to 30.1 bar. The
    # compensator at its stop lets RV1 hold 206 bar; the lever's step accepts 158 to 194 bar. RV1 never shows
    # in a start, and its own stage begins with its screw backed out.
    start = (StageKind.AS_FOUND, StepKind.START, "M1")
    assert stop_of(clay_mixer, "PU1.load sensing at its stop") == start
    assert stop_of(clay_mixer, "all backed out") == start
    held = (StageKind.AS_FOUND, StepKind.HOLD_VALVE, "DV1")
    assert stop_of(clay_mixer, "PU1.compensator at its stop") == held
    for name in ("all at target", "in service", "RV1 at its stop"):
        assert stop_of(clay_mixer, name) is None


def test_where_the_pusher_tells_to_stop(kiln_pusher: Matter) -> None:
    # 30 or 210 bar where 162 to 200 bar are accepted, while HV2 is closed in increments.
    closing = (StageKind.AS_FOUND, StepKind.CLOSE_GRADUALLY, "HV2")
    assert stop_of(kiln_pusher, "all backed out") == stop_of(kiln_pusher, "RV1 at its stop") == closing


def test_a_run_stops_only_where_its_printed_reading_says_so(any_sample: Matter) -> None:
    for run in any_sample.replay.runs:
        for one in run.trace:
            if one.step < 0:
                continue
            step = any_sample.procedure.stages[one.stage].steps[one.step]
            if step.reading is None:
                assert run.stopped_at != (one.stage, one.step)
                continue
            seen_bar = one.solution.pressure_at(f"{step.reading.test_point}.P")
            outside = not step.reading.low_bar - 0.01 <= seen_bar <= step.reading.high_bar + 0.01
            if run.stopped_at == (one.stage, one.step):
                assert outside
            elif run.start.as_printed:
                assert not outside
            else:
                assert seen_bar <= step.reading.stop_above_bar


def test_the_first_powered_stage_holds_from_every_start(any_sample: Matter) -> None:
    last = next(
        at for at, stage in enumerate(any_sample.procedure.stages) if stage.kind is StageKind.AS_FOUND
    )
    for run in any_sample.replay.runs:
        assert not [one for one in run.violations if one.stage <= last]
        assert run.stopped_at is None or run.stopped_at[0] <= last


# Deliberately wrong ones

Steps = tuple[Step, ...]


def edited(
    procedure: Procedure, kind: StageKind, edit: Callable[[Steps], Steps], adjuster: str = ""
) -> Procedure:
    """The procedure with the steps of one stage edited."""
    found = [stage for stage in procedure.stages if (stage.kind, stage.adjuster) == (kind, adjuster)]
    assert len(found) == 1

    def of(stage: Stage) -> Stage:
        return replace(stage, steps=edit(stage.steps)) if stage is found[0] else stage

    return replace(procedure, stages=tuple(of(stage) for stage in procedure.stages))


def place_of(given: Steps, kind: StepKind, subject: str) -> int:
    places = [at for at, step in enumerate(given) if (step.kind, step.subject) == (kind, subject)]
    assert places, (kind, subject)
    return places[0]


def without(kind: StepKind, subject: str) -> Callable[[Steps], Steps]:
    def edit(given: Steps) -> Steps:
        at = place_of(given, kind, subject)
        return given[:at] + given[at + 1 :]

    return edit


def moved_before(what: tuple[StepKind, str], other: tuple[StepKind, str]) -> Callable[[Steps], Steps]:
    def edit(given: Steps) -> Steps:
        step = given[place_of(given, *what)]
        rest = without(*what)(given)
        at = place_of(rest, *other)
        return (*rest[:at], step, *rest[at:])

    return edit


def step_with(kind: StepKind, subject: str, **changes: object) -> Callable[[Steps], Steps]:
    def edit(given: Steps) -> Steps:
        at = place_of(given, kind, subject)
        edited_step = replace(given[at], **changes)  # type: ignore[arg-type]  # fields by name
        return (*given[:at], edited_step, *given[at + 1 :])

    return edit


def again(matter: Matter, procedure: Procedure, described: Described | None = None) -> Replay:
    """The replay of a procedure on the matter's machine, or on another one."""
    on = described or matter
    return replay(on.machine, on.circuit, matter.targets, matter.speaker.policies, procedure)


def printed(result: Replay) -> Run:
    return next(run for run in result.runs if run.start.name == "in service")


def refused_for(result: Replay, invariant: Invariant, subject: str) -> None:
    """Refused by that invariant first, about that subject, and said in words."""
    assert result.verdict is Verdict.REFUTED
    first = printed(result).violations[0]
    assert (first.invariant, first.subject) == (invariant, subject)
    codes = {finding.code: finding for finding in findings_of(result)}
    assert codes[invariant.value].severity is Severity.REFUSED


def test_lever_held_before_its_line_is_shut(clay_mixer: Matter) -> None:
    # Two steps swapped: HV1 is closed only after the lever is held.
    shut = next(
        step
        for stage in clay_mixer.procedure.stages
        for step in stage.steps
        if (step.kind, step.subject) == (StepKind.SET_VALVE, "HV1")
    )
    wrong = edited(clay_mixer.procedure, StageKind.DEADHEAD, without(StepKind.SET_VALVE, "HV1"))

    def after_the_lever(given: Steps) -> Steps:
        at = place_of(given, StepKind.HOLD_VALVE, "DV1") + 1
        return (*given[:at], shut, *given[at:])

    result = again(clay_mixer, edited(wrong, StageKind.AS_FOUND, after_the_lever))
    refused_for(result, Invariant.STILL, "HM1")


def test_lever_held_without_a_hand_valve(clay_mixer: Matter) -> None:
    wrong = edited(clay_mixer.procedure, StageKind.DEADHEAD, without(StepKind.SET_VALVE, "HV1"))
    result = again(clay_mixer, wrong)
    refused_for(result, Invariant.STILL, "HM1")
    first = printed(result).violations[0]
    assert wrong.stages[first.stage].steps[first.step].kind is StepKind.HOLD_VALVE


def test_a_load_that_may_not_be_there_holds_nothing(clay_mixer: Matter) -> None:
    # The lever in mix when the pump starts, its lines open. The compensator backed out to 40 bar doesn't turn
    # a full drum, which takes 111.7 bar; it turns an empty one.
    wrong = edited(clay_mixer.procedure, StageKind.DEADHEAD, without(StepKind.SET_VALVE, "HV1"))
    lever = MoveValve(valve="DV1", position="mix")
    start = step_with(StepKind.START, "M1", actions=(lever, StartDrive(drive="M1")))
    result = again(clay_mixer, edited(wrong, StageKind.AS_FOUND, start))
    at_work, idle = run_of(result, "all backed out"), run_of(result, "all backed out, no work load")
    assert Invariant.STILL not in {one.invariant for one in at_work.violations}
    assert (Invariant.STILL, "HM1") in {(one.invariant, one.subject) for one in idle.violations}


def test_vent_left_shut(clay_mixer: Matter) -> None:
    # What the pump left in the line stands there once the drive is off: zero isn't reached.
    wrong = edited(clay_mixer.procedure, StageKind.LOCK_AGAIN, without(StepKind.OPEN_VENT, "BV1"))
    refused_for(again(clay_mixer, wrong), Invariant.ZERO, "TP1")


def test_vent_left_shut_on_a_machine_that_was_in_service(glaze_press: Matter) -> None:
    # The press deadheads at rest, so its line holds 193 bar when the first lockout begins.
    wrong = edited(glaze_press.procedure, StageKind.ISOLATE, without(StepKind.OPEN_VENT, "BV1"))
    result = again(glaze_press, wrong)
    refused_for(result, Invariant.NOT_OPENED_UNDER_PRESSURE, "TP1")
    assert any(one.invariant is Invariant.ZERO for one in printed(result).violations)


def test_gauge_fitted_before_the_line_is_relieved(glaze_press: Matter) -> None:
    wrong = edited(
        glaze_press.procedure,
        StageKind.ISOLATE,
        moved_before((StepKind.FIT_GAUGE, "G1"), (StepKind.OPEN_VENT, "BV1")),
    )
    refused_for(again(glaze_press, wrong), Invariant.NOT_OPENED_UNDER_PRESSURE, "TP1")


def test_gauge_removed_under_pressure(clay_mixer: Matter) -> None:
    wrong = edited(
        clay_mixer.procedure,
        StageKind.LOCK_AGAIN,
        moved_before((StepKind.REMOVE_GAUGE, "G1"), (StepKind.OPEN_VENT, "BV1")),
    )
    refused_for(again(clay_mixer, wrong), Invariant.NOT_OPENED_UNDER_PRESSURE, "TP1")


def test_compensator_set_while_the_load_signal_is_drained(clay_mixer: Matter) -> None:
    # The lever isn't held: the load-sensing control holds 27 bar, whatever the compensator's screw.
    wrong = edited(
        clay_mixer.procedure, StageKind.SET, without(StepKind.HOLD_VALVE, "DV1"), "PU1.compensator"
    )
    result = again(clay_mixer, wrong)
    refused_for(result, Invariant.READS_RIGHT, "G1")
    seen = printed(result).violations[0].data["reading"]
    assert not isinstance(seen, str)
    assert seen.value == pytest.approx(27.0, abs=0.01)


def test_come_up_to_a_wrong_value(clay_mixer: Matter) -> None:
    # To 200 bar where 202 to 210 bar are printed: it reads wrong, and stands wrong at the end.
    adjust = (Adjust(adjuster="RV1", setting_bar=200.0),)
    wrong = edited(
        clay_mixer.procedure, StageKind.SET, step_with(StepKind.COME_UP, "RV1", actions=adjust), "RV1"
    )
    result = again(clay_mixer, wrong)
    refused_for(result, Invariant.READS_RIGHT, "G1")
    off = [one for one in printed(result).violations if one.invariant is Invariant.ON_TARGET]
    assert [one.subject for one in off] == ["RV1"]


def test_targets_that_the_procedure_was_not_written_for(clay_mixer: Matter) -> None:
    settings = dict(clay_mixer.targets.settings)
    settings["RV1"] = replace(settings["RV1"], target_bar=209.0)
    targets = replace(clay_mixer.targets, settings=settings)
    result = replay(
        clay_mixer.machine,
        clay_mixer.circuit,
        targets,
        clay_mixer.speaker.policies,
        clay_mixer.procedure,
    )
    refused_for(result, Invariant.ON_TARGET, "RV1")
    assert printed(result).violations[0].data == {"setting": bar(206.0), "target": bar(209.0)}


def test_setting_that_is_turned_again_at_the_end(kiln_pusher: Matter) -> None:
    # Nothing reads it any more: only the end shows it.
    slip = Step(kind=StepKind.BACK_OUT, subject="RV1", actions=(Adjust(adjuster="RV1", setting_bar=100.0),))
    wrong = edited(kiln_pusher.procedure, StageKind.LOCK_AGAIN, lambda given: (*given, slip))
    result = again(kiln_pusher, wrong)
    refused_for(result, Invariant.ON_TARGET, "RV1")
    assert len(printed(result).violations) == 1


def test_printed_expectation_that_is_not_what_the_plant_does(any_sample: Matter) -> None:
    adjuster = any_sample.procedure.order.sequence[0]

    def edit(given: Steps) -> Steps:
        at = place_of(given, StepKind.READ_AGAIN, adjuster)
        reading = given[at].reading
        assert reading is not None
        other = replace(reading, expected_bar=reading.expected_bar + 1.0)  # still in its window
        return (*given[:at], replace(given[at], reading=other), *given[at + 1 :])

    wrong = edited(any_sample.procedure, StageKind.SET, edit, adjuster)
    refused_for(again(any_sample, wrong), Invariant.READS_RIGHT, "G1")


def test_drive_left_running_on_a_locked_page(any_sample: Matter) -> None:
    for kind in (StageKind.ISOLATE, StageKind.LOCK_AGAIN):
        wrong = edited(any_sample.procedure, kind, without(StepKind.PRESS_STOP, "M1"))
        result = again(any_sample, wrong)
        assert result.verdict is Verdict.REFUTED
        first = printed(result).violations[0]
        assert (first.invariant, first.subject) == (Invariant.LOCKED, "M1")
        assert wrong.stages[first.stage].kind is kind


def test_hand_valve_left_shut(kiln_pusher: Matter) -> None:
    # Nothing moves and nothing is over a rating: only the place of the valve at the end is wrong.
    wrong = edited(kiln_pusher.procedure, StageKind.CHECK, without(StepKind.OPEN_AGAIN, "HV2"))
    result = again(kiln_pusher, wrong)
    assert result.verdict is Verdict.REFUTED
    left = [one for one in printed(result).violations if one.invariant is Invariant.AS_IN_SERVICE]
    assert [(one.subject, one.data["position"]) for one in left] == [("HV2", "closed")]


def test_lever_left_shifted(clay_mixer: Matter) -> None:
    # As if pinned: the lever stays in 'mix' after its lines were relieved, and the mixer turns at the start.
    pinned = (MoveValve(valve="DV1", position="mix"),)

    def edit(given: Steps) -> Steps:
        at = max(place for place, step in enumerate(given) if step.kind is StepKind.WORK_LEVER)
        return (*given[:at], replace(given[at], actions=pinned), *given[at + 1 :])

    result = again(clay_mixer, edited(clay_mixer.procedure, StageKind.LOCK_AGAIN, edit))
    refused_for(result, Invariant.STILL, "HM1")
    assert Invariant.AS_IN_SERVICE in {one.invariant for one in printed(result).violations}


def test_override_that_is_not_let_go(clay_mixer: Matter) -> None:
    # Standby is then read at deadhead.
    wrong = edited(clay_mixer.procedure, StageKind.CHECK, without(StepKind.LET_GO, "DV1"))
    refused_for(again(clay_mixer, wrong), Invariant.READS_RIGHT, "G2")


def test_suction_valve_shut(clay_mixer: Matter) -> None:
    shut = (MoveValve(valve="HV3", position="closed"),)
    wrong = edited(
        clay_mixer.procedure, StageKind.DEADHEAD, step_with(StepKind.CHECK_VALVE, "HV3", actions=shut)
    )
    refused_for(again(clay_mixer, wrong), Invariant.FILLED, "suction")


def test_gauge_that_is_not_fitted_shows_nothing(clay_mixer: Matter) -> None:
    wrong = edited(clay_mixer.procedure, StageKind.ISOLATE, without(StepKind.FIT_GAUGE, "G2"))
    refused_for(again(clay_mixer, wrong), Invariant.GAUGE_FITTED, "G2")


def test_gauge_at_another_test_point_is_not_where_it_is_read(clay_mixer: Matter) -> None:
    elsewhere = step_with(StepKind.FIT_GAUGE, "G2", data={"test_point": "TP3"})
    result = again(clay_mixer, edited(clay_mixer.procedure, StageKind.ISOLATE, elsewhere))
    refused_for(result, Invariant.GAUGE_FITTED, "G2")


def test_gauge_left_on(clay_mixer: Matter) -> None:
    wrong = edited(clay_mixer.procedure, StageKind.LOCK_AGAIN, without(StepKind.REMOVE_GAUGE, "G2"))
    refused_for(again(clay_mixer, wrong), Invariant.GAUGES_OFF, "G2")


# The sound procedure on another machine


def test_relief_run_over_a_rating(clay_mixer: Matter, changed: Changed) -> None:
    # 206 bar on a relief that carries 200 bar.
    weaker = changed(
        "clay_mixer", ("    rating: 315 bar\n    acting: pilot", "    rating: 200 bar\n    acting: pilot")
    )
    result = again(clay_mixer, clay_mixer.procedure, weaker)
    refused_for(result, Invariant.WITHIN_RATING, "RV1")
    first = printed(result).violations[0]
    assert clay_mixer.procedure.stages[first.stage].steps[first.step].kind is StepKind.COME_UP


def test_gauge_too_small(clay_mixer: Matter, changed: Changed) -> None:
    smaller = changed(
        "clay_mixer", ("    range: 400 bar\n    rating: 400 bar", "    range: 200 bar\n    rating: 200 bar")
    )
    refused_for(again(clay_mixer, clay_mixer.procedure, smaller), Invariant.GAUGE_WITHIN, "G1")


def test_drive_too_small(clay_mixer: Matter, changed: Changed) -> None:
    # RV1 asks for 39.4 kW.
    weaker = changed("clay_mixer", ("power: 45 kW", "power: 38 kW"))
    refused_for(again(clay_mixer, clay_mixer.procedure, weaker), Invariant.DRIVE_CARRIES, "M1")


def test_cut_off_port_leaves_a_step_not_established(glaze_press: Matter, changed: Changed) -> None:
    # Where the LS port is sealed and not fed, leakage alone decides the outlet pressure. Only the maker's
    # word that nothing bleeds it helps.
    sealed = changed("glaze_press", ("port not connected: fed ", "port not connected: sealed "))
    result = again(glaze_press, glaze_press.procedure, sealed)
    assert result.verdict is Verdict.NOT_ESTABLISHED
    assert {finding.severity for finding in findings_of(result)} >= {Severity.NOT_ESTABLISHED}

    trusting = replay(
        sealed.machine,
        sealed.circuit,
        glaze_press.targets,
        sealed.policies,
        glaze_press.procedure,
        trusted_ports=frozenset({"PU1.X"}),
    )
    assert Invariant.ESTABLISHED not in {one.invariant for one in trusting.violations}


# A cylinder that runs to its stop

Runs = Callable[[TaskKind], Matter]


def test_a_run_to_the_stop_holds_as_it_is_printed(pusher_at_its_stop: Runs) -> None:
    for kind in (TaskKind.SET, TaskKind.COMMISSION):
        matter = pusher_at_its_stop(kind)
        assert again(matter, matter.procedure).verdict is Verdict.ESTABLISHED


def test_a_lever_that_is_held_without_naming_the_run(pusher_at_its_stop: Runs) -> None:
    matter = pusher_at_its_stop(TaskKind.SET)
    silent = step_with(StepKind.RUN_TO_STOP, "DV1", runs=None)
    wrong = edited(matter.procedure, StageKind.AS_FOUND, silent)
    refused_for(again(matter, wrong), Invariant.STILL, "CY1")


def test_a_run_whose_guard_nobody_looked_at(pusher_at_its_stop: Runs) -> None:
    matter = pusher_at_its_stop(TaskKind.SET)
    wrong = edited(matter.procedure, StageKind.AS_FOUND, without(StepKind.GUARD_RUN, "CY1"))
    refused_for(again(matter, wrong), Invariant.STILL, "CY1")


def test_a_run_to_the_other_stop_than_the_step_and_the_file_say(pusher_at_its_stop: Runs) -> None:
    matter = pusher_at_its_stop(TaskKind.SET)
    for change in (
        {"actions": (MoveValve(valve="DV1", position="return"),)},
        {"runs": AtStop(actuator="CY1", stop="near stop")},
    ):
        edit = step_with(StepKind.RUN_TO_STOP, "DV1", **change)
        wrong = edited(matter.procedure, StageKind.AS_FOUND, edit)
        refused_for(again(matter, wrong), Invariant.STILL, "CY1")


def test_a_run_without_leave_in_the_file(pusher_at_its_stop: Runs) -> None:
    matter = pusher_at_its_stop(TaskKind.SET)
    cylinder = matter.machine.parts["CY1"].model_copy(update={"may_run_to_stop": None})
    machine = matter.machine.model_copy(update={"parts": {**matter.machine.parts, "CY1": cylinder}})
    result = replay(machine, matter.circuit, matter.targets, matter.speaker.policies, matter.procedure)
    refused_for(result, Invariant.STILL, "CY1")


def test_a_reading_before_the_stop_is_reached(pusher_at_its_stop: Runs) -> None:
    # 60 kN/0.95 over 50.3 cm² need 125.6 bar: at 60 bar the carriage stands where it was, and RV1 reads 60.
    matter = pusher_at_its_stop(TaskKind.SET)
    low = Step(kind=StepKind.TURN_BELOW, subject="RV1", actions=(Adjust(adjuster="RV1", setting_bar=60.0),))

    def before_the_run(given: Steps) -> Steps:
        at = place_of(given, StepKind.GUARD_RUN, "CY1")
        return (*given[:at], low, *given[at:])

    wrong = edited(matter.procedure, StageKind.AS_FOUND, before_the_run)
    first, second, *_ = [one for one in printed(again(matter, wrong)).violations if one.subject == "CY1"]
    assert (first.invariant, second.invariant) == (Invariant.AT_STOP, Invariant.AT_STOP)
    at = wrong.stages[first.stage].steps
    assert (at[first.step].kind, at[second.step].kind) == (StepKind.RUN_TO_STOP, StepKind.READ)
    refused_for(again(matter, wrong), Invariant.AT_STOP, "CY1")


def test_a_setting_that_comes_up_while_the_cylinder_still_runs(pusher_at_its_stop: Runs) -> None:
    # Backed out, 30 bar hold the carriage short. Without the step that waits for it, coming up moves it.
    matter = pusher_at_its_stop(TaskKind.COMMISSION)
    wrong = edited(matter.procedure, StageKind.SET, without(StepKind.RAISE_TO_STOP, "RV1"), "RV1")
    result = again(matter, wrong)
    broken = {one.invariant for one in printed(result).violations if one.subject == "CY1"}
    assert broken == {Invariant.STILL, Invariant.AT_STOP}
    assert result.verdict is Verdict.REFUTED


def test_nothing_to_run_is_refuted(clay_mixer: Matter) -> None:
    result = again(clay_mixer, replace(clay_mixer.procedure, stages=()))
    assert (result.verdict, result.runs) == (Verdict.REFUTED, ())


# Independence


def imported(name: str) -> set[str]:
    """Modules of the package that a module imports, by name."""
    file = PACKAGE.parent / (name.replace(".", "/") + ".py")
    if not file.is_file():
        return set()
    found = set()
    for node in ast.walk(ast.parse(file.read_text(encoding="utf-8"))):
        if isinstance(node, ast.ImportFrom) and node.module and node.module.startswith("sheets"):
            found |= {node.module, *(f"{node.module}.{one.name}" for one in node.names)}
        elif isinstance(node, ast.Import):
            found |= {one.name for one in node.names if one.name.startswith("sheets")}
    return found


def test_replay_shares_the_model_and_not_the_search() -> None:
    reached: set[str] = set()
    waiting = {f"sheets.trial.{file.stem}" for file in Path(module.__file__).parent.glob("*.py")}
    while waiting:
        name = waiting.pop()
        reached.add(name)
        waiting |= imported(name) - reached
    assert "sheets.circuit.step" in reached
    for made in ("search", "judge", "in_use", "plan", "job", "stages", "rig", "skew"):
        assert f"sheets.procedure.{made}" not in reached


def test_every_invariant_has_a_test_that_breaks_it() -> None:
    """Each member is named in this file, so that none stands without a procedure that it refuses."""
    text = Path(__file__).read_text(encoding="utf-8")
    for invariant in Invariant:
        assert f"Invariant.{invariant.name}" in text
    at_the_end = {Invariant.ESTABLISHED, Invariant.READS_RIGHT, Invariant.ON_TARGET}
    at_the_end |= {Invariant.AS_IN_SERVICE, Invariant.GAUGES_OFF}
    assert set(CHECKS) == set(Invariant) - at_the_end
