"""The stages of a job, each step tried on the rig as it is written.

No family of machines decides anything here. What stands in a stage follows from the test states that the
search found, from the order, and from the task.
"""

from __future__ import annotations

from dataclasses import replace
from itertools import permutations

from sheets.amounts import Amount, Finding, Severity, bar
from sheets.circuit.plant import Adjust, MoveValve, PlantState, StartDrive, StopDrive
from sheets.circuit.solution import Solution
from sheets.circuit.solver import solve, solve_one
from sheets.energy.held import held_loads, stuck_loads
from sheets.energy.trapped import Trapped, find_trapped
from sheets.machine.parts import HandValve
from sheets.procedure.answers import TestState
from sheets.procedure.changes import Change
from sheets.procedure.conditions import Failure, moving, over_rating, starved, unestablished
from sheets.procedure.faulted import without_load
from sheets.procedure.gauges import error_bar
from sheets.procedure.heat import HEAT_KW, heat_findings
from sheets.procedure.job import Job, shows
from sheets.procedure.rig import Rig
from sheets.procedure.steps import Stage, StageKind, StepKind
from sheets.procedure.stop_steps import run_to_stop
from sheets.procedure.task import TaskKind

BELOW_SHARE = 0.95
"""How far below its window a setting is brought, as a share of the window's bottom, before it comes up."""


def write_stages(job: Job) -> tuple[tuple[Stage, ...], tuple[Finding, ...]]:
    """All stages of the task in order, and what the simulation of their steps found."""
    case = job.case
    rig = Rig(case.machine, case.circuit, case.circuit.rest_state(case.base.settings_bar))
    rig.unknown = set(job.unknown)
    stages: list[Stage] = []
    if job.locked:
        stages.append(_isolate(job, rig, StageKind.ISOLATE))
    stages.append(_deadhead(job, rig))
    opened = False
    if job.task.kind is not TaskKind.COMMISSION:
        stages.append(_as_found(job, rig))
        opened = True
    for adjuster in job.to_set:
        stages.append(_set(job, rig, adjuster, first=not opened))
        opened = True
    if job.to_set:
        stages.append(_check(job, rig))
    if job.locked:
        stages.append(_isolate(job, rig, StageKind.LOCK_AGAIN))
    stages.append(_return(job, rig))
    rig.findings += [
        Finding(code="lock_left_on", severity=Severity.REFUSED, subject=valve) for valve in sorted(rig.locks)
    ]
    rig.findings += heat_findings(case.machine, case.policies, stages)
    return tuple(stages), tuple(rig.findings)


def _stop_service(job: Job, rig: Rig) -> None:
    """Whoever needs the machine is told, then every drive is stopped: it may run, whatever the rig knows."""
    rig.say(StepKind.TELL_BEFORE)
    for drive in job.case.circuit.drives:
        rig.do(StepKind.PRESS_STOP, drive, StopDrive(drive=drive))


def _choice(job: Job, rig: Rig, adjuster: str) -> None:
    """Points the rig at the gauge of an adjuster, at the test point where it really is."""
    choice = job.found[adjuster].gauge
    rig.gauge = replace(choice, test_point=rig.fitted.get(choice.gauge, choice.test_point))


def _isolate(job: Job, rig: Rig, kind: StageKind) -> Stage:
    """Stop, isolate, relieve, verify; then gauges on, or valves back and gauges off."""
    machine, circuit, first = job.case.machine, job.case.circuit, kind is StageKind.ISOLATE
    if first:
        _stop_service(job, rig)
    else:
        _stop(job, rig)
    for supply in machine.isolated:
        rig.say(StepKind.ISOLATE, supply)
    stuck = stuck_loads(machine, circuit)
    for actuator, (_, amount) in held_loads(machine).items():
        data = {"stuck": "yes" if actuator in stuck else "", "again": "" if first else "yes"}
        rig.say(StepKind.BLOCK, actuator, force=amount, **data)
    trapped = find_trapped(machine, circuit, rig.state.positions)
    vents = {relief.valve for relief in trapped.reliefs if relief.stays}
    _relieve(job, rig, trapped)
    for control in machine.controls.start:
        rig.say(StepKind.ATTEMPT_START, control.name, where=control.where)
    for supply in machine.energy:
        rig.say(StepKind.VERIFY_DEAD, supply)
    if first:
        rig.fitted = dict(job.gauges)
        for gauge, test_point in rig.fitted.items():
            rig.say(StepKind.FIT_GAUGE, gauge, test_point=test_point)
        _one_each(rig)
    _verify_zero(job, rig, first=first, vented=bool(vents))
    if not first:
        _put_back(job, rig, [valve for valve in circuit.positions if valve not in vents])
        relieved = {node for relief in trapped.reliefs for node in relief.nodes}
        beyond = _beyond(find_trapped(machine, circuit, rig.state.positions), relieved)
        _relieve(job, rig, beyond)
        if beyond.reliefs:  # what was verified no longer holds
            _verify_zero(job, rig, first=first, vented=bool(vents))
        for gauge, test_point in rig.fitted.items():
            rig.say(StepKind.REMOVE_GAUGE, gauge, test_point=test_point)
        _put_back(job, rig, sorted(vents))
    return Stage(kind=kind, powered=False, adjuster="", steps=rig.take_steps())


