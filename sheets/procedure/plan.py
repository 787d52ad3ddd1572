"""From test states and order to stages: isolate, deadhead, as found, set each, check, lock again, return.

No family of machines decides anything here. What stands in a stage follows from the test states that the
search found, from the order, and from trying each step on the plant as it is written.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

from sheets.amounts import Amount, Finding, Severity, bar
from sheets.circuit.model import AdjusterSite, Circuit
from sheets.circuit.plant import Adjust, MoveValve, PlantState, StartDrive, StopDrive
from sheets.circuit.solver import solve, solve_one
from sheets.circuit.verdict import Verdict
from sheets.energy.trapped import Trapped, find_trapped
from sheets.machine.model import Machine
from sheets.machine.parts import HandValve
from sheets.machine.site import Policies
from sheets.procedure.changes import apply
from sheets.procedure.conditions import (
    Failure,
    first_failure,
    moving,
    over_rating,
    starved,
    unestablished,
)
from sheets.procedure.gauges import error_bar
from sheets.procedure.order import derive_order
from sheets.procedure.rig import Rig
from sheets.procedure.search import NotFound, Search, TestState, find_test_states, running_rest
from sheets.procedure.steps import Procedure, Stage, StageKind, StepKind
from sheets.targets.settings import Targets

_STUCK_FACTOR = 50.0
"""An adjuster stuck shut, as a multiple of the end of its range: it limits nothing."""
BELOW_SHARE = 0.95
"""How far below its window a setting is brought, as a share of the window's bottom, before it comes up."""
SAME_READING_BAR = 0.05
"""A valve that others need may stay in place if it shifts a reading by less than this."""


@dataclass(frozen=True, kw_only=True)
class _Job:
    """What the stages are written from."""

    machine: Machine
    circuit: Circuit
    targets: Targets
    policies: Policies
    found: dict[str, TestState]
    sequence: tuple[str, ...]
    shown: dict[str, TestState]
    """As-found states: adjusters that read at their target without another being moved out of the way."""
    line_up: tuple[MoveValve, ...]
    """Hand valves that are put in place before the first start."""


def make_procedure(machine: Machine, circuit: Circuit, targets: Targets, policies: Policies) -> Procedure:
    """Search, order, and write the stages; refusals are findings, and leave the stages empty."""
    search = find_test_states(machine, circuit, targets, policies)
    found = search.found()
    order = derive_order(found, targets)
    trapped = find_trapped(machine, circuit)
    lost = [answer for answer in search.answers.values() if isinstance(answer, NotFound)]
    findings = [*order.findings, *(finding for state in found.values() for finding in state.findings)]
    findings += [_cannot_set(answer) for answer in lost]
    stages: tuple[Stage, ...] = ()
    if order.sequence and not lost:
        job = _prepare(machine, circuit, targets, policies, search, order.sequence)
        stages, simulated = _write(job)
        findings += simulated
    return Procedure(
        verdict=_verdict(findings, lost, stages),
        stages=stages,
        search=search,
        order=order,
        trapped=trapped,
        findings=tuple(findings),
    )


def _verdict(findings: list[Finding], lost: list[NotFound], stages: tuple[Stage, ...]) -> Verdict:
    severities = {finding.severity for finding in findings}
    if Severity.NOT_ESTABLISHED in severities:
        return Verdict.NOT_ESTABLISHED
    if any(answer.verdict is Verdict.NOT_FOUND for answer in lost):
        return Verdict.NOT_FOUND
    if Severity.REFUSED in severities or not stages:
        return Verdict.REFUTED
    return Verdict.ESTABLISHED


def _cannot_set(answer: NotFound) -> Finding:
    return Finding(
        code="cannot_be_set",
        severity=Severity.REFUSED,
        subject=answer.adjuster,
        data={
            **answer.failure.data,
            "condition": answer.failure.condition.value,
            "states": Amount(value=float(answer.states), quantity="count"),
        },
    )


