"""Judges one state for one adjuster: all conditions, with single faults, and the reason of each change."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

from sheets.amounts import Amount, Finding
from sheets.circuit.model import AdjusterSite, Node
from sheets.circuit.plant import Adjust, MoveValve, PlantState
from sheets.circuit.reach import weakest_loaded
from sheets.circuit.solution import Solution
from sheets.machine.parts import HandValve
from sheets.procedure.answers import TestState
from sheets.procedure.at_stop import Approach, find_approach
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
from sheets.procedure.faulted import moved_by_faults, without_load
from sheets.procedure.gauges import GaugeChoice, Readings, Worst, choose_gauge
from sheets.procedure.load import drive_findings
from sheets.procedure.slips import worst_of
from sheets.procedure.work import Work
from sheets.targets.settings import Setting

_REACH_SHARE = 0.9
"""Nodes that stand at this share of the reading, or more, are in reach of the pressure that is set."""
FLOW_SHARE = 0.10
"""Policy: a reading that belongs to a stated flow is taken within this share of it."""


@dataclass(frozen=True, kw_only=True)
class Finalist:
    """A candidate that is worth judging for an adjuster."""

    candidate: Candidate
    start_bar: tuple[float, ...]
    """Pressures near its own at the target, where solving begins."""


@dataclass(frozen=True, kw_only=True)
class Serving:
    """A candidate that holds all conditions for an adjuster, with what is then read."""

    candidate: Candidate
    target: Solution
    gauge: GaugeChoice
    load: tuple[Finding, ...]
    approach: Approach | None


@dataclass(frozen=True, kw_only=True)
class _Levels:
    """One finalist with the adjuster at the bottom of its window, at its target, at the top, at its stop."""

    finalist: Finalist
    state: PlantState
    low: Solution
    target: Solution
    top: Solution
    stop: Solution
    idle: tuple[Solution, Solution, Solution, Solution]
    """The same four without the work loads."""


def judge(
    case: Case,
    finalists: Sequence[Finalist],
    adjuster: str,
    work: Work,
    *,
    worth: Sequence[bool] = (),
) -> list[Serving | Failure]:
    """Whether each finalist serves an adjuster, or the first condition that fails; solved together.

    With the adjuster at the bottom of its window, at its target, at the top and at its stop; then with single
    faults; each with the work loads of the file and without them, since a machine that stands for setting
    may press on nothing, and then no load holds it. Where only the stop fails, the adjuster that stands out
    of the way may instead stand just ahead.
    ``worth`` says of each finalist whether faults are tried on it even if no gauge shows it; all without it.
    """
    outcomes = _judge(case, finalists, adjuster, work, worth)
    nearer = [
        (index, replace(finalist, candidate=ahead))
        for index, (finalist, outcome) in enumerate(zip(finalists, outcomes, strict=True))
        if isinstance(outcome, Failure) and outcome.condition is Condition.WITHIN
        for ahead in _just_ahead(case, finalist.candidate, adjuster)
    ]
    others = _judge(case, [ahead for _, ahead in nearer], adjuster, work) if nearer else []
    for (index, _), other in zip(nearer, others, strict=True):
        if isinstance(other, Serving) and isinstance(outcomes[index], Failure):
            outcomes[index] = other
    return outcomes


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


def _judge(
    case: Case,
    finalists: Sequence[Finalist],
    adjuster: str,
    work: Work,
    worth: Sequence[bool] = (),
) -> list[Serving | Failure]:
    setting = case.targets.settings[adjuster]
    solved = _solved_levels(case, finalists, adjuster, work)
    outcomes: dict[int, Serving | Failure] = {}
    for index, one in enumerate(solved):
        failure = _fails_at_levels(case, one, setting)
        # What a gauge shows takes no solving, so it goes first; what is then said is still what fails first.
        if failure is None and worth and not worth[index]:
            gauge = _gauge(case, setting, one, _at_stop(one, setting))
            failure = gauge if isinstance(gauge, Failure) else None
        if failure is not None:
            outcomes[index] = failure
    left = [index for index in range(len(solved)) if index not in outcomes]
    faults = moved_by_faults(case, [(solved[index].state, solved[index].target) for index in left], work)
    for index, failure in zip(left, faults, strict=True):
        one = solved[index]
        changes = one.finalist.candidate.changes
        approach = failure or find_approach(case, changes, adjuster, work)
        if isinstance(approach, Failure):
            outcomes[index] = approach
            continue
        load = drive_findings(case.machine, at_target=one.target, at_top=one.top, adjuster=adjuster)
        if isinstance(load, Failure):
            outcomes[index] = load
            continue
        gauge = _gauge(case, setting, one, _at_stop(one, setting))
        if not isinstance(gauge, Failure):
            gauge = _gauge(case, setting, one, worst_of(case, one.state, one.stop, setting, work))
        outcomes[index] = (
            gauge
            if isinstance(gauge, Failure)
            else Serving(
                candidate=one.finalist.candidate,
                target=one.target,
                gauge=gauge,
                load=load,
                approach=approach,
            )
        )
    return [outcomes[index] for index in range(len(solved))]


def _solved_levels(case: Case, finalists: Sequence[Finalist], adjuster: str, work: Work) -> list[_Levels]:
    setting = case.targets.settings[adjuster]
    levels = (setting.low_bar, setting.target_bar, setting.high_bar, case.site(adjuster).highest_bar)
    states = [apply(case.base, finalist.candidate.changes) for finalist in finalists]
    solved = work.solve(
        case.circuit,
        [
            standing.adjusted(adjuster, level)
            for state in states
            for standing in (state, state.unloaded())
            for level in levels
        ],
        start_bar=[finalist.start_bar for finalist in finalists for _ in (*levels, *levels)],
        effects=True,
    )
    found = []
    for index, (finalist, state) in enumerate(zip(finalists, states, strict=True)):
        low, target, top, stop, *idle = (solved.one(8 * index + place) for place in range(8))
        found.append(
            _Levels(
                finalist=finalist,
                state=state,
                low=low,
                target=target,
                top=top,
                stop=stop,
                idle=(idle[0], idle[1], idle[2], idle[3]),
            )
        )
    return found


def _fails_at_levels(case: Case, one: _Levels, setting: Setting) -> Failure | None:
    """What fails without any fault, the gauge left out."""
    levels = (setting.low_bar, setting.target_bar, setting.high_bar)
    site = case.site(setting.adjuster)
    return (
        _at_its_levels((one.low, one.target, one.top), levels, case, site)
        or _at_another_flow(setting, one.target)
        or _too_much_through(case, one.finalist.candidate, one.target)
        or _at_its_stop(one.stop, case)
        or without_load(_at_its_levels(one.idle[:3], levels, case, site) or _at_its_stop(one.idle[3], case))
    )


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


def answer_of(case: Case, serving: Serving, adjuster: str, work: Work) -> TestState:
    """A candidate that serves, as an answer: with its reading and the reason of each change."""
    seen = sight(serving.target, case.site(adjuster))
    return TestState(
        adjuster=adjuster,
        changes=serving.candidate.changes,
        cost=serving.candidate.cost,
        gauge=serving.gauge,
        reading_bar=seen.reading_bar,
        flow_lpm=seen.flow_lpm,
        earlier=earlier_ones(seen),
        reasons=reasons_of(case, serving.candidate, adjuster, work),
        near_misses=(),
        findings=(*serving.load, *serving.gauge.findings),
        approach=serving.approach,
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


def _gauge(case: Case, setting: Setting, one: _Levels, worst: tuple[Worst, ...]) -> GaugeChoice | Failure:
    node = case.site(setting.adjuster).controlled_node
    reading_bar = one.target.pressures_bar[node]
    weakest = _here(case, one.target, reading_bar)
    # A setting that is itself over a rating in service is refused as that, not again with each state.
    if all(finding.code != "setting_over_rating" for finding in setting.findings):
        weakest = min(weakest, _in_service(case, setting), key=lambda node: node.rating_bar)
    return choose_gauge(
        case.machine,
        case.circuit,
        case.policies,
        setting,
        Readings(
            node=node,
            pressures_bar=one.target.pressures_bar,
            target_bar=reading_bar,
            low_bar=one.low.pressures_bar[node],
            high_bar=one.top.pressures_bar[node],
            worst=worst,
            rating_bar=weakest.rating_bar,
            rated_by=weakest.rated_by,
            floor_bar=one.low.pressures_bar[node] - setting.low_bar + setting.floor_bar,
            ceiling_bar=one.top.pressures_bar[node] - setting.high_bar + setting.ceiling_bar,
        ),
    )


def _at_stop(one: _Levels, setting: Setting) -> tuple[Worst, ...]:
    """Pressure at every node with the screw at its stop: what a gauge meets even without a slip or fault."""
    cause = {"slip": "screw", "adjuster": setting.adjuster}
    return tuple(Worst(pressure_bar=pressure_bar, cause=cause) for pressure_bar in one.stop.pressures_bar)


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


def reasons_of(
    case: Case, candidate: Candidate, adjuster: str, work: Work
) -> tuple[tuple[Change, Failure], ...]:
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
    solved = work.solve(case.circuit, states, effects=True)
    idle = work.solve(case.circuit, [state.unloaded() for state in states], effects=True)
    reasons: list[tuple[Change, Failure]] = []
    for index, left_out in enumerate(candidate.changes):
        solution = solved.one(index)
        # What happens at the target is the plainest reason, then a fault there, then what is farther away.
        outcome = (
            first_failure(solution, site, setting.target_bar, case.trusted_ports)
            or _at_another_flow(setting, solution)
            or _too_much_through(case, lesser[index], solution)
            or without_load(first_failure(idle.one(index), site, setting.target_bar, case.trusted_ports))
            or moved_by_faults(case, [(states[index], solution)], work)[0]
            or _judge(
                case, [Finalist(candidate=lesser[index], start_bar=solution.pressures_bar)], adjuster, work
            )[0]
        )
        if isinstance(outcome, Failure):
            reasons.append((left_out, outcome))
    return tuple(reasons)