def _one_each(rig: Rig) -> None:
    """A coupling takes one gauge."""
    for test_point in dict.fromkeys(rig.fitted.values()):
        here = [gauge for gauge, point in rig.fitted.items() if point == test_point]
        if len(here) > 1:
            rig.findings.append(
                Finding(
                    code="two_gauges_one_coupling",
                    severity=Severity.REFUSED,
                    subject=test_point,
                    data={"other": " and ".join(here)},
                )
            )


def _verify_zero(job: Job, rig: Rig, *, first: bool, vented: bool) -> None:
    """Every fitted gauge is read; what the simulation leaves there must be within the limit."""
    for gauge, test_point in rig.fitted.items():
        residual_bar = rig.state.pressures_bar[job.case.circuit.node_of[f"{test_point}.P"]]
        rig.say(
            StepKind.VERIFY_ZERO,
            gauge,
            test_point=test_point,
            hides=bar(error_bar(job.case.machine.gauges[gauge])),
            moved="" if first else "yes",
            vent="yes" if vented else "",
        )
        if residual_bar > job.case.policies.zero_limit_bar:
            rig.findings.append(
                Finding(
                    code="zero_not_reached",
                    severity=Severity.REFUSED,
                    subject=test_point,
                    data={"pressure": bar(residual_bar)},
                )
            )


def _beyond(trapped: Trapped, relieved: set[int]) -> Trapped:
    """Only the acts that reach lines which an earlier relieving didn't: valves stand otherwise now."""
    reliefs = tuple(relief for relief in trapped.reliefs if not relieved.issuperset(relief.nodes))
    return replace(trapped, reliefs=reliefs)


def _relieve(job: Job, rig: Rig, trapped: Trapped) -> None:
    """Ways to tank, hand valves first; a lever goes to its ends and back."""
    for relief in trapped.reliefs:
        move = MoveValve(valve=relief.valve, position=relief.position)
        lines = ", ".join(job.case.circuit.nodes[node].name for node in relief.nodes)
        if relief.stays:
            part = job.case.machine.parts[relief.valve]
            lock = isinstance(part, HandValve) and part.lockable and part.rest == "closed"
            data: dict[str, Amount | str] = {"lines": lines, **rig.turned(relief.valve, lock=lock)}
            rig.do(StepKind.OPEN_VENT, relief.valve, move, data=data)
        else:
            back = MoveValve(valve=relief.valve, position=rig.state.positions[relief.valve])
            data = {"lines": lines, "position": relief.position, "back": back.position}
            rig.do(StepKind.WORK_LEVER, relief.valve, move, back, data=data)


def _put_back(job: Job, rig: Rig, valves: list[str]) -> None:
    """Hand valves that still stand where the job put them go back to rest."""
    for valve in valves:
        rest = job.case.circuit.positions[valve][0]
        if isinstance(job.case.machine.parts[valve], HandValve) and rig.state.positions[valve] != rest:
            move = MoveValve(valve=valve, position=rest)
            data = {"position": rest, "back": "yes", **rig.turned(valve)}
            rig.do(StepKind.SET_VALVE, valve, move, data=data)


