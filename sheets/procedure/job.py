"""What the stages of a task are written from: states, order, line-up of hand valves, gauges."""

from __future__ import annotations

from dataclasses import dataclass

from sheets.circuit.model import AdjusterSite
from sheets.circuit.plant import Adjust, MoveValve, PlantState
from sheets.circuit.solver import solve, solve_one
from sheets.machine.parts import HandValve
from sheets.procedure.answers import TestState
from sheets.procedure.at_stop import find_approach
from sheets.procedure.case import Case
from sheets.procedure.changes import apply
from sheets.procedure.conditions import Failure, first_failure, over_rating, unestablished
from sheets.procedure.faulted import moved_by_fault
from sheets.procedure.task import Task, TaskKind
from sheets.procedure.work import ALL, Work

_STUCK_FACTOR = 5.0
"""An adjuster stuck shut, as a multiple of the end of its range: it limits nothing."""
SAME_READING_BAR = 0.05
"""A valve that others need may stay in place if it shifts a reading by less than this."""


@dataclass(frozen=True, kw_only=True)
class Job:
    """What the stages of one task are written from."""

    case: Case
    task: Task
    found: dict[str, TestState]
    order: tuple[str, ...]
    """All adjusters that can be set, in the order of setting."""
    to_set: tuple[str, ...]
    """Those that this task sets."""
    unknown: frozenset[str]
    """Adjusters of which nobody knows how they stand: new, or never set."""
    line_up: tuple[MoveValve, ...]
    """Hand valves that are put in place before the first start."""
    gauges: tuple[tuple[str, str], ...]
    """Gauge and the test point at which it is fitted for the job; two never share one."""
    locked: bool
    """The job has lockouts: something is fitted, a cylinder is left pressed against its stop, or the site
    wants them always."""

    @property
    def limits_unknown(self) -> tuple[str, ...]:
        """Unknown adjusters that limit a pressure against tank: backed out before the first start."""
        return tuple(id_ for id_ in self.order if id_ in self.unknown and limits(self.case, id_))

    @property
    def lined_up(self) -> PlantState:
        """The running rest state with the line-up in place."""
        return apply(self.case.base, self.line_up)


def limits(case: Case, adjuster: str) -> bool:
    """Whether an adjuster limits a pressure against tank or case, rather than a difference of two lines."""
    return case.site(adjuster).width_flow_lpm == 0.0


def prepare(case: Case, task: Task, found: dict[str, TestState], order: tuple[str, ...]) -> Job:
    """What the task needs of the test states that were found."""
    to_set, unknown = _scope(case, task, found, order)
    return Job(
        case=case,
        task=task,
        found=found,
        order=order,
        to_set=to_set,
        unknown=unknown,
        line_up=_line_up(case, found, order),
        gauges=_gauges(case, found, order),
        locked=(
            bool(_gauges(case, found, order))
            or any(found[id_].approach is not None for id_ in order)
            or case.policies.lockout_always
        ),
    )


def _scope(
    case: Case, task: Task, found: dict[str, TestState], order: tuple[str, ...]
) -> tuple[tuple[str, ...], frozenset[str]]:
    """Adjusters that the task sets, and those that nobody knows.

    After a replacement the part's own adjusters are set, and each that one of them needs out of the way.
    """
    match task.kind:
        case TaskKind.READ:
            return (), frozenset()
        case TaskKind.SET:
            return order, frozenset()
        case TaskKind.COMMISSION:
            return order, frozenset(order)
        case TaskKind.REPLACE:
            own = {id_ for id_ in order if case.site(id_).part == task.part}
            moved = {raised for id_ in own for raised in found[id_].raised}
            return tuple(id_ for id_ in order if id_ in own | moved), frozenset(own)


def _line_up(case: Case, found: dict[str, TestState], order: tuple[str, ...]) -> tuple[MoveValve, ...]:
    """Hand valves of all states together, if a start with them is right and every state still shows."""
    wished = tuple(
        dict.fromkeys(
            change
            for id_ in order
            for change in found[id_].changes
            if isinstance(change, MoveValve) and isinstance(case.machine.parts[change.valve], HandValve)
        )
    )
    if not _may_stand_before_start(case, wished):
        return ()
    return wished if all(_still_serves(case, wished, found[id_]) for id_ in order) else ()


def _may_stand_before_start(case: Case, moves: tuple[MoveValve, ...]) -> bool:
    """Whether a start with these valves moved stays within ratings, also with any one adjuster stuck shut.

    If it doesn't, the drive starts unloaded and the valves are closed in increments under the gauge.
    """
    state = apply(case.base, moves)
    stuck = [state.adjusted(site.id, _STUCK_FACTOR * site.highest_bar) for site in case.circuit.adjusters]
    solved = solve(case.circuit, [state, *stuck])
    return all(
        unestablished(solution, case.trusted_ports) is None and over_rating(solution) is None
        for solution in map(solved.one, range(len(solved)))
    )


def _still_serves(case: Case, line_up: tuple[MoveValve, ...], state: TestState) -> bool:
    """Whether an adjuster's state still shows it with the valves of the others left in place."""
    site = case.site(state.adjuster)
    standing = apply(apply(case.base, line_up), state.changes)
    changes = (*line_up, *state.changes)
    solution = solve_one(case.circuit, standing, effects=True)
    target_bar = case.targets.settings[state.adjuster].target_bar
    return (
        first_failure(solution, site, target_bar, case.trusted_ports) is None
        and abs(solution.pressures_bar[site.controlled_node] - state.reading_bar) < SAME_READING_BAR
        and moved_by_fault(case, standing) is None
        and not isinstance(find_approach(case, changes, state.adjuster, Work(ALL)), Failure)
    )


def _gauges(case: Case, found: dict[str, TestState], order: tuple[str, ...]) -> tuple[tuple[str, str], ...]:
    """Gauges to fit, as the states ask for them; a later one takes another test point on the same line."""
    taken: dict[str, str] = {}
    for id_ in order:
        choice = found[id_].gauge
        if not choice.test_point or choice.gauge in taken:
            continue
        node = case.circuit.node_of[choice.port]
        same_line = [
            point
            for point in case.machine.gauges[choice.gauge].fitted_at
            if case.circuit.node_of.get(f"{point}.P") == node
        ]
        free = (point for point in (choice.test_point, *same_line) if point not in taken.values())
        taken[choice.gauge] = next(free, choice.test_point)
    return tuple(taken.items())


def shows(job: Job, state: PlantState, adjuster: str) -> bool:
    """Whether an adjuster reads in its own state from here, with no other moved out of the way."""
    found = job.found[adjuster]
    if adjuster in job.unknown or found.raised:
        return False
    site: AdjusterSite = job.case.site(adjuster)
    moves = tuple(change for change in found.changes if not isinstance(change, Adjust))
    standing = apply(state, moves)
    for drive in job.case.circuit.drives:
        standing = standing.driven(drive, on=True)
    solution = solve_one(job.case.circuit, standing, effects=True)
    return first_failure(solution, site, state.settings_bar[adjuster], job.case.trusted_ports) is None
