"""Finds the cheapest state in which each adjuster can be set, or says why there is none."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field, replace
from itertools import islice

from sheets.circuit.model import AdjusterSite
from sheets.circuit.solution import Solution
from sheets.circuit.solver import solve
from sheets.circuit.verdict import Verdict
from sheets.procedure.answers import Guard, NearMiss, NotFound, NotInUse, Search, TestState
from sheets.procedure.case import Case
from sheets.procedure.changes import Candidate, Change, apply, candidates, possible_options
from sheets.procedure.conditions import Condition, Failure, first_failure
from sheets.procedure.in_use import STILL_EFFECT, ever_governs, guarded_pumps
from sheets.procedure.judge import judge
from sheets.targets.settings import Setting

STATE_LIMIT = 20_000
"""Sets of changes that are tried before the answer is 'not found within the limit'."""
BATCH = 256
_NEARER_BAR = 0.05
"""A dearer state stands in for a cheaper one only if it comes nearer to the target by this."""
MOST_MISSES = 6
"""Near misses that an answer keeps, one for each condition."""
_STAGES = tuple(Condition)


@dataclass(kw_only=True)
class _Wanted:
    """One adjuster on its way through the frontier."""

    site: AdjusterSite
    setting: Setting
    responded: bool = False
    misses: dict[Condition, tuple[float, NearMiss]] = field(default_factory=dict)
    """For each condition, the state that failed it nearest to the target, with its distance in bar."""
    answer: TestState | None = None

    def note(self, failure: Failure, changes: tuple[Change, ...], distance_bar: float) -> None:
        known = self.misses.get(failure.condition)
        if known is None or distance_bar < known[0] - _NEARER_BAR:
            self.misses[failure.condition] = (distance_bar, NearMiss(changes=changes, failure=failure))

    def near_misses(self) -> tuple[NearMiss, ...]:
        """Nearest first: latest condition, then smallest distance.

        Up to ALONE the conditions count alike: a state that moves just below the target came nearer than one
        that stands still far from it.
        """
        alike = _STAGES.index(Condition.ALONE)

        def rank(item: tuple[Condition, tuple[float, NearMiss]]) -> tuple[int, float]:
            condition, (distance_bar, _) = item
            stage = _STAGES.index(condition)
            return (-max(stage, alike) if stage else 0, distance_bar)

        ordered = sorted(self.misses.items(), key=rank)
        return tuple(miss for _, (_, miss) in ordered[:MOST_MISSES])


def find_test_states(case: Case) -> Search:
    """One frontier for all adjusters, cheapest state first.

    Every adjuster stands at its target unless a change moves it out of the way. The search ends when each
    adjuster has its state, when there is no state left (then what wasn't found is refuted), or at the limit.
    """
    wanted = {
        site.id: _Wanted(site=site, setting=case.targets.settings[site.id])
        for site in case.circuit.adjusters
        if site.id in case.targets.settings and case.targets.settings[site.id].screw.may_be_set
    }
    by_law = {site.id for site in case.circuit.adjusters if site.controlled_node == site.reference_node}
    stream = candidates(possible_options(case.machine, case.circuit))
    states = 0
    while states < STATE_LIMIT:
        open_ones = [one for id_, one in wanted.items() if one.answer is None and id_ not in by_law]
        if not open_ones:
            break
        batch = list(islice(stream, min(BATCH, STATE_LIMIT - states)))
        if not batch:
            break
        states += len(batch)
        _try_batch(case, batch, open_ones)
    exhausted = next(stream, None) is None
    answers: dict[str, TestState | NotInUse | NotFound] = {}
    for id_, one in wanted.items():
        if one.answer is not None:
            answers[id_] = replace(one.answer, near_misses=one.near_misses())
        elif id_ in by_law or (
            exhausted
            and not one.responded
            and not ever_governs(case.circuit, case.base, id_, case.trusted_ports)
        ):
            answers[id_] = NotInUse(
                adjuster=id_, by_law=id_ in by_law, states=states, guard=_guard(case, one.setting)
            )
        else:
            answers[id_] = NotFound(
                adjuster=id_,
                verdict=Verdict.REFUTED if exhausted else Verdict.NOT_FOUND,
                states=states,
                near_misses=one.near_misses(),
            )
    return Search(answers=answers, states=states)


def _guard(case: Case, setting: Setting) -> Guard | None:
    pumps = guarded_pumps(case.machine, case.circuit, case.base, setting.adjuster)
    return Guard(pumps=pumps, setting_bar=setting.target_bar, given_by=setting.given_by) if pumps else None


def _try_batch(case: Case, batch: Sequence[Candidate], open_ones: Sequence[_Wanted]) -> None:
    states = [apply(case.base, candidate.changes) for candidate in batch]
    solved = solve(case.circuit, states, effects=True)
    for index, candidate in enumerate(batch):
        solution = solved.one(index)
        for one in open_ones:
            if one.answer is not None or candidate.adjusts(one.site.id):
                continue
            if _responds(solution, one.site):
                one.responded = True
            failure = first_failure(solution, one.site, one.setting.target_bar, case.trusted_ports)
            if failure is not None and failure.condition is not Condition.WITHIN:
                one.note(failure, candidate.changes, _distance(solution, one))
                continue
            outcome = judge(case, candidate, one.site.id)
            if isinstance(outcome, TestState):
                one.answer = outcome
            else:
                one.note(outcome, candidate.changes, _distance(solution, one))


def _responds(solution: Solution, site: AdjusterSite) -> bool:
    return solution.established and abs(solution.effects[site.id][site.controlled_node]) > STILL_EFFECT


def _distance(solution: Solution, one: _Wanted) -> float:
    """How far a reading is from the target, in bar; a state without established pressures is farthest."""
    if not solution.established:
        return float("inf")
    return abs(solution.pressures_bar[one.site.controlled_node] - one.setting.target_bar)
