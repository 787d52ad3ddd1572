"""What must hold in the stages of any machine, held on every sample."""

from collections.abc import Callable, Iterator

import pytest

from sheets.circuit.plant import Adjust
from sheets.machine.parts import ElectricMotor, HandValve
from sheets.machine.screws import screws_of
from sheets.pages.compose.matter import Matter
from sheets.pipeline import Described
from sheets.pipeline import steps as compute
from sheets.procedure.steps import Stage, StageKind, Step, StepKind

SCREW = {
    StepKind.BACK_OUT,
    StepKind.RUN_IN,
    StepKind.TURN_BELOW,
    StepKind.COME_UP,
    StepKind.LOCK_NUT,
}
AT_REST = {StepKind.PRESS_STOP, StepKind.BACK_OUT, StepKind.RUN_IN}
"""In a powered window, but with the drive off: a gauge has nothing to show."""


def every_step(matter: Matter) -> Iterator[tuple[Stage, Step]]:
    for stage in matter.procedure.stages:
        for step in stage.steps:
            yield stage, step


def stages(matter: Matter, kind: StageKind) -> list[Stage]:
    return [stage for stage in matter.procedure.stages if stage.kind is kind]


def places(stage: Stage, kind: StepKind) -> list[int]:
    return [place for place, step in enumerate(stage.steps) if step.kind is kind]


def test_stages_in_their_order(any_sample: Matter) -> None:
    sequence = any_sample.procedure.order.sequence
    found = [(stage.kind, stage.adjuster, stage.powered) for stage in any_sample.procedure.stages]

    assert found == [
        (StageKind.ISOLATE, "", False),
        (StageKind.DEADHEAD, "", False),
        (StageKind.AS_FOUND, "", True),
        *((StageKind.SET, adjuster, True) for adjuster in sequence),
        (StageKind.CHECK, "", True),
        (StageKind.LOCK_AGAIN, "", False),
        (StageKind.RETURN, "", True),
    ]


@pytest.mark.parametrize("kind", [StageKind.ISOLATE, StageKind.LOCK_AGAIN])
def test_acts_of_a_lockout_in_their_order(any_sample: Matter, kind: StageKind) -> None:
    (stage,) = stages(any_sample, kind)
    acts = (
        StepKind.PRESS_STOP,
        StepKind.ISOLATE,
        StepKind.OPEN_VENT,
        StepKind.WORK_LEVER,
        StepKind.ATTEMPT_START,
        StepKind.VERIFY_DEAD,
        StepKind.FIT_GAUGE,
        StepKind.VERIFY_ZERO,
        StepKind.REMOVE_GAUGE,
    )
    # Valves that were shut go back under lock, and a line that they lead to may be relieved then, while the
    # gauges still show: that lever is no part of the first relieving.
    put_back = [place for place in places(stage, StepKind.SET_VALVE) if stage.steps[place].data["back"]]
    order = [
        place
        for act in acts
        for place in places(stage, act)
        if not (act is StepKind.WORK_LEVER and put_back and place > put_back[0])
    ]

    assert order == sorted(order)
    for verified in (StepKind.ISOLATE, StepKind.VERIFY_DEAD):
        assert {stage.steps[place].subject for place in places(stage, verified)} == set(
            any_sample.machine.energy
        )
    assert len(places(stage, StepKind.ATTEMPT_START)) == len(any_sample.machine.controls.start)
    assert {stage.steps[place].subject for place in places(stage, StepKind.PRESS_STOP)} == set(
        any_sample.circuit.drives
    )


@pytest.mark.parametrize("kind", [StageKind.ISOLATE, StageKind.LOCK_AGAIN])
def test_zero_is_found_at_every_gauge(any_sample: Matter, kind: StageKind) -> None:
    (stage,) = stages(any_sample, kind)
    used = {state.gauge.gauge for state in any_sample.procedure.search.found().values()}
    checks = [stage.steps[place] for place in places(stage, StepKind.VERIFY_ZERO)]
    first = places(stage, StepKind.VERIFY_ZERO)[0]
    before = [step.trace for step in stage.steps[:first] if step.trace is not None]

    assert {check.subject for check in checks} == used
    for check in checks:
        node = any_sample.circuit.node_of[f"{check.data['test_point']}.P"]
        assert before[-1].pressures_bar[node] == pytest.approx(0.0, abs=0.1)
        hides = check.data["hides"]
        assert not isinstance(hides, str)
        assert 0.0 < hides.value <= 2.0  # policy: a gauge that can hide more than 2 bar verifies nothing


def test_zero_that_is_not_reached_refuses(changed: Callable[..., Described]) -> None:
    # Without the bleed valve nothing relieves the pump line of the press: its valve's centre blocks all
    # ports.
    plug = (
        "    name: bleed valve\n    designation: 1-H1.3\n",
        "    name: bleed valve\n    plugged: [A]\n    designation: 1-H1.3\n",
    )
    line = ("[PU1.P, RV1.P, TP1.P, BV1.A, HV1.A]", "[PU1.P, RV1.P, TP1.P, HV1.A]")
    matter = compute(changed("glaze_press", plug, line))

    assert "zero_not_reached" in {finding.code for finding in matter.procedure.findings}


