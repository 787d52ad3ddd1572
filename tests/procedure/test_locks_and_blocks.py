"""Locks on valves and blocks under loads: what the job puts on, a later step takes off."""

from collections.abc import Callable

import pytest

from sheets.circuit.plant import MoveValve
from sheets.energy.held import stuck_loads
from sheets.pages.compose.matter import Matter
from sheets.pipeline import Described
from sheets.procedure.steps import StageKind, StepKind

WEIGHT = ("    moves: press slide\n", "    weight: 5 kN\n    moves: press slide\n")


def test_a_lock_comes_off_before_its_valve_is_turned(any_sample: Matter) -> None:
    locked: set[str] = set()
    for stage in any_sample.procedure.stages:
        for step in stage.steps:
            turned = {action.valve for action in step.actions if isinstance(action, MoveValve)}
            assert bool(step.data.get("unlock")) == bool(turned & locked), step
            locked -= turned
            if step.data.get("lock"):
                locked.add(step.subject)
    assert not locked


def test_every_sample_locks_a_valve(any_sample: Matter) -> None:
    """Else the test above would hold on nothing; the pusher closes its valve under pressure, unlocked."""
    locks = [step for stage in any_sample.procedure.stages for step in stage.steps if step.data.get("lock")]
    assert bool(locks) == (any_sample.machine.tag != "PU-03")


def test_opened_again_with_the_lock_taken_off(glaze_press: Matter) -> None:
    # HV1 is closed and locked for the settings, and is opened to relieve the line behind it.
    (again,) = (stage for stage in glaze_press.procedure.stages if stage.kind is StageKind.LOCK_AGAIN)
    said = [one.order for one in glaze_press.spoken(again) if one.step.subject == "HV1"]
    assert said == ["Take your lock off. Open pressure line valve HV1 slowly. Leave it open."]


@pytest.fixture(scope="module")
def held(refused: Callable[..., Matter]) -> Matter:
    return refused(
        "glaze_press", WEIGHT, ("absent: [accumulator, suspended load, ", "absent: [accumulator, ")
    )


def test_a_load_is_blocked_before_its_line_is_relieved(held: Matter) -> None:
    for kind in (StageKind.ISOLATE, StageKind.LOCK_AGAIN):
        (stage,) = (stage for stage in held.procedure.stages if stage.kind is kind)
        kinds = [step.kind for step in stage.steps]
        relieving = min(
            place for place, one in enumerate(kinds) if one in (StepKind.OPEN_VENT, StepKind.WORK_LEVER)
        )
        assert kinds.index(StepKind.ISOLATE) < kinds.index(StepKind.BLOCK) < relieving


def test_a_block_comes_out_when_the_machine_carries_the_load(held: Matter) -> None:
    last = held.procedure.stages[-1]
    kinds = [step.kind for step in last.steps]
    assert kinds.index(StepKind.START) < kinds.index(StepKind.UNBLOCK) < kinds.index(StepKind.WATCH)
    said = next(one for one in held.spoken(last) if one.step.kind is StepKind.UNBLOCK)
    assert "press slide (CY1)" in said.order


def test_nothing_is_blocked_where_nothing_is_held_up(any_sample: Matter) -> None:
    kinds = {step.kind for stage in any_sample.procedure.stages for step in stage.steps}
    assert not kinds & {StepKind.BLOCK, StepKind.UNBLOCK}


def test_a_load_that_only_a_dead_solenoid_could_lower_is_blocked(held: Matter) -> None:
    # All four ports of DV1 are blocked at rest, and its solenoids are dead: the oil under CY1 can't leave.
    said = [
        one.order
        for stage in held.procedure.stages
        for one in held.spoken(stage)
        if one.step.kind is StepKind.BLOCK
    ]
    assert said == [
        "Block press slide (CY1). See the load rest on the block.",
        "Check that press slide (CY1) still rests on its block.",
    ]


CENTRE = "      centre: []                       # all four ports blocked\n"


@pytest.mark.parametrize(
    ("centre", "drives", "stuck"),
    [
        ("[]", "retracting", True),
        ("[A to T]", "retracting", False),  # the way out of A stands open at rest
        ("[B to T]", "retracting", True),  # the load presses out of A
        ("[B to T]", "extending", False),
        ("[A to T]", "extending", True),
    ],
)
def test_what_lets_a_load_down_is_a_way_for_the_oil_under_it(
    changed: Callable[..., Described], centre: str, drives: str, stuck: bool
) -> None:
    weight = (WEIGHT[0], f"{WEIGHT[1]}    weight drives: {drives}\n")
    absent = ("absent: [accumulator, suspended load, ", "absent: [accumulator, ")
    described = changed("glaze_press", weight, absent, (CENTRE, f"      centre: {centre}\n"))
    assert stuck_loads(described.machine, described.circuit) == ({"CY1"} if stuck else set())


def test_a_lever_lets_a_load_down(changed: Callable[..., Described]) -> None:
    moves = "    moves: pusher carriage\n"
    described = changed(
        "kiln_pusher",
        (moves, f"    weight: 5 kN\n{moves}"),
        ("absent: [accumulator, suspended load, ", "absent: [accumulator, "),
    )
    assert stuck_loads(described.machine, described.circuit) == set()
