"""What the job is for decides what is read, what is set, and what counts as unknown."""

from collections.abc import Callable, Iterator

import pytest

from sheets.circuit.plant import Adjust
from sheets.circuit.verdict import Verdict
from sheets.errors import InputError
from sheets.machine.site import Policies
from sheets.pages.compose.matter import Matter
from sheets.pages.document import PowerState, SheetKind
from sheets.pipeline import Described, content, steps, targets
from sheets.procedure.case import Case
from sheets.procedure.plan import make_procedure
from sheets.procedure.steps import Procedure, Stage, StageKind, Step, StepKind
from sheets.procedure.task import Task, TaskKind, named_task
from sheets.trial.replay import replay

Changed = Callable[..., Described]
SAMPLES = ("clay_mixer", "glaze_press", "kiln_pusher")


def job(changed: Changed, name: str, kind: TaskKind, part: str = "") -> Matter:
    matter = steps(changed(name), Task(kind=kind, part=part))
    assert matter.procedure.verdict is Verdict.ESTABLISHED
    return matter


def every_step(matter: Matter) -> Iterator[tuple[Stage, Step]]:
    for stage in matter.procedure.stages:
        for step in stage.steps:
            yield stage, step


def turned(matter: Matter) -> list[str]:
    """Adjusters that any step turns, in their order, each once."""
    return list(
        dict.fromkeys(
            action.adjuster
            for _, step in every_step(matter)
            for action in step.actions
            if isinstance(action, Adjust)
        )
    )


def kinds(matter: Matter) -> list[tuple[StageKind, str]]:
    return [(stage.kind, stage.adjuster) for stage in matter.procedure.stages]


# Read


@pytest.mark.parametrize("name", SAMPLES)
def test_reading_turns_no_screw(changed: Changed, name: str) -> None:
    matter = job(changed, name, TaskKind.READ)

    assert turned(matter) == []
    assert not {step.kind for _, step in every_step(matter)} & {StepKind.LOCK_NUT, StepKind.COME_UP}
    assert [kind for kind, _ in kinds(matter)] == [
        StageKind.ISOLATE,
        StageKind.DEADHEAD,
        StageKind.AS_FOUND,
        StageKind.LOCK_AGAIN,
        StageKind.RETURN,
    ]


@pytest.mark.parametrize(
    ("name", "read", "hidden"),
    [
        ("clay_mixer", ["PU1.load sensing", "PU1.compensator"], {"RV1": "PU1.compensator"}),
        ("glaze_press", ["PU1.compensator"], {"RV1": "PU1.compensator"}),
        ("kiln_pusher", ["RV1"], {}),
    ],
)
def test_what_another_hides_is_not_reached(
    changed: Changed, name: str, read: list[str], hidden: dict[str, str]
) -> None:
    # The compensator stands below the relief, so the relief never opens in service.
    matter = job(changed, name, TaskKind.READ)
    assert [step.subject for _, step in every_step(matter) if step.kind is StepKind.READ] == read
    told = {
        step.subject: step.data["hidden_by"]
        for _, step in every_step(matter)
        if step.kind is StepKind.NOT_REACHED
    }
    assert told == hidden


# Commission


@pytest.mark.parametrize("name", SAMPLES)
def test_commissioning_reads_nothing_as_found(changed: Changed, name: str) -> None:
    matter = job(changed, name, TaskKind.COMMISSION)
    assert StageKind.AS_FOUND not in {kind for kind, _ in kinds(matter)}
    assert not {step.kind for _, step in every_step(matter)} & {StepKind.LEAVE_ALONE, StepKind.READ}
    set_ones = [adjuster for kind, adjuster in kinds(matter) if kind is StageKind.SET]
    assert set_ones == list(matter.procedure.order.sequence)


@pytest.mark.parametrize(
    ("name", "limiting"),
    [
        ("clay_mixer", ["RV1", "PU1.compensator"]),
        ("glaze_press", ["RV1", "PU1.compensator"]),
        ("kiln_pusher", ["RV1"]),
    ],
)
def test_limiting_adjusters_are_backed_out_before_the_first_start(
    changed: Changed, name: str, limiting: list[str]
) -> None:
    # Not the load-sensing control: it keeps a difference, and limits nothing against tank.
    matter = job(changed, name, TaskKind.COMMISSION)
    before: list[str] = []
    for stage, step in every_step(matter):
        if step.kind is StepKind.START:
            break
        if step.kind is StepKind.BACK_OUT:
            assert not stage.powered
            assert isinstance(step.actions[0], Adjust)
            site = next(site for site in matter.circuit.adjusters if site.id == step.subject)
            assert step.actions[0].setting_bar == site.lowest_bar
            before.append(step.subject)
    assert before == limiting


def first(matter: Matter, kind: StepKind, adjuster: str) -> Step:
    return next(
        step
        for stage, step in every_step(matter)
        if step.kind is kind and stage.kind is StageKind.SET and stage.adjuster == adjuster
    )


