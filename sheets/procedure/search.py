"""Finds the cheapest state in which each adjuster can be set, or says why there is none."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from itertools import islice

from sheets.amounts import Finding
from sheets.circuit.model import AdjusterSite, Circuit
from sheets.circuit.plant import Adjust, PlantState
from sheets.circuit.solution import Solution
from sheets.circuit.solver import solve
from sheets.circuit.verdict import Verdict
from sheets.machine.model import Machine
from sheets.machine.site import Policies
from sheets.procedure.changes import Candidate, Change, apply, candidates, possible_options
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
from sheets.procedure.gauges import GaugeChoice, choose_gauge
from sheets.procedure.in_use import STILL_EFFECT, ever_governs
from sheets.procedure.load import drive_findings
from sheets.targets.settings import Setting, Targets

STATE_LIMIT = 20_000
"""Sets of changes that are tried before the answer is 'not found within the limit'."""
BATCH = 256
_STAGES = tuple(Condition)
_REACH_SHARE = 0.9
"""Nodes that stand at this share of the reading, or more, are in reach of the pressure that is set."""


@dataclass(frozen=True, kw_only=True)
class TestState:
    """Where an adjuster can be set: changes to the running rest state, and what is then read."""

    adjuster: str
    changes: tuple[Change, ...]
    cost: float
    gauge: GaugeChoice
    reading_bar: float
    """At the target, before it is brought to a graduation."""
    flow_lpm: float
    """Through the adjuster's own part, where its law depends on flow."""
    earlier: tuple[str, ...]
    """Adjusters that shift this reading a little, hence come first."""
    reasons: tuple[tuple[Change, Failure], ...]
    """For each change, what fails without it."""
    findings: tuple[Finding, ...]

    @property
    def raised(self) -> tuple[str, ...]:
        """Adjusters that stand out of the way in this state."""
        return tuple(change.adjuster for change in self.changes if isinstance(change, Adjust))


@dataclass(frozen=True, kw_only=True)
class NotInUse:
    """An adjuster that no state answers to: it gets no step, no tag and no refusal."""

    adjuster: str
    by_law: bool
    """Its control sees the same pressure on both its sides; else every state was tried."""
    states: int


@dataclass(frozen=True, kw_only=True)
class NotFound:
    """An adjuster without a test state."""

    adjuster: str
    verdict: Verdict
    states: int
    failure: Failure
    """What fails in the nearest state."""
    nearest: tuple[Change, ...]


@dataclass(frozen=True, kw_only=True)
class Search:
    """Answer for every adjuster that may be set, by id, in the order of the file."""

    answers: Mapping[str, TestState | NotInUse | NotFound]
    states: int
    """Sets of changes that were solved."""

    def found(self) -> dict[str, TestState]:
        return {id_: answer for id_, answer in self.answers.items() if isinstance(answer, TestState)}


@dataclass(kw_only=True)
class _Wanted:
    """One adjuster on its way through the frontier."""

    place: int
    setting: Setting
    responded: bool = False
    nearest: tuple[tuple[int, float], Failure, tuple[Change, ...]] | None = None
    answer: TestState | None = field(default=None)

    def note(self, failure: Failure, changes: tuple[Change, ...], distance_bar: float) -> None:
        """Keeps the failure of the state that came nearest: latest condition, then smallest distance.

        Up to ALONE the conditions count alike: a state that moves just below the target came nearer than one
        that stands still far from it.
        """
        stage = 0 if failure.condition is Condition.ESTABLISHED else _STAGES.index(failure.condition)
        rank = (max(stage, _STAGES.index(Condition.ALONE)) if stage else 0, -distance_bar)
        if self.nearest is None or rank > self.nearest[0]:
            self.nearest = (rank, failure, changes)


def find_test_states(machine: Machine, circuit: Circuit, targets: Targets, policies: Policies) -> Search:
    """One frontier for all adjusters, cheapest state first.

    Every adjuster stands at its target unless a change moves it out of the way. The search ends when each
    adjuster has its state, when there is no state left (then what wasn't found is refuted), or at the limit.
    """
    wanted = {
        site.id: _Wanted(place=place, setting=targets.settings[site.id])
        for place, site in enumerate(circuit.adjusters)
        if site.id in targets.settings and targets.settings[site.id].screw.may_be_set
    }
    by_law = {site.id for site in circuit.adjusters if site.controlled_node == site.reference_node}
    base = running_rest(circuit, targets)
    stream = candidates(possible_options(machine, circuit))
    states = 0
    while states < STATE_LIMIT:
        open_ones = [one for id_, one in wanted.items() if one.answer is None and id_ not in by_law]
        batch = list(islice(stream, min(BATCH, STATE_LIMIT - states)))
        if not batch or not open_ones:
            break
        states += len(batch)
        _try_batch(machine, circuit, targets, policies, base, batch, open_ones)
    exhausted = next(stream, None) is None
    answers: dict[str, TestState | NotInUse | NotFound] = {}
    for id_, one in wanted.items():
        if one.answer is not None:
            answers[id_] = one.answer
        elif id_ in by_law or (exhausted and not one.responded and not ever_governs(circuit, base, id_)):
            answers[id_] = NotInUse(adjuster=id_, by_law=id_ in by_law, states=states)
        else:
            _, failure, changes = one.nearest or ((0, 0.0), Failure(condition=Condition.ESTABLISHED), ())
            answers[id_] = NotFound(
                adjuster=id_,
                verdict=Verdict.REFUTED if exhausted else Verdict.NOT_FOUND,
                states=states,
                failure=failure,
                nearest=changes,
            )
    return Search(answers=answers, states=states)


