"""Finds the cheapest state in which each adjuster can be set, or says why there is none."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field, replace

from sheets.circuit.model import AdjusterSite
from sheets.circuit.solution import Solution
from sheets.circuit.verdict import Verdict
from sheets.procedure.answers import Guard, NearMiss, NotFound, NotInUse, Search, TestState
from sheets.procedure.case import Case
from sheets.procedure.changes import Change
from sheets.procedure.conditions import Condition, Failure, first_failure
from sheets.procedure.frontier import Frontier, Tried
from sheets.procedure.in_use import STILL_EFFECT, ever_governs, guarded_pumps
from sheets.procedure.judge import Finalist, Serving, answer_of, judge
from sheets.procedure.work import Work
from sheets.targets.settings import Setting

WORK_LIMIT = 25_000
"""States that are solved before the answer is 'not found within the limit'."""
FIRST_FINALISTS = 2
FINALISTS = 32
"""Sets that are judged together: few at first, since mostly one of the first serves."""
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
    unjudged: bool = False
    """A set that might serve was left when the work was spent."""

    def is_nearer(self, condition: Condition, distance_bar: float) -> bool:
        """Whether a state that fails a condition comes nearer than those that are known to."""
        known = self.misses.get(condition)
        return known is None or distance_bar < known[0] - _NEARER_BAR

    def note(self, failure: Failure, changes: tuple[Change, ...], distance_bar: float) -> None:
        if self.is_nearer(failure.condition, distance_bar):
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


def find_test_states(case: Case, work: Work | None = None) -> Search:
    """One frontier for all adjusters, cheapest state first.

    Every adjuster stands at its target unless a change moves it out of the way. The search ends when each
    adjuster has its state, when there is no state left (then what wasn't found is refuted), or when as many
    states were solved as ``work`` allows, those that judging asks for among them.
    """
    work = work or Work(WORK_LIMIT)
    wanted = {
        site.id: _Wanted(site=site, setting=case.targets.settings[site.id])
        for site in case.circuit.adjusters
        if site.id in case.targets.settings and case.targets.settings[site.id].screw.may_be_set
    }
    by_law = {site.id for site in case.circuit.adjusters if site.controlled_node == site.reference_node}
    frontier = Frontier(case, work)
    while open_ones := [one for id_, one in wanted.items() if one.answer is None and id_ not in by_law]:
        batch = frontier.next_batch()
        if not batch:
            break
        for one in open_ones:
            _try_batch(case, batch, one, work)
    answers: dict[str, TestState | NotInUse | NotFound] = {}
    for id_, one in wanted.items():
        every_set = frontier.exhausted and not one.unjudged
        governs = True if one.responded or id_ in by_law else None
        if one.answer is None and every_set and not governs:
            governs = ever_governs(case.circuit, case.base, id_, case.trusted_ports, work)
        if one.answer is not None:
            answers[id_] = replace(one.answer, near_misses=one.near_misses())
        elif id_ in by_law or governs is False:
            answers[id_] = NotInUse(
                adjuster=id_, by_law=id_ in by_law, states=frontier.tried, guard=_guard(case, one.setting)
            )
        else:
            answers[id_] = NotFound(
                adjuster=id_,
                verdict=Verdict.REFUTED if every_set and governs else Verdict.NOT_FOUND,
                states=frontier.tried,
                near_misses=one.near_misses(),
            )
    return Search(answers=answers, states=frontier.tried, limit=work.most)


def _guard(case: Case, setting: Setting) -> Guard | None:
    pumps = guarded_pumps(case.machine, case.circuit, case.base, setting.adjuster)
    return Guard(pumps=pumps, setting_bar=setting.target_bar, given_by=setting.given_by) if pumps else None


def _try_batch(case: Case, batch: Sequence[Tried], one: _Wanted, work: Work) -> None:
    """Notes what fails in each set for one adjuster, up to the first that serves.

    Those that hold at the target are judged some at a time. Where no gauge shows a state, faults are tried
    on it only if it would then come nearer than any that is known to fail for its gauge alone.
    """
    id_ = one.site.id
    failures = {
        place: first_failure(tried.solution, one.site, one.setting.target_bar, case.trusted_ports)
        for place, tried in enumerate(batch)
        if not tried.candidate.adjusts(id_)
    }
    one.responded = one.responded or any(_responds(batch[place].solution, one.site) for place in failures)
    waiting = [
        place
        for place, failure in failures.items()
        if failure is None or failure.condition is Condition.WITHIN
    ]
    judged: dict[int, Serving | Failure] = {}
    together = FIRST_FINALISTS

    for place, failure in failures.items():
        if waiting and place >= waiting[0]:
            if work.spent:
                one.unjudged = True
                return
            chosen, waiting = waiting[:together], waiting[together:]
            together = min(2 * together, FINALISTS)
            finalists = [
                Finalist(candidate=batch[each].candidate, start_bar=batch[each].solution.pressures_bar)
                for each in chosen
            ]
            distances = [_distance(batch[each].solution, one) for each in chosen]
            worth = [one.is_nearer(Condition.SEEN, distance) for distance in distances]
            judged.update(zip(chosen, judge(case, finalists, id_, work, worth=worth), strict=True))
        outcome = judged.get(place, failure)
        if isinstance(outcome, Serving):
            one.answer = answer_of(case, outcome, id_, work)
            return
        if outcome is not None:
            one.note(outcome, batch[place].candidate.changes, _distance(batch[place].solution, one))


def _responds(solution: Solution, site: AdjusterSite) -> bool:
    return solution.established and abs(solution.effects[site.id][site.controlled_node]) > STILL_EFFECT


def _distance(solution: Solution, one: _Wanted) -> float:
    """How far a reading is from the target, in bar; a state without established pressures is farthest."""
    if not solution.established:
        return float("inf")
    return abs(solution.pressures_bar[one.site.controlled_node] - one.setting.target_bar)