def _deadhead(job: Job, rig: Rig) -> Stage:
    """Valves as the settings need them, and screws that nobody knows backed out, with every drive off.

    Where no lockout came before, the machine is still in service: it is stopped here.
    """
    if not job.locked:
        _stop_service(job, rig)
    wanted = {move.valve: move.position for move in job.line_up}
    reasons = {
        change.valve: failure
        for adjuster in reversed(job.order)
        for change, failure in job.found[adjuster].reasons
        if isinstance(change, MoveValve)
    }
    for valve, positions in job.case.circuit.positions.items():
        position = wanted.get(valve, positions[0])
        reason = reasons.get(valve) if valve in wanted else None
        reason = reason or _otherwise(job, valve, position)
        if rig.state.positions[valve] != position or valve in wanted:
            lines_up = valve in wanted
            data = {
                "position": position,
                "back": "",
                "vent": "" if lines_up else "yes",
                **rig.turned(valve, lock=lines_up and _takes_lock(job, valve)),
            }
            move = MoveValve(valve=valve, position=position)
            rig.do(StepKind.SET_VALVE, valve, move, reason=reason, data=data)
        elif reason is not None:
            rig.do(StepKind.CHECK_VALVE, valve, reason=reason, data={"position": position})
    for adjuster in job.limits_unknown:
        _back_out(job, rig, adjuster)
    return Stage(kind=StageKind.DEADHEAD, powered=not job.locked, adjuster="", steps=rig.take_steps())


def _takes_lock(job: Job, valve: str) -> bool:
    """Whether a valve takes a lock and the job has locks."""
    part = job.case.machine.parts[valve]
    return job.locked and isinstance(part, HandValve) and part.lockable


def _back_out(job: Job, rig: Rig, adjuster: str) -> None:
    """Turns a screw out with the drive off; only one whose direction is known may be moved unseen."""
    if not _direction_known(job, adjuster):
        finding = Finding(code="direction_not_known", severity=Severity.REFUSED, subject=adjuster)
        if finding not in rig.findings:
            rig.findings.append(finding)
        return
    lowest_bar = job.case.site(adjuster).lowest_bar
    rig.do(StepKind.BACK_OUT, adjuster, Adjust(adjuster=adjuster, setting_bar=lowest_bar))
    rig.backed_out.add(adjuster)


def _direction_known(job: Job, adjuster: str) -> bool:
    return job.case.targets.settings[adjuster].screw.raises != "not known"


def _otherwise(job: Job, valve: str, position: str) -> Failure | None:
    """What harm a start does with this valve alone elsewhere, everything else at rest."""
    for other in job.case.circuit.positions[valve]:
        if other != position:
            failure = _harm(job, job.case.base.moved(valve, other))
            if failure is not None:
                return failure
    return None


def _harm(job: Job, state: PlantState) -> Failure | None:
    """What moves, runs dry or passes a rating in a state, with the work loads of the file or without."""
    solved = solve(job.case.circuit, [state, state.unloaded()])
    at_work, idle = solved.one(0), solved.one(1)
    return _harm_in(at_work) or without_load(_harm_in(idle))


def _harm_in(solution: Solution) -> Failure | None:
    return moving(solution) or starved(solution) or over_rating(solution)


def _open_window(job: Job, rig: Rig) -> None:
    """The ticks of a powered window, in order, up to the start."""
    rig.say(StepKind.CLEAR_TOOLS)
    rig.say(StepKind.CLEAR_PEOPLE)
    if job.locked:
        rig.say(StepKind.REMOVE_LOCKS)
    rig.say(StepKind.TELL_AFTER)
    if job.locked:
        for supply in job.case.machine.isolated:
            rig.say(StepKind.RESTORE_SUPPLY, supply)


def _start(job: Job, rig: Rig) -> None:
    for drive in job.case.circuit.drives:
        if drive not in rig.state.running:
            rig.do(StepKind.START, drive, StartDrive(drive=drive))


def _stop(job: Job, rig: Rig) -> None:
    for drive in job.case.circuit.drives:
        if drive in rig.state.running:
            rig.do(StepKind.PRESS_STOP, drive, StopDrive(drive=drive))


def _enter(job: Job, rig: Rig, state: TestState) -> None:
    """Brings the plant into an adjuster's state: hand valves in increments, then what must be held."""
    reasons = dict(state.reasons)
    approach = state.approach
    open_moves = [
        change
        for change in state.changes
        if isinstance(change, MoveValve)
        and rig.state.positions[change.valve] != change.position
        and (approach is None or change != approach.lever)
    ]
    for change in _gentlest(job, rig, open_moves):
        by_hand = isinstance(job.case.machine.parts[change.valve], HandValve)
        rig.do(
            StepKind.CLOSE_GRADUALLY if by_hand else StepKind.HOLD_VALVE,
            change.valve,
            change,
            reason=reasons.get(change),
            data={"position": change.position, **rig.turned(change.valve)},
        )
    if approach is not None:
        run_to_stop(rig, state, approach, _below(job, state.adjuster))