def test_gauge_shows_at_the_second_lockout_that_it_moved(any_sample: Matter) -> None:
    (again,) = stages(any_sample, StageKind.LOCK_AGAIN)
    assert all(again.steps[place].data["moved"] for place in places(again, StepKind.VERIFY_ZERO))
    (first,) = stages(any_sample, StageKind.ISOLATE)
    assert not any(first.steps[place].data["moved"] for place in places(first, StepKind.VERIFY_ZERO))


def test_locked_stages_start_nothing(any_sample: Matter) -> None:
    for stage, step in every_step(any_sample):
        if not stage.powered:
            assert step.kind not in (StepKind.START, StepKind.RESTORE_SUPPLY, StepKind.REMOVE_LOCKS)
            assert step.kind not in SCREW
            assert step.trace is None or step.trace.drive_kw == 0.0


def test_people_locks_and_supplies_before_the_first_start(any_sample: Matter) -> None:
    for kind in (StageKind.AS_FOUND, StageKind.RETURN):
        (stage,) = stages(any_sample, kind)
        ticks = (StepKind.CLEAR_PEOPLE, StepKind.REMOVE_LOCKS, StepKind.TELL_AFTER, StepKind.RESTORE_SUPPLY)
        order = [place for tick in ticks for place in places(stage, tick)]
        assert order == sorted(order)
        assert order[-1] < places(stage, StepKind.START)[0]
        restored = {stage.steps[place].subject for place in places(stage, StepKind.RESTORE_SUPPLY)}
        assert restored == set(any_sample.machine.energy)


def test_as_found_reads_or_names_every_setting_before_any_screw(any_sample: Matter) -> None:
    (as_found,) = stages(any_sample, StageKind.AS_FOUND)
    told = [step.subject for step in as_found.steps if step.kind in (StepKind.READ, StepKind.NOT_REACHED)]

    assert sorted(told) == sorted(any_sample.procedure.order.sequence)
    assert not any(step.kind in SCREW for step in as_found.steps)
    for stage, step in every_step(any_sample):
        if stage is as_found:
            break
        assert step.kind not in SCREW


def test_each_setting_comes_up_from_below_is_locked_and_read_again(any_sample: Matter) -> None:
    for stage in stages(any_sample, StageKind.SET):
        came, locked, again = (
            places(stage, kind) for kind in (StepKind.COME_UP, StepKind.LOCK_NUT, StepKind.READ_AGAIN)
        )
        assert len(came) == len(locked) == len(again) == 1
        assert came[0] < locked[0] < again[0]
        below = places(stage, StepKind.TURN_BELOW) + places(stage, StepKind.BACK_OUT)
        assert below
        assert max(below) < came[0]
        choice = any_sample.procedure.search.found()[stage.adjuster].gauge
        for place in (*came, *locked, *again):
            reading = stage.steps[place].reading
            assert reading is not None
            assert reading.adjuster == stage.adjuster
            assert (reading.low_bar, reading.high_bar) == (choice.window.low_bar, choice.window.high_bar)


def test_turned_below_really_is_below_the_window(any_sample: Matter) -> None:
    for stage in stages(any_sample, StageKind.SET):
        for place in places(stage, StepKind.TURN_BELOW):
            reading = stage.steps[place].reading
            assert reading is not None
            assert (
                reading.expected_bar
                < any_sample.procedure.search.found()[stage.adjuster].gauge.window.low_bar
            )


def test_what_hides_a_setting_is_moved_away_without_power_and_after_backing_out(any_sample: Matter) -> None:
    found = any_sample.procedure.search.found()
    (as_found,) = stages(any_sample, StageKind.AS_FOUND)
    hidden = {step.subject for step in as_found.steps if step.kind is StepKind.NOT_REACHED}

    assert hidden == {adjuster for adjuster, state in found.items() if state.raised}
    for stage in stages(any_sample, StageKind.SET):
        raised = [change.adjuster for change in found[stage.adjuster].changes if isinstance(change, Adjust)]
        run_in = [stage.steps[place].subject for place in places(stage, StepKind.RUN_IN)]
        assert run_in == raised  # each once, and never in a stage that needs none
        if not raised:
            continue
        # One stop more ends the stage where the setting leaves a pump over a relief.
        stop, *_ = places(stage, StepKind.PRESS_STOP)
        (out,) = places(stage, StepKind.BACK_OUT)
        (start,) = places(stage, StepKind.START)
        assert stage.steps[out].subject == stage.adjuster
        assert stop < out < min(places(stage, StepKind.RUN_IN))
        assert max(places(stage, StepKind.RUN_IN)) < start
        # What was moved away is set itself, later.
        sequence = any_sample.procedure.order.sequence
        assert all(sequence.index(other) > sequence.index(stage.adjuster) for other in raised)