def _prepare(
    machine: Machine,
    circuit: Circuit,
    targets: Targets,
    policies: Policies,
    search: Search,
    sequence: tuple[str, ...],
) -> _Job:
    found = search.found()
    base = running_rest(circuit, targets)
    shown = {id_: state for id_, state in found.items() if not state.raised}
    wished = tuple(
        dict.fromkeys(
            change
            for id_ in sequence
            for change in found[id_].changes
            if isinstance(change, MoveValve) and isinstance(machine.parts[change.valve], HandValve)
        )
    )
    line_up = wished if _may_stand_before_start(circuit, base, wished) else ()
    if any(not _still_serves(circuit, targets, base, line_up, found[id_]) for id_ in sequence):
        line_up = ()
    return _Job(
        machine=machine,
        circuit=circuit,
        targets=targets,
        policies=policies,
        found=found,
        sequence=sequence,
        shown=shown,
        line_up=line_up,
    )


def _may_stand_before_start(circuit: Circuit, base: PlantState, moves: tuple[MoveValve, ...]) -> bool:
    """Whether a start with these valves moved stays within ratings, also with any one adjuster stuck shut.

    If it doesn't, the drive starts unloaded and the valves are closed in increments under the gauge.
    """
    state = apply(base, moves)
    states = [state.adjusted(site.id, _STUCK_FACTOR * site.highest_bar) for site in circuit.adjusters]
    solved = solve(circuit, [state, *states])
    return all(
        unestablished(solution) is None and over_rating(solution) is None
        for solution in map(solved.one, range(len(solved)))
    )


def _still_serves(
    circuit: Circuit, targets: Targets, base: PlantState, line_up: tuple[MoveValve, ...], state: TestState
) -> bool:
    """Whether an adjuster's state still shows it with the valves of the others left in place."""
    site = _site(circuit, state.adjuster)
    solution = solve_one(circuit, apply(apply(base, line_up), state.changes), effects=True)
    return (
        first_failure(solution, site, targets.settings[state.adjuster].target_bar) is None
        and abs(solution.pressures_bar[site.controlled_node] - state.reading_bar) < SAME_READING_BAR
    )


def _site(circuit: Circuit, adjuster: str) -> AdjusterSite:
    return next(site for site in circuit.adjusters if site.id == adjuster)


def _write(job: _Job) -> tuple[tuple[Stage, ...], list[Finding]]:
    settings_bar = running_rest(job.circuit, job.targets).settings_bar
    rig = Rig(job.machine, job.circuit, job.circuit.rest_state(settings_bar))
    stages = [
        _isolate(job, rig, StageKind.ISOLATE),
        _deadhead(job, rig),
        _as_found(job, rig),
        *(_set(job, rig, adjuster) for adjuster in job.sequence),
        _check(job, rig),
        _isolate(job, rig, StageKind.LOCK_AGAIN),
        _return(job, rig),
    ]
    return tuple(stages), rig.findings


def _gauges(job: _Job) -> dict[str, str]:
    """Gauge to test point, as the test states ask for them, in the order of setting."""
    fitted: dict[str, str] = {}
    for adjuster in job.sequence:
        choice = job.found[adjuster].gauge
        fitted.setdefault(choice.gauge, choice.test_point)
    return _apart(job, fitted)


def _apart(job: _Job, fitted: dict[str, str]) -> dict[str, str]:
    """Two gauges never share a test point: the later one takes another on the same line."""
    taken: set[str] = set()
    result: dict[str, str] = {}
    for gauge, test_point in fitted.items():
        node = job.circuit.node_of[f"{test_point}.P"]
        others = [
            tp for tp in job.machine.gauges[gauge].fitted_at if job.circuit.node_of.get(f"{tp}.P") == node
        ]
        chosen = next((tp for tp in (test_point, *others) if tp not in taken), test_point)
        taken.add(chosen)
        result[gauge] = chosen
    return result