def running_rest(circuit: Circuit, targets: Targets) -> PlantState:
    """Valves at rest, all drives on, every adjuster at its target (at the end of its range without one)."""
    settings_bar = {site.id: site.highest_bar for site in circuit.adjusters} | targets.settings_bar()
    state = circuit.rest_state(settings_bar)
    for drive in circuit.drives:
        state = state.driven(drive, on=True)
    return state


def _try_batch(
    machine: Machine,
    circuit: Circuit,
    targets: Targets,
    policies: Policies,
    base: PlantState,
    batch: Sequence[Candidate],
    open_ones: Sequence[_Wanted],
) -> None:
    states = [apply(base, candidate.changes) for candidate in batch]
    solved = solve(circuit, states, effects=True)
    for index, candidate in enumerate(batch):
        solution = solved.one(index)
        for one in open_ones:
            site = circuit.adjusters[one.place]
            if one.answer is not None or candidate.adjusts(site.id):
                continue
            if solution.established and abs(solution.effects[site.id][site.controlled_node]) > STILL_EFFECT:
                one.responded = True
            outcome: TestState | Failure | None = first_failure(solution, site, one.setting.target_bar)
            if outcome is None:
                outcome = judge(machine, circuit, policies, targets, states[index], candidate, site)
            if isinstance(outcome, TestState):
                one.answer = outcome
            else:
                one.note(outcome, candidate.changes, _distance(solution, one.setting, site))


def _distance(solution: Solution, setting: Setting, site: AdjusterSite) -> float:
    """How far a reading is from the target, in bar; a state without established pressures is farthest."""
    if not solution.established:
        return float("inf")
    return abs(solution.pressures_bar[site.controlled_node] - setting.target_bar)


def judge(
    machine: Machine,
    circuit: Circuit,
    policies: Policies,
    targets: Targets,
    state: PlantState,
    candidate: Candidate,
    site: AdjusterSite,
) -> TestState | Failure:
    """All conditions on one state: with the adjuster at window bottom, target, window top and its stop."""
    setting = targets.settings[site.id]
    levels = (setting.low_bar, setting.target_bar, setting.high_bar)
    solved = solve(
        circuit, [state.adjusted(site.id, level) for level in (*levels, site.highest_bar)], effects=True
    )
    low, target, top, stop = (solved.one(index) for index in range(4))
    for solution, level in zip((low, target, top), levels, strict=True):
        failure = first_failure(solution, site, level)
        if failure is not None:
            return failure
    failure = unestablished(stop) or moving(stop) or starved(stop) or over_rating(stop)
    if failure is not None:
        return failure
    load = drive_findings(machine, at_target=target, at_top=top, adjuster=site.id)
    if isinstance(load, Failure):
        return load
    node = site.controlled_node
    reading_bar = target.pressures_bar[node]
    gauge = choose_gauge(
        machine,
        circuit,
        policies,
        setting,
        node=node,
        pressures_bar=target.pressures_bar,
        reading_bar=reading_bar,
        low_bar=low.pressures_bar[node],
        high_bar=top.pressures_bar[node],
        highest_bar=stop.pressures_bar[node],
        rating_bar=min(
            here.rating_bar
            for here, pressure_bar in zip(circuit.nodes, target.pressures_bar, strict=True)
            if pressure_bar >= _REACH_SHARE * reading_bar
        ),
        floor_bar=low.pressures_bar[node] - setting.low_bar + setting.floor_bar,
        ceiling_bar=top.pressures_bar[node] - setting.high_bar + setting.ceiling_bar,
    )
    if isinstance(gauge, Failure):
        return gauge
    seen = sight(target, site)
    return TestState(
        adjuster=site.id,
        changes=candidate.changes,
        cost=candidate.cost,
        gauge=gauge,
        reading_bar=reading_bar,
        flow_lpm=seen.flow_lpm,
        earlier=earlier_ones(seen),
        reasons=_reasons(circuit, targets, candidate, site),
        findings=(*load, *gauge.findings),
    )


def _reasons(
    circuit: Circuit, targets: Targets, candidate: Candidate, site: AdjusterSite
) -> tuple[tuple[Change, Failure], ...]:
    """Takes each change away alone and names the first condition that then fails."""
    if not candidate.changes:
        return ()
    base = running_rest(circuit, targets)
    lesser = [
        tuple(change for change in candidate.changes if change is not left_out)
        for left_out in candidate.changes
    ]
    solved = solve(circuit, [apply(base, changes) for changes in lesser], effects=True)
    reasons: list[tuple[Change, Failure]] = []
    for index, left_out in enumerate(candidate.changes):
        failure = first_failure(solved.one(index), site, targets.settings[site.id].target_bar)
        if failure is not None:
            reasons.append((left_out, failure))
    return tuple(reasons)