def test_bands_hold_an_unknown_screw_up_to_its_stop(changed: Changed) -> None:
    mixer = job(changed, "clay_mixer", TaskKind.COMMISSION)
    # Nobody knows the load-sensing control: its stop is 34 bar, on G1's divisions of 2 bar upward 36 (the
    # model reads 34.001). RV1, backed out, reads 50 bar and some more at full flow, 10 % more at most: 56.
    standby = first(mixer, StepKind.START, "RV1").reading
    held = first(mixer, StepKind.HOLD_VALVE, "RV1").reading
    assert standby is not None
    assert held is not None
    assert (standby.adjuster, standby.low_bar, standby.high_bar) == ("PU1.load sensing", 0.0, 36.0)
    assert (held.adjuster, held.low_bar, held.high_bar) == ("RV1", 0.0, 56.0)
    # The pusher's relief, backed out, reads 30 bar and some more, 3 bar more at most: 34. In 'set' it is out
    # by 10 % at most, 198.3: 200.
    pusher = job(changed, "kiln_pusher", TaskKind.COMMISSION)
    known = job(changed, "kiln_pusher", TaskKind.SET)
    closing = first(pusher, StepKind.CLOSE_GRADUALLY, "RV1").reading
    sure = first(known, StepKind.CLOSE_GRADUALLY, "RV1").reading
    assert closing is not None
    assert sure is not None
    assert (closing.low_bar, closing.high_bar) == (0.0, 34.0)
    assert sure.high_bar == 200.0


def test_a_band_never_passes_what_must_never_be_exceeded(changed: Changed) -> None:
    for name in SAMPLES:
        for kind in (TaskKind.COMMISSION, TaskKind.SET, TaskKind.READ):
            for _, step in every_step(job(changed, name, kind)):
                if step.reading is not None:
                    assert step.reading.stop_above_bar <= step.reading.never_exceed_bar


# Replace


@pytest.mark.parametrize(
    ("name", "part", "set_ones", "backed_out"),
    [
        # RV1 needs the compensator out of its way, so that one is set again; standby isn't touched.
        ("clay_mixer", "RV1", ["RV1", "PU1.compensator"], ["RV1"]),
        ("glaze_press", "RV1", ["RV1", "PU1.compensator"], ["RV1"]),
        # The pump brings its controls; RV1 stays as it is.
        ("clay_mixer", "PU1", ["PU1.compensator", "PU1.load sensing"], ["PU1.compensator"]),
        ("glaze_press", "PU1", ["PU1.compensator"], ["PU1.compensator"]),
        ("kiln_pusher", "RV1", ["RV1"], ["RV1"]),
    ],
)
def test_replaced_part_alone_is_set_with_what_had_to_move(
    changed: Changed, name: str, part: str, set_ones: list[str], backed_out: list[str]
) -> None:
    matter = job(changed, name, TaskKind.REPLACE, part)
    assert [adjuster for kind, adjuster in kinds(matter) if kind is StageKind.SET] == set_ones
    assert set(turned(matter)) == set(set_ones)
    unpowered = [
        step.subject
        for stage, step in every_step(matter)
        if not stage.powered and step.kind is StepKind.BACK_OUT
    ]
    assert unpowered == backed_out


def test_new_adjusters_are_neither_read_nor_left_alone(changed: Changed) -> None:
    matter = job(changed, "clay_mixer", TaskKind.REPLACE, "PU1")
    touched = {
        step.subject
        for _, step in every_step(matter)
        if step.kind in (StepKind.READ, StepKind.NOT_REACHED, StepKind.LEAVE_ALONE)
    }
    assert touched == {"RV1"}  # what is old and hidden, by the new compensator that is backed out
    (hidden,) = [step for _, step in every_step(matter) if step.kind is StepKind.NOT_REACHED]
    assert hidden.data["hidden_by"] == "PU1.compensator"


def test_a_part_without_an_adjuster_has_nothing_to_set(changed: Changed) -> None:
    matter = steps(changed("kiln_pusher"), Task(kind=TaskKind.REPLACE, part="CY1"))
    assert matter.procedure.verdict is Verdict.REFUTED
    assert matter.procedure.stages == ()
    assert [(one.code, one.subject) for one in matter.procedure.findings] == [("nothing_to_set", "CY1")]


# Naming a task


@pytest.mark.parametrize(
    ("kind", "part", "said"),
    [
        ("set", "RV1", "belongs to the task replace"),
        ("read", "RV1", "belongs to the task replace"),
        ("replace", None, "belongs to the task replace"),
        ("replace", "RV9", "There is no part"),
    ],
)
def test_tasks_that_nobody_can_mean(kind: str, part: str | None, said: str) -> None:
    with pytest.raises(InputError) as caught:
        named_task(kind, part, ("RV1", "PU1"))
    (problem,) = caught.value.problems
    assert problem.where == "--part"
    assert said in problem.what
    assert problem.fix
    if part == "RV9":
        assert "RV9" in problem.what
        assert "RV1, PU1" in problem.fix