def _below(job: Job, adjuster: str) -> float:
    """Setting from which an adjuster comes up; bar."""
    return max(job.case.site(adjuster).lowest_bar, BELOW_SHARE * job.case.targets.settings[adjuster].low_bar)


def _gentlest(job: Job, rig: Rig, moves: list[MoveValve]) -> list[MoveValve]:
    """The first order of these moves in which nothing moves and nothing passes a rating on the way."""
    for order in permutations(moves):
        state = rig.state
        for move in order:
            state = state.moved(move.valve, move.position)
            if unestablished(solve_one(job.case.circuit, state), job.case.trusted_ports) or _harm(job, state):
                break
        else:
            return list(order)
    return moves


def _leave(job: Job, rig: Rig, state: TestState) -> None:
    """Lets go of what was held, and opens what was closed under power; a lever at a stop comes first."""
    first = [state.approach.lever] if state.approach is not None else []
    for change in (*first, *(one for one in reversed(state.changes) if one not in first)):
        if not isinstance(change, MoveValve) or change in job.line_up:
            continue
        rest = job.case.circuit.positions[change.valve][0]
        by_hand = isinstance(job.case.machine.parts[change.valve], HandValve)
        rig.do(
            StepKind.OPEN_AGAIN if by_hand else StepKind.LET_GO,
            change.valve,
            MoveValve(valve=change.valve, position=rest),
            data={"position": rest, **rig.turned(change.valve)},
        )


def _as_found(job: Job, rig: Rig) -> Stage:
    """Reads and writes every setting that shows, before any screw is touched."""
    _open_window(job, rig)
    shown = sorted(
        (job.found[id_] for id_ in job.order if shows(job, rig.state, id_)),
        key=lambda state: (state.cost, job.order.index(state.adjuster)),
    )
    _choice(job, rig, shown[0].adjuster if shown else job.order[0])
    _start(job, rig)
    rig.say(StepKind.WARM_OIL)
    for state in shown:
        _choice(job, rig, state.adjuster)
        _enter(job, rig, state)
        rig.do(StepKind.READ, state.adjuster, window_of=state.adjuster)
        _leave(job, rig, state)
    for adjuster in job.order:
        if job.found[adjuster] not in shown and adjuster not in job.unknown:
            rig.say(StepKind.NOT_REACHED, adjuster, hidden_by=_hider(job, adjuster))
    return Stage(kind=StageKind.AS_FOUND, powered=True, adjuster="", steps=rig.take_steps())


def _hider(job: Job, adjuster: str) -> str:
    """Adjusters that hold the pressure below this one's target: to be raised first, or backed out now."""
    return ", ".join(job.found[adjuster].raised or job.limits_unknown)


def _set(job: Job, rig: Rig, adjuster: str, *, first: bool) -> Stage:
    """One adjuster, in its state: others out of the way, come up from below, lock, read again."""
    state, setting = job.found[adjuster], job.case.targets.settings[adjuster]
    _choice(job, rig, adjuster)
    if first:
        _open_window(job, rig)
    found_right = (
        adjuster not in job.unknown
        and rig.state.settings_bar[adjuster] == setting.target_bar
        and shows(job, rig.state, adjuster)
    )
    to_raise = [
        change
        for change in state.changes
        if isinstance(change, Adjust) and rig.state.settings_bar[change.adjuster] != change.setting_bar
    ]
    if to_raise:
        _raise(job, rig, adjuster, to_raise, dict(state.reasons))
    elif found_right:
        rig.say(StepKind.LEAVE_ALONE, adjuster)
    _start(job, rig)
    if first:
        rig.say(StepKind.WARM_OIL)
    _enter(job, rig, state)
    if rig.state.settings_bar[adjuster] >= setting.target_bar:
        governor = rig.governor()
        rig.do(
            StepKind.TURN_BELOW,
            adjuster,
            Adjust(adjuster=adjuster, setting_bar=_below(job, adjuster)),
            data=_held(job, rig, adjuster, governor),
        )
    from_out = "yes" if adjuster in rig.backed_out and state.approach is None else ""
    rig.backed_out.discard(adjuster)
    rig.unknown.discard(adjuster)
    rig.do(
        StepKind.COME_UP,
        adjuster,
        Adjust(adjuster=adjuster, setting_bar=setting.target_bar),
        window_of=adjuster,
        data={"from_out": from_out},
    )
    rig.do(StepKind.LOCK_NUT, adjuster, window_of=adjuster)
    rig.do(StepKind.READ_AGAIN, adjuster, window_of=adjuster)
    _leave(job, rig, state)
    if rig.relief_kw() >= HEAT_KW:
        _stop(job, rig)  # nothing else takes the pump off the relief
    return Stage(kind=StageKind.SET, powered=True, adjuster=adjuster, steps=rig.take_steps())