def _choice(job: _Job, rig: Rig, adjuster: str) -> None:
    """Points the rig at the gauge of an adjuster, at the test point where it really is."""
    choice = job.found[adjuster].gauge
    rig.gauge = replace(choice, test_point=rig.fitted.get(choice.gauge, choice.test_point))


def _isolate(job: _Job, rig: Rig, kind: StageKind) -> Stage:
    """Stop, isolate, relieve, verify; then gauges on, or valves back and gauges off."""
    machine, first = job.machine, kind is StageKind.ISOLATE
    if first:
        rig.say(StepKind.TELL_BEFORE)
    for drive in job.circuit.drives:
        rig.do(StepKind.PRESS_STOP, drive, StopDrive(drive=drive))
    for supply in machine.energy:
        rig.say(StepKind.ISOLATE, supply)
    trapped = find_trapped(machine, job.circuit, rig.state.positions)
    vents = {relief.valve for relief in trapped.reliefs if relief.stays}
    _relieve(job, rig, trapped)
    for control in machine.controls.start:
        rig.say(StepKind.ATTEMPT_START, control.name, where=control.where)
    for supply in machine.energy:
        rig.say(StepKind.VERIFY_DEAD, supply)
    if first:
        rig.fitted = _gauges(job)
        for gauge, test_point in rig.fitted.items():
            rig.say(StepKind.FIT_GAUGE, gauge, test_point=test_point)
    for gauge, test_point in rig.fitted.items():
        node = job.circuit.node_of[f"{test_point}.P"]
        residual = rig.state.pressures_bar[node]
        rig.say(
            StepKind.VERIFY_ZERO,
            gauge,
            test_point=test_point,
            hides=bar(error_bar(machine.gauges[gauge])),
            moved="" if first else "yes",
            vent="yes" if vents else "",
        )
        if residual > job.policies.zero_limit_bar:
            rig.findings.append(
                Finding(
                    code="zero_not_reached",
                    severity=Severity.REFUSED,
                    subject=test_point,
                    data={"pressure": bar(residual)},
                )
            )
    if not first:
        _put_back(job, rig, [valve for valve in job.circuit.positions if valve not in vents])
        for gauge, test_point in rig.fitted.items():
            rig.say(StepKind.REMOVE_GAUGE, gauge, test_point=test_point)
        _put_back(job, rig, sorted(vents))
    return Stage(kind=kind, powered=False, adjuster="", steps=rig.take_steps())


def _relieve(job: _Job, rig: Rig, trapped: Trapped) -> None:
    """Ways to tank, hand valves first; a lever goes to its ends and back."""
    for relief in trapped.reliefs:
        move = MoveValve(valve=relief.valve, position=relief.position)
        lines = ", ".join(job.circuit.nodes[node].name for node in relief.nodes)
        if relief.stays:
            rig.do(StepKind.OPEN_VENT, relief.valve, move, data={"lines": lines})
        else:
            back = MoveValve(valve=relief.valve, position=rig.state.positions[relief.valve])
            rig.do(
                StepKind.WORK_LEVER,
                relief.valve,
                move,
                back,
                data={"lines": lines, "position": relief.position},
            )


def _put_back(job: _Job, rig: Rig, valves: list[str]) -> None:
    """Hand valves that still stand where the job put them go back to rest."""
    for valve in valves:
        rest = job.circuit.positions[valve][0]
        if isinstance(job.machine.parts[valve], HandValve) and rig.state.positions[valve] != rest:
            rig.do(
                StepKind.SET_VALVE,
                valve,
                MoveValve(valve=valve, position=rest),
                data={"position": rest, "back": "yes"},
            )