def test_every_powered_act_has_its_reading(any_sample: Matter) -> None:
    acts = 0
    for stage, step in every_step(any_sample):
        if not stage.powered or stage.kind is StageKind.RETURN:
            continue
        if step.trace is None or step.kind in AT_REST:
            continue
        acts += 1
        reading = step.reading
        assert reading is not None, step
        node = any_sample.circuit.node_of[f"{reading.test_point}.P"]
        assert reading.expected_bar == pytest.approx(step.trace.pressures_bar[node])
        assert reading.low_bar <= reading.expected_bar <= reading.high_bar <= reading.never_exceed_bar
        assert reading.high_bar <= reading.stop_above_bar <= reading.never_exceed_bar
        rating_bar = any_sample.circuit.nodes[node].rating_bar
        assert reading.never_exceed_bar < rating_bar
        assert reading.test_point in any_sample.machine.gauges[reading.gauge].fitted_at
    assert acts >= 5


def test_each_step_is_established_still_and_within_ratings(any_sample: Matter) -> None:
    acting = [(stage, step) for stage, step in every_step(any_sample) if step.trace is not None]
    assert acting
    for stage, step in acting:
        assert step.trace is not None
        assert step.trace.established
        assert step.trace.moving == frozenset(), (stage.kind, step.kind)
        for node, pressure_bar in zip(any_sample.circuit.nodes, step.trace.pressures_bar, strict=True):
            assert pressure_bar <= node.rating_bar, (node.name, step.kind)


def test_drives_carry_every_step(any_sample: Matter) -> None:
    motors = [part for part in any_sample.machine.parts.values() if isinstance(part, ElectricMotor)]
    most_kw = min(motor.power_kw * motor.service_factor for motor in motors)
    for _, step in every_step(any_sample):
        assert step.trace is None or step.trace.drive_kw <= most_kw


def test_vents_stay_open_until_every_gauge_is_off(any_sample: Matter) -> None:
    (again,) = stages(any_sample, StageKind.LOCK_AGAIN)
    vents = {again.steps[place].subject for place in places(again, StepKind.OPEN_VENT)}
    off = places(again, StepKind.REMOVE_GAUGE)
    fitted = [step.subject for _, step in every_step(any_sample) if step.kind is StepKind.FIT_GAUGE]

    assert sorted(again.steps[place].subject for place in off) == sorted(fitted)
    rest = {valve: positions[0] for valve, positions in any_sample.circuit.positions.items()}
    for vent in vents:
        if rest[vent] == "open":
            continue  # it was shut for the job, and opening it put it back
        closed = [place for place in places(again, StepKind.SET_VALVE) if again.steps[place].subject == vent]
        assert closed
        assert min(closed) > max(off)


def test_lines_behind_valves_that_went_back_are_relieved_before_gauges_come_off(any_sample: Matter) -> None:
    # What was shut in behind them stands in the line again once they open.
    (again,) = stages(any_sample, StageKind.LOCK_AGAIN)
    off = places(again, StepKind.REMOVE_GAUGE)
    for place in places(again, StepKind.WORK_LEVER):
        assert place < min(off)
    trace = again.steps[max(place for place, step in enumerate(again.steps) if step.trace)].trace
    assert trace is not None
    assert max(trace.pressures_bar) < 2.0


def test_valves_stand_as_in_service_at_the_end(any_sample: Matter) -> None:
    standing = {valve: positions[0] for valve, positions in any_sample.circuit.positions.items()}
    rest = dict(standing)
    for stage, step in every_step(any_sample):
        if stage.kind is StageKind.RETURN:
            break
        if step.kind is StepKind.OPEN_VENT:
            standing[step.subject] = "open"
        elif step.subject in standing and step.kind is not StepKind.WORK_LEVER:
            standing[step.subject] = str(step.data["position"])
    assert standing == rest


def test_valves_that_are_held_never_stay_held_over_a_stage(any_sample: Matter) -> None:
    for stage in any_sample.procedure.stages:
        held = [step.subject for step in stage.steps if step.kind is StepKind.HOLD_VALVE]
        let_go = [step.subject for step in stage.steps if step.kind is StepKind.LET_GO]
        assert held == let_go
        assert not any(isinstance(any_sample.machine.parts[valve], HandValve) for valve in held)


def test_windows_lie_in_what_was_given(any_sample: Matter) -> None:
    # A given window is cut inward, save what nobody reads: a fifth of a division. Readings convert by the
    # flow.
    for adjuster, state in any_sample.procedure.search.found().items():
        setting = any_sample.targets.settings[adjuster]
        if screws_of(any_sample.machine)[adjuster].adjuster.tolerance_bar is None:
            continue
        shift_bar = state.reading_bar - setting.target_bar
        slack_bar = 0.2 * state.gauge.graduation_bar + 0.02
        assert state.gauge.window.low_bar >= setting.low_bar + shift_bar - slack_bar
        assert state.gauge.window.high_bar <= setting.high_bar + shift_bar + slack_bar


def test_reading_to_come_to_lies_in_its_window(any_sample: Matter) -> None:
    for state in any_sample.procedure.search.found().values():
        window = state.gauge.window
        assert window.low_bar < state.gauge.target_bar < window.high_bar
        assert round((window.high_bar - window.low_bar) / state.gauge.graduation_bar) >= 2
        assert state.gauge.never_exceed_bar >= window.high_bar + state.gauge.graduation_bar - 1e-9