def _held(job: Job, rig: Rig, adjuster: str, governor: str) -> dict[str, Amount | str]:
    """Who holds the gauge still while a screw is turned out, and after how much it must fall."""
    if governor == adjuster:
        return {"held_by": ""}
    node = job.case.site(adjuster).controlled_node
    ahead_bar = max(0.0, rig.state.settings_bar[adjuster] - rig.state.pressures_bar[node])
    return {"held_by": governor, "ahead": bar(ahead_bar)}


def _raise(job: Job, rig: Rig, adjuster: str, to_raise: list[Adjust], reasons: dict[Change, Failure]) -> None:
    """With the drive off: the one that is set goes low first, then the others go out of its way.

    A screw whose direction nobody knows stays: the state was judged with it at its stop, too, and its
    direction shows under the gauge.
    """
    _stop(job, rig)
    if adjuster not in rig.backed_out and _direction_known(job, adjuster):
        _back_out(job, rig, adjuster)
    for change in to_raise:
        at_stop = change.setting_bar >= job.case.site(change.adjuster).highest_bar
        by_bar = change.setting_bar - rig.state.settings_bar[change.adjuster]
        rig.backed_out.discard(change.adjuster)
        rig.do(
            StepKind.RUN_IN if at_stop else StepKind.RUN_AHEAD,
            change.adjuster,
            change,
            reason=reasons.get(change),
            data={}
            if at_stop
            else {"setting": bar(change.setting_bar), "change": bar(by_bar), "of": adjuster},
        )


def _check(job: Job, rig: Rig) -> Stage:
    """Reads again what shows, with every setting made."""
    for adjuster in job.order:
        if job.found[adjuster].raised:
            continue
        state = job.found[adjuster]
        _choice(job, rig, adjuster)
        _enter(job, rig, state)
        rig.do(StepKind.READ_AGAIN, adjuster, window_of=adjuster)
        _leave(job, rig, state)
    return Stage(kind=StageKind.CHECK, powered=True, adjuster="", steps=rig.take_steps())


def _return(job: Job, rig: Rig) -> Stage:
    """Area, people, locks, supplies; then a start and a look. Without lockouts the drive goes on running."""
    rig.gauge = None
    if not job.locked:
        _stop(job, rig)
        _put_back(job, rig, list(job.case.circuit.positions))
    rig.say(StepKind.INSPECT)
    runs = (job.found[adjuster].approach for adjuster in job.order)
    for actuator in dict.fromkeys(run.at.actuator for run in runs if run is not None):
        rig.say(StepKind.LOOK_WHERE, actuator)
    for valve, positions in job.case.circuit.positions.items():
        reason = _otherwise(job, valve, positions[0])
        if reason is not None:
            rig.do(StepKind.CHECK_VALVE, valve, reason=reason, data={"position": positions[0]})
    rig.say(StepKind.CLEAR_PEOPLE)
    if job.locked:
        rig.say(StepKind.REMOVE_LOCKS)
    rig.say(StepKind.TELL_AFTER)
    if job.locked:
        for supply in job.case.machine.isolated:
            rig.say(StepKind.RESTORE_SUPPLY, supply)
    _start(job, rig)
    for actuator in held_loads(job.case.machine) if job.locked else ():
        rig.say(StepKind.UNBLOCK, actuator)
    rig.say(StepKind.WATCH)
    return Stage(kind=StageKind.RETURN, powered=True, adjuster="", steps=rig.take_steps())