def _deadhead(job: _Job, rig: Rig) -> Stage:
    """Valves as the settings need them, still locked; each with what would happen otherwise."""
    base = running_rest(job.circuit, job.targets)
    wanted = {move.valve: move.position for move in job.line_up}
    reasons = {
        change.valve: failure
        for adjuster in reversed(job.sequence)
        for change, failure in job.found[adjuster].reasons
        if isinstance(change, MoveValve)
    }
    for valve, positions in job.circuit.positions.items():
        position = wanted.get(valve, positions[0])
        move = MoveValve(valve=valve, position=position)
        if rig.state.positions[valve] != position or valve in wanted:
            reason = reasons.get(valve) or _otherwise(job, base, valve, position)
            vent = "yes" if valve not in wanted else ""
            rig.do(
                StepKind.SET_VALVE,
                valve,
                move,
                reason=reason,
                data={"position": position, "back": "", "vent": vent},
            )
            continue
        reason = _otherwise(job, base, valve, position)
        if reason is not None:
            rig.do(StepKind.CHECK_VALVE, valve, reason=reason, data={"position": position})
    return Stage(kind=StageKind.DEADHEAD, powered=False, adjuster="", steps=rig.take_steps())


def _otherwise(job: _Job, base: PlantState, valve: str, position: str) -> Failure | None:
    """What harm a start does with this valve alone elsewhere, everything else at rest."""
    for other in job.circuit.positions[valve]:
        if other != position:
            solution = solve_one(job.circuit, base.moved(valve, other))
            failure = moving(solution) or starved(solution) or over_rating(solution)
            if failure is not None:
                return failure
    return None


def _open_window(job: _Job, rig: Rig) -> None:
    """The ticks of a powered window, in order, up to the start."""
    rig.say(StepKind.CLEAR_TOOLS)
    rig.say(StepKind.CLEAR_PEOPLE)
    rig.say(StepKind.REMOVE_LOCKS)
    rig.say(StepKind.TELL_AFTER)
    for supply in job.machine.energy:
        rig.say(StepKind.RESTORE_SUPPLY, supply)


def _start(job: _Job, rig: Rig) -> None:
    for drive in job.circuit.drives:
        if drive not in rig.state.running:
            rig.do(StepKind.START, drive, StartDrive(drive=drive))


def _stop(job: _Job, rig: Rig) -> None:
    for drive in job.circuit.drives:
        if drive in rig.state.running:
            rig.do(StepKind.PRESS_STOP, drive, StopDrive(drive=drive))


def _enter(job: _Job, rig: Rig, state: TestState) -> None:
    """Brings the plant into an adjuster's state: hand valves in increments, then what must be held."""
    reasons = dict(state.reasons)
    for change in state.changes:
        if not isinstance(change, MoveValve) or rig.state.positions[change.valve] == change.position:
            continue
        by_hand = isinstance(job.machine.parts[change.valve], HandValve)
        rig.do(
            StepKind.CLOSE_GRADUALLY if by_hand else StepKind.HOLD_VALVE,
            change.valve,
            change,
            reason=reasons.get(change),
            data={"position": change.position},
        )


def _leave(job: _Job, rig: Rig, state: TestState) -> None:
    """Lets go of what was held, and opens what was closed under power."""
    for change in reversed(state.changes):
        if not isinstance(change, MoveValve) or change in job.line_up:
            continue
        rest = job.circuit.positions[change.valve][0]
        by_hand = isinstance(job.machine.parts[change.valve], HandValve)
        rig.do(
            StepKind.OPEN_AGAIN if by_hand else StepKind.LET_GO,
            change.valve,
            MoveValve(valve=change.valve, position=rest),
            data={"position": rest},
        )


