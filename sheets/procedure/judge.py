"""Judges one state for one adjuster: all conditions, with single faults, and the reason of each change."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

from sheets.amounts import Amount, Finding
from sheets.circuit.faults import CAN_MOVE, CAN_RAISE, Fault, FaultKind, faults_of, solve_faults
from sheets.circuit.model import AdjusterSite, Node
from sheets.circuit.plant import Adjust, MoveValve, PlantState
from sheets.circuit.reach import weakest_loaded
from sheets.circuit.solution import Solution
from sheets.circuit.solver import solve
from sheets.machine.parts import HandValve
from sheets.procedure.answers import TestState
from sheets.procedure.case import Case
from sheets.procedure.changes import Candidate, Change, apply
from sheets.procedure.conditions import (
    Condition,
    Failure,
    earlier_ones,
    first_failure,
    moving,
    over_rating,
    sight,
    starved,
    unestablished,
)
from sheets.procedure.gauges import GaugeChoice, Readings, Worst, choose_gauge
from sheets.procedure.load import drive_findings
from sheets.targets.settings import Setting

_REACH_SHARE = 0.9
"""Nodes that stand at this share of the reading, or more, are in reach of the pressure that is set."""
FLOW_SHARE = 0.10
"""Policy: a reading that belongs to a stated flow is taken within this share of it."""


def judge(case: Case, candidate: Candidate, adjuster: str) -> TestState | Failure:
    """The test state that a candidate is for an adjuster, or the first condition that fails.

    With the adjuster at the bottom of its window, at its target, at the top and at its stop; then with single
    faults; each with the work loads of the file and without them, since a machine that stands for setting
    may press on nothing, and then no load holds it. Where only the stop fails, the adjuster that stands out
    of the way may instead stand just ahead.
    """
    outcome = _judge(case, candidate, adjuster)
    if isinstance(outcome, Failure) and outcome.condition is Condition.WITHIN:
        for ahead in _just_ahead(case, candidate, adjuster):
            other = _judge(case, ahead, adjuster)
            if isinstance(other, TestState):
                return other
    return outcome


def _just_ahead(case: Case, candidate: Candidate, adjuster: str) -> list[Candidate]:
    """The candidate with one adjuster just ahead of the window instead of at its stop.

    It limits the pressure itself when the screw that is set runs to its stop. How far it stands ahead must be
    counted in turns, so its change per turn must be known.
    """
    setting = case.targets.settings[adjuster]
    half_bar = (setting.high_bar - setting.low_bar) / 2.0
    found = []
    for change in candidate.changes:
        if not isinstance(change, Adjust):
            continue
        site = case.site(change.adjuster)
        ahead_bar = setting.high_bar + half_bar + site.width_bar
        rating_bar = case.circuit.nodes[site.controlled_node].rating_bar
        per_turn = case.targets.settings[change.adjuster].screw.per_turn_bar
        if per_turn is not None and ahead_bar < min(site.highest_bar, rating_bar):
            nearer = replace(change, setting_bar=ahead_bar)
            changes = tuple(nearer if one is change else one for one in candidate.changes)
            found.append(replace(candidate, changes=changes))
    return found


def _judge(case: Case, candidate: Candidate, adjuster: str) -> TestState | Failure:
    site, setting = case.site(adjuster), case.targets.settings[adjuster]
    state = apply(case.base, candidate.changes)
    levels = (setting.low_bar, setting.target_bar, setting.high_bar)
    standing = [state.adjusted(adjuster, level) for level in (*levels, site.highest_bar)]
    solved = solve(case.circuit, [*standing, *(one.unloaded() for one in standing)], effects=True)
    low, target, top, stop, *idle = (solved.one(index) for index in range(2 * len(standing)))
    failure = (
        _at_its_levels((low, target, top), levels, case, site)
        or _at_another_flow(setting, target)
        or _too_much_through(case, candidate, target)
        or _at_its_stop(stop, case)
        or without_load(_at_its_levels(idle[:-1], levels, case, site) or _at_its_stop(idle[-1], case))
        or moved_by_fault(case, state, target)
    )
    if failure is not None:
        return failure
    load = drive_findings(case.machine, at_target=target, at_top=top, adjuster=adjuster)
    if isinstance(load, Failure):
        return load
    gauge = _gauge(case, state, setting, low=low, target=target, top=top, stop=stop)
    if isinstance(gauge, Failure):
        return gauge
    return _found(case, candidate, adjuster, target, gauge, load)


def _at_its_levels(
    solutions: Sequence[Solution], levels: Sequence[float], case: Case, site: AdjusterSite
) -> Failure | None:
    """The first condition that fails at the bottom, the middle or the top of the window."""
    for solution, level_bar in zip(solutions, levels, strict=True):
        failure = first_failure(solution, site, level_bar, case.trusted_ports)
        if failure is not None:
            return failure
    return None


def _at_its_stop(stop: Solution, case: Case) -> Failure | None:
    """The first condition that fails with the screw at its stop; nothing needs to follow it there."""
    return unestablished(stop, case.trusted_ports) or moving(stop) or starved(stop) or over_rating(stop)


def without_load(failure: Failure | None) -> Failure | None:
    """A failure of the state without work loads, said so."""
    return None if failure is None else replace(failure, data={**failure.data, "idle": "idle"})


def _found(
    case: Case,
    candidate: Candidate,
    adjuster: str,
    target: Solution,
    gauge: GaugeChoice,
    load: tuple[Finding, ...],
) -> TestState:
    site = case.site(adjuster)
    seen = sight(target, site)
    return TestState(
        adjuster=adjuster,
        changes=candidate.changes,
        cost=candidate.cost,
        gauge=gauge,
        reading_bar=seen.reading_bar,
        flow_lpm=seen.flow_lpm,
        earlier=earlier_ones(seen),
        reasons=reasons_of(case, candidate, adjuster),
        near_misses=(),
        findings=(*load, *gauge.findings),
    )


def _at_another_flow(setting: Setting, target: Solution) -> Failure | None:
    """A value that its maker gives at a flow is read at that flow only."""
    wanted_lpm = setting.at_flow_lpm
    if wanted_lpm is None:
        return None
    flow_lpm = target.flows_lpm[setting.part]
    if abs(flow_lpm - wanted_lpm) <= FLOW_SHARE * wanted_lpm:
        return None
    return Failure(
        condition=Condition.AT_FLOW,
        data={
            "flow": Amount(value=flow_lpm, quantity="flow_lpm"),
            "wanted": Amount(value=wanted_lpm, quantity="flow_lpm"),
        },
    )


def _too_much_through(case: Case, candidate: Candidate, target: Solution) -> Failure | None:
    """A valve that is shut in service passes no more than its rated flow when a state opens it."""
    for change in candidate.changes:
        if not isinstance(change, MoveValve) or change.position != "open":
            continue
        part = case.machine.parts[change.valve]
        flow_lpm = abs(target.flows_lpm[change.valve])
        if isinstance(part, HandValve) and flow_lpm > part.rated_flow_lpm:
            return Failure(
                condition=Condition.THROUGH,
                data={
                    "valve": change.valve,
                    "flow": Amount(value=flow_lpm, quantity="flow_lpm"),
                    "rated": Amount(value=part.rated_flow_lpm, quantity="flow_lpm"),
                },
            )
    return None


def moved_by_fault(case: Case, state: PlantState, sound: Solution | None = None) -> Failure | None:
    """What moves, or passes a rating, when one spool sticks or leaks, or one coil is dead.

    With the work loads of the file, then without them: a light load moves sooner, and the oil that a piston
    shuts in rises farther. ``sound`` is the solution of the state without a fault, from which the others
    start faster.
    """
    return _moved_by_fault(case, state, sound) or without_load(_moved_by_fault(case, state.unloaded(), sound))


def _moved_by_fault(case: Case, state: PlantState, sound: Solution | None) -> Failure | None:
    faults = faults_of(case.machine, case.circuit, state, kinds=CAN_MOVE)
    start_bar = sound.pressures_bar if sound is not None else None
    solutions = solve_faults(case.circuit, state, faults, start_bar=start_bar)
    for fault, solution in zip(faults, solutions, strict=True):
        if not solution.established:
            return Failure(condition=Condition.BARRED, data={"fault": fault.kind.value, "valve": fault.part})
        failure = moving(solution)
        if failure is not None:
            return Failure(condition=Condition.BARRED, data={**failure.data, **fault_data(fault)})
        failure = over_rating(solution)
        if failure is not None:
            return replace(failure, data={**failure.data, **fault_data(fault)})
    return None


def fault_data(fault: Fault) -> dict[str, Amount | str]:
    """A fault as data of a failure."""
    return {"fault": fault.kind.value, "valve": fault.part, "position": fault.position}


def _gauge(
    case: Case,
    state: PlantState,
    setting: Setting,
    *,
    low: Solution,
    target: Solution,
    top: Solution,
    stop: Solution,
) -> GaugeChoice | Failure:
    node = case.site(setting.adjuster).controlled_node
    reading_bar = target.pressures_bar[node]
    weakest = _here(case, target, reading_bar)
    # A setting that is itself over a rating in service is refused as that, not again with each state.
    if all(finding.code != "setting_over_rating" for finding in setting.findings):
        weakest = min(weakest, _in_service(case, setting), key=lambda one: one.rating_bar)
    return choose_gauge(
        case.machine,
        case.circuit,
        case.policies,
        setting,
        Readings(
            node=node,
            pressures_bar=target.pressures_bar,
            target_bar=reading_bar,
            low_bar=low.pressures_bar[node],
            high_bar=top.pressures_bar[node],
            worst=_worst(case, state, stop, setting),
            rating_bar=weakest.rating_bar,
            rated_by=weakest.rated_by,
            floor_bar=low.pressures_bar[node] - setting.low_bar + setting.floor_bar,
            ceiling_bar=top.pressures_bar[node] - setting.high_bar + setting.ceiling_bar,
        ),
    )


def _in_service(case: Case, setting: Setting) -> Node:
    """The weakest node that the set pressure comes to once the barriers stand at rest again."""
    return weakest_loaded(
        case.machine,
        case.circuit,
        case.site(setting.adjuster).controlled_node,
        set_bar=setting.target_bar,
        reliefs_bar=case.targets.settings_bar(),
    )


def _here(case: Case, target: Solution, reading_bar: float) -> Node:
    """The weakest node in reach in the test state itself."""
    nodes = zip(case.circuit.nodes, target.pressures_bar, strict=True)
    reached = (node for node, pressure_bar in nodes if pressure_bar >= _REACH_SHARE * reading_bar)
    return min(reached, key=lambda node: node.rating_bar)


def _worst(case: Case, state: PlantState, stop: Solution, setting: Setting) -> tuple[Worst, ...]:
    """Highest pressure at every node with the screw at its stop, after one slip, or with one fault.

    Slips: one valve elsewhere, one screw at the end of its range. The valve that is set, stuck shut, isn't
    counted: its pressure is approached slowly, with a stop rule. States that aren't established count as
    beyond every gauge.
    """
    caused = [(stop, {"slip": "screw", "adjuster": setting.adjuster})]
    for standing in (state, state.unloaded()):
        caused += _after_slips(case, standing)
        caused += _with_faults(case, standing, stop, setting)
    return tuple(
        max(
            (
                Worst(
                    pressure_bar=solution.pressures_bar[node] if solution.established else float("inf"),
                    cause=cause,
                )
                for solution, cause in caused
            ),
            key=lambda worst: worst.pressure_bar,
        )
        for node in range(len(case.circuit.nodes))
    )


_Caused = tuple[Solution, dict[str, str]]
"""A solved state with the slip or fault that made it."""


def _after_slips(case: Case, state: PlantState) -> list[_Caused]:
    slips = [
        (state.moved(valve, other), {"slip": "valve", "valve": valve, "position": other})
        for valve, positions in case.circuit.positions.items()
        for other in positions
        if other != state.positions[valve]
    ]
    slips += [
        (state.adjusted(site.id, site.highest_bar), {"slip": "screw", "adjuster": site.id})
        for site in case.circuit.adjusters
    ]
    solved = solve(case.circuit, [slip for slip, _ in slips])
    return [(solved.one(index), cause) for index, (_, cause) in enumerate(slips)]


def _with_faults(case: Case, state: PlantState, stop: Solution, setting: Setting) -> list[_Caused]:
    faults = [
        fault
        for fault in faults_of(case.machine, case.circuit, state, kinds=CAN_RAISE)
        if not (fault.kind is FaultKind.RELIEF_STUCK_SHUT and fault.part == setting.part)
    ]
    solutions = solve_faults(case.circuit, state, faults, start_bar=stop.pressures_bar)
    return [
        (solution, {"slip": "fault", "valve": fault.part, "fault": fault.kind.value})
        for fault, solution in zip(faults, solutions, strict=True)
    ]


def reasons_of(case: Case, candidate: Candidate, adjuster: str) -> tuple[tuple[Change, Failure], ...]:
    """Takes each change away alone and names what then fails, with one fault and at the screw's stop too."""
    if not candidate.changes:
        return ()
    site = case.site(adjuster)
    setting = case.targets.settings[adjuster]
    lesser = [
        replace(candidate, changes=tuple(change for change in candidate.changes if change is not left_out))
        for left_out in candidate.changes
    ]
    states = [apply(case.base, one.changes) for one in lesser]
    solved = solve(case.circuit, states, effects=True)
    idle = solve(case.circuit, [state.unloaded() for state in states], effects=True)
    reasons: list[tuple[Change, Failure]] = []
    for index, left_out in enumerate(candidate.changes):
        solution = solved.one(index)
        # What happens at the target is the plainest reason, then a fault there, then what is farther away.
        outcome = (
            first_failure(solution, site, setting.target_bar, case.trusted_ports)
            or _at_another_flow(setting, solution)
            or _too_much_through(case, lesser[index], solution)
            or without_load(first_failure(idle.one(index), site, setting.target_bar, case.trusted_ports))
            or moved_by_fault(case, states[index])
            or _judge(case, lesser[index], adjuster)
        )
        if isinstance(outcome, Failure):
            reasons.append((left_out, outcome))
    return tuple(reasons)