def test_tasks_by_their_words() -> None:
    for kind in ("read", "set", "commission"):
        assert named_task(kind, None, ("RV1",)) == Task(kind=TaskKind(kind))
    assert named_task("replace", "RV1", ("RV1",)) == Task(kind=TaskKind.REPLACE, part="RV1")
    assert Task() == Task(kind=TaskKind.SET)


# Windows


def places(procedure: Procedure, kind: StepKind) -> list[StageKind]:
    return [stage.kind for stage in procedure.stages for step in stage.steps if step.kind is kind]


@pytest.mark.parametrize("kind", [TaskKind.SET, TaskKind.COMMISSION, TaskKind.READ])
@pytest.mark.parametrize("name", SAMPLES)
def test_settings_share_one_powered_window(changed: Changed, name: str, kind: TaskKind) -> None:
    # No state opens a line: people are cleared and supplies restored for the first stage and the return only.
    procedure = job(changed, name, kind).procedure
    first_powered = next(stage for stage in procedure.stages if stage.powered)
    for tick in (StepKind.CLEAR_PEOPLE, StepKind.REMOVE_LOCKS, StepKind.TELL_AFTER):
        assert places(procedure, tick) == [first_powered.kind, StageKind.RETURN]
    assert places(procedure, StepKind.WARM_OIL) == [first_powered.kind]
    assert places(procedure, StepKind.ISOLATE)[0] is StageKind.ISOLATE
    assert set(places(procedure, StepKind.ISOLATE)) == {StageKind.ISOLATE, StageKind.LOCK_AGAIN}


FIXED = (
    ("    accuracy class: 0.25\n    fitted at: [TP1]\n", "    accuracy class: 0.25\n"),
    ("  pump line: [PU1.P, RV1.P, TP1.P, HV2.A]", "  pump line: [PU1.P, RV1.P, TP1.P, G1.P, HV2.A]"),
)


def with_policies(described: Described, policies: Policies) -> tuple[Procedure, Verdict]:
    found = targets(described)
    case = Case(described.machine, described.circuit, found, policies)
    procedure = make_procedure(case, Task())
    run = replay(described.machine, described.circuit, found, policies, procedure)
    return procedure, run.verdict


def test_machine_with_a_fixed_gauge_has_no_lockout(changed: Changed) -> None:
    matter = steps(changed("kiln_pusher", *FIXED))
    procedure = matter.procedure

    assert (procedure.verdict, matter.replay.verdict) == (Verdict.ESTABLISHED,) * 2
    assert procedure.search.found()["RV1"].gauge.test_point == ""
    assert [stage.kind for stage in procedure.stages] == [
        StageKind.DEADHEAD,
        StageKind.AS_FOUND,
        StageKind.SET,
        StageKind.CHECK,
        StageKind.RETURN,
    ]
    # Nothing is locked, so no page may say that it is.
    assert all(stage.powered for stage in procedure.stages)
    locking = {
        StepKind.ISOLATE,
        StepKind.REMOVE_LOCKS,
        StepKind.RESTORE_SUPPLY,
        StepKind.FIT_GAUGE,
        StepKind.REMOVE_GAUGE,
    }
    assert not {step.kind for _, step in every_step(matter)} & locking
    assert places(procedure, StepKind.CLEAR_PEOPLE) == [StageKind.AS_FOUND, StageKind.RETURN]


@pytest.mark.parametrize("kind", [TaskKind.SET, TaskKind.COMMISSION])
def test_without_a_lockout_the_drive_is_stopped_before_any_valve_or_screw(
    changed: Changed, kind: TaskKind
) -> None:
    matter = steps(changed("kiln_pusher", *FIXED), Task(kind=kind))
    assert matter.replay.verdict is Verdict.ESTABLISHED
    (deadhead,) = [stage for stage in matter.procedure.stages if stage.kind is StageKind.DEADHEAD]
    kinds_there = [step.kind for step in deadhead.steps]
    assert kinds_there[:2] == [StepKind.TELL_BEFORE, StepKind.PRESS_STOP]
    assert kinds_there.count(StepKind.BACK_OUT) == (1 if kind is TaskKind.COMMISSION else 0)


def test_a_site_may_want_lockouts_always(changed: Changed) -> None:
    described = changed("kiln_pusher", *FIXED)
    always = described.policies.model_copy(update={"lockout_always": True})
    procedure, replayed = with_policies(described, always)

    assert (procedure.verdict, replayed) == (Verdict.ESTABLISHED,) * 2
    assert [(stage.kind, stage.powered) for stage in procedure.stages if not stage.powered] == [
        (StageKind.ISOLATE, False),
        (StageKind.DEADHEAD, False),
        (StageKind.LOCK_AGAIN, False),
    ]
    assert StepKind.FIT_GAUGE not in {step.kind for stage in procedure.stages for step in stage.steps}


def test_banners_of_a_job_without_lockouts_say_powered(changed: Changed) -> None:
    document, _ = content(steps(changed("kiln_pusher", *FIXED)))
    banners = [
        section.banner.state
        for section in document.sections
        if section.kind is SheetKind.WORK_INSTRUCTION and section.banner is not None
    ]
    assert len(banners) == 5
    assert set(banners) == {PowerState.POWERED}
