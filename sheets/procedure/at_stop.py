"""Whether a cylinder really gets to the stop at which a state holds it, and what else happens on the way.

A state with a cylinder at its stop is solved as if it stood there. Here it runs: from anywhere, at every
setting that the adjuster may have, with its load and without, with one fault, and with one slip.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace

from sheets.amounts import Amount, bar
from sheets.circuit.faults import CAN_MOVE, faults_of, under_fault
from sheets.circuit.plant import AtStop, MoveValve, PlantState
from sheets.circuit.step import Outcome, StepOutcome
from sheets.energy.trapped import find_trapped
from sheets.machine.parts import DirectionalValve
from sheets.procedure.case import Case
from sheets.procedure.changes import Change, apply
from sheets.procedure.conditions import (
    Condition,
    Failure,
    moving,
    over_rating,
    starved,
    unestablished,
)
from sheets.procedure.faulted import fault_data, without_load
from sheets.procedure.work import Work

RUN_SHARE = 0.90
"""Policy: share of a window's bottom at which a cylinder already runs all the way to its stop. It stands
there before the reading that is set can come near its window."""


@dataclass(frozen=True, kw_only=True)
class Approach:
    """How a cylinder gets to the stop at which a state holds it."""

    at: AtStop
    lever: MoveValve
    """What is held so that it runs; let go of, it stands."""
    speed_m_s: float
    """Highest speed on the way."""


def held_at(changes: Sequence[Change]) -> AtStop | None:
    """The cylinder that a state holds at its stop, if it does; options never hold two."""
    return next((change for change in changes if isinstance(change, AtStop)), None)


def find_approach(
    case: Case, changes: Sequence[Change], adjuster: str, work: Work
) -> Approach | Failure | None:
    """How the cylinder of a state gets to its stop, or what is against it; None for a state without one.

    The state itself must have been judged before. With the adjuster from ``RUN_SHARE`` of its window's bottom
    up to its stop the cylinder must run to its stop and nowhere else, and nothing but it may move, with the
    work loads and without. With any one valve elsewhere no rating may be passed: a rod side that is shut
    stands above the supply. A lever must run it that stops it when let go of. With any one fault it stands or
    runs the same way; at its stop it stays. Whatever stands under pressure then must have a way to tank with
    the drives off.
    """
    at = held_at(changes)
    if at is None:
        return None
    rest = tuple(change for change in changes if change != at)
    state = apply(case.base, rest)
    setting = case.targets.settings[adjuster]
    levels = (
        RUN_SHARE * setting.low_bar,
        setting.target_bar,
        setting.high_bar,
        case.site(adjuster).highest_bar,
    )
    states = [state.adjusted(adjuster, level) for level in levels]
    both = [*states, *(one.unloaded() for one in states)]
    runs = work.run(case.circuit, [(one, None) for one in both], runs=(at.actuator,))
    for level, run in zip((*levels, *levels), runs, strict=True):
        failure = _on_the_way(case, run, at) or _short(run, at, level)
        if failure is not None:
            return failure if run.state.loaded else without_load(failure)
    lever = _lever(case, rest, at, work)
    if lever is None:
        return _against(at, cause="no lever")
    failure = (
        without_load(_with_a_slip(case, both[-1], at, work))
        or _with_a_fault(case, states[-1], runs[len(states) - 1], at, work)
        or without_load(_with_a_fault(case, both[-1], runs[-1], at, work))
        or _shut_in(case, runs[-1], at)
    )
    if failure is not None:
        return failure
    speeds = (abs(one.speeds[at.actuator]) for run in runs for one in run.passes)
    return Approach(at=at, lever=lever, speed_m_s=max(speeds))


def _against(at: AtStop, **data: Amount | str) -> Failure:
    return Failure(condition=Condition.REACHES, data={"part": at.actuator, **data})


def _on_the_way(case: Case, run: StepOutcome, at: AtStop) -> Failure | None:
    """The cylinder runs one way; nothing else moves, nothing passes a rating."""
    for solution in run.passes:
        failure = unestablished(solution, case.trusted_ports) or starved(solution) or over_rating(solution)
        if failure is not None:
            return failure
        others = replace(solution, moving=solution.moving - {at.actuator})
        if others.moving:
            return moving(others)
    if run.outcome in (Outcome.CYCLING, Outcome.NOT_ESTABLISHED):
        return Failure(condition=Condition.ESTABLISHED, data={"port": ""})
    if run.state.travel[at.actuator] not in ("between", at.stop):
        speed_m_s = max(abs(solution.speeds[at.actuator]) for solution in run.passes)
        return _against(at, cause="away", speed=Amount(value=speed_m_s, quantity="speed_m_s"))
    return None


def _short(run: StepOutcome, at: AtStop, level_bar: float) -> Failure | None:
    if run.state.travel[at.actuator] == at.stop and run.outcome is Outcome.STILL:
        return None
    return _against(at, cause="short", setting=bar(level_bar))


def _lever(case: Case, rest: tuple[Change, ...], at: AtStop, work: Work) -> MoveValve | None:
    """The lever that makes it run: with it alone back in its rest position nothing moves.

    Also from where it runs, and from its stop: what was under pressure stays so.
    """
    for change in rest:
        if not isinstance(change, MoveValve):
            continue
        part = case.machine.parts[change.valve]
        if not isinstance(part, DirectionalValve) or part.operated_by != "lever":
            continue
        home = case.circuit.positions[change.valve][0]
        let_go = [(one.moved(change.valve, home), None) for one in _places(case, rest, at, work)]
        dropped = work.run(case.circuit, let_go, runs=())
        if all(one.outcome is Outcome.STILL and over_rating(one.solution) is None for one in dropped):
            return change
    return None


def _places(case: Case, rest: tuple[Change, ...], at: AtStop, work: Work) -> Iterator[PlantState]:
    """Where it may stand when a lever is let go of: anywhere, running, at its stop; with load and without."""
    base = apply(case.base, rest)
    for held in (base, base.unloaded()):
        (run,) = work.run(case.circuit, [(held, None)], runs=(at.actuator,))
        yield from (held, replace(held, pressures_bar=run.passes[0].pressures_bar), run.state)


def _with_a_slip(case: Case, state: PlantState, at: AtStop, work: Work) -> Failure | None:
    """With one valve elsewhere and nothing to push, no rating is passed."""
    slips = [
        (state.moved(valve, other), None)
        for valve, positions in case.circuit.positions.items()
        for other in positions
        if other != state.positions[valve]
    ]
    for run in work.run(case.circuit, slips, runs=(at.actuator,)):
        for solution in run.passes:
            if not solution.established:
                return unestablished(solution)
            failure = over_rating(solution)
            if failure is not None:
                return failure
    return None


def _with_a_fault(case: Case, state: PlantState, run: StepOutcome, at: AtStop, work: Work) -> Failure | None:
    """With one spool stuck or leaking, or one coil dead, it stands or runs that way; at its stop it stays.

    From rest, from where it runs and from its stop, with what was under pressure staying so.
    """
    running = replace(state, pressures_bar=run.passes[0].pressures_bar)
    for fault in faults_of(case.machine, case.circuit, state, kinds=CAN_MOVE):
        for one, may_run in ((state, (at.actuator,)), (running, (at.actuator,)), (run.state, ())):
            circuit, faulty = under_fault(case.circuit, one, fault)
            (outcome,) = work.run(circuit, [(faulty, None)], runs=may_run)
            failure = _on_the_way(case, outcome, at)
            if failure is None and not may_run:
                failure = moving(outcome.solution)
            if failure is not None:
                passed = failure.condition is Condition.WITHIN
                condition = Condition.WITHIN if passed else Condition.BARRED
                return Failure(condition=condition, data={**failure.data, **fault_data(fault)})
    return None


def _shut_in(case: Case, run: StepOutcome, at: AtStop) -> Failure | None:
    """What stands under pressure there has a way to tank with the drives off."""
    for line in _kept(case, run):
        return _against(at, cause="shut in", line=line)
    return None


def _kept(case: Case, run: StepOutcome) -> Iterator[str]:
    for volume in find_trapped(case.machine, case.circuit).without_relief:
        if run.solution.pressures_bar[volume.node] > case.policies.zero_limit_bar:
            yield case.circuit.nodes[volume.node].name