def _as_found(job: _Job, rig: Rig) -> Stage:
    """Reads and writes every setting that shows, before any screw is touched."""
    _open_window(job, rig)
    shown = sorted(job.shown.values(), key=lambda state: (state.cost, job.sequence.index(state.adjuster)))
    _choice(job, rig, shown[0].adjuster if shown else job.sequence[0])
    _start(job, rig)
    rig.say(StepKind.WARM_OIL)
    for state in shown:
        _choice(job, rig, state.adjuster)
        _enter(job, rig, state)
        rig.do(StepKind.READ, state.adjuster, window_of=state.adjuster)
        _leave(job, rig, state)
    for adjuster in job.sequence:
        if adjuster not in job.shown:
            rig.say(StepKind.NOT_REACHED, adjuster, hidden_by=_hider(job, adjuster))
    return Stage(kind=StageKind.AS_FOUND, powered=True, adjuster="", steps=rig.take_steps())


def _hider(job: _Job, adjuster: str) -> str:
    """Adjuster that holds the pressure below this one's target until it is moved out of the way."""
    return ", ".join(job.found[adjuster].raised)


def _set(job: _Job, rig: Rig, adjuster: str) -> Stage:
    """One adjuster, in its state: others out of the way, come up from below, lock, read again."""
    state = job.found[adjuster]
    setting = job.targets.settings[adjuster]
    _choice(job, rig, adjuster)
    site = _site(job.circuit, adjuster)
    to_raise = [
        change
        for change in state.changes
        if isinstance(change, Adjust) and rig.state.settings_bar[change.adjuster] != change.setting_bar
    ]
    reasons = dict(state.reasons)
    if to_raise:
        _stop(job, rig)
        rig.do(StepKind.BACK_OUT, adjuster, Adjust(adjuster=adjuster, setting_bar=site.lowest_bar))
        rig.backed_out.add(adjuster)
        for change in to_raise:
            rig.do(StepKind.RUN_IN, change.adjuster, change, reason=reasons.get(change))
    elif adjuster in job.shown and rig.state.settings_bar[adjuster] == setting.target_bar:
        rig.say(StepKind.LEAVE_ALONE, adjuster)
    _start(job, rig)
    _enter(job, rig, state)
    if rig.state.settings_bar[adjuster] >= setting.target_bar:
        governor = rig.governor()
        rig.do(
            StepKind.TURN_BELOW,
            adjuster,
            Adjust(adjuster=adjuster, setting_bar=max(site.lowest_bar, BELOW_SHARE * setting.low_bar)),
            data={"held_by": governor if governor != adjuster else ""},
        )
    rig.backed_out.discard(adjuster)
    rig.do(
        StepKind.COME_UP,
        adjuster,
        Adjust(adjuster=adjuster, setting_bar=setting.target_bar),
        window_of=adjuster,
    )
    rig.do(StepKind.LOCK_NUT, adjuster, window_of=adjuster)
    rig.do(StepKind.READ_AGAIN, adjuster, window_of=adjuster)
    _leave(job, rig, state)
    return Stage(kind=StageKind.SET, powered=True, adjuster=adjuster, steps=rig.take_steps())


def _check(job: _Job, rig: Rig) -> Stage:
    """Reads again what shows, with every setting made."""
    for adjuster in job.sequence:
        if adjuster not in job.shown:
            continue
        state = job.found[adjuster]
        _choice(job, rig, adjuster)
        _enter(job, rig, state)
        rig.do(StepKind.READ_AGAIN, adjuster, window_of=adjuster)
        _leave(job, rig, state)
    return Stage(kind=StageKind.CHECK, powered=True, adjuster="", steps=rig.take_steps())


def _return(job: _Job, rig: Rig) -> Stage:
    """Area, people, locks, supplies; then a start and a look."""
    rig.gauge = None
    rig.say(StepKind.INSPECT)
    rig.say(StepKind.CLEAR_PEOPLE)
    rig.say(StepKind.REMOVE_LOCKS)
    rig.say(StepKind.TELL_AFTER)
    for supply in job.machine.energy:
        rig.say(StepKind.RESTORE_SUPPLY, supply)
    _start(job, rig)
    rig.say(StepKind.WATCH)
    return Stage(kind=StageKind.RETURN, powered=True, adjuster="", steps=rig.take_steps())
