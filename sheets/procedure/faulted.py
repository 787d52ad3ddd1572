"""What moves, or passes a rating, when one component fails while people set: all barriers rest on this."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import replace

from sheets.amounts import Amount
from sheets.circuit.faults import CAN_MOVE, Fault, FaultKind, faults_of
from sheets.circuit.plant import PlantState
from sheets.circuit.solution import Solution
from sheets.circuit.solver import solve_one
from sheets.machine.parts import HandValve
from sheets.procedure.case import Case
from sheets.procedure.conditions import Condition, Failure, moving, over_rating
from sheets.procedure.work import ALL, Work


def moved_by_fault(case: Case, state: PlantState) -> Failure | None:
    """What moves, or passes a rating, when one spool sticks or leaks, or one coil is dead.

    A spool that is held may also stand in its other shifted position: then ratings alone are judged. With the
    work loads of the file, then without them: a light load moves sooner, and the oil that a piston shuts in
    rises farther.
    """
    return moved_by_faults(case, [(state, solve_one(case.circuit, state))], Work(ALL))[0]


def moved_by_faults(
    case: Case, states: Sequence[tuple[PlantState, Solution]], work: Work
) -> list[Failure | None]:
    """The same for many states, each with its solution without a fault, solved together."""
    found = _moved(case, states, work)
    left = [index for index, failure in enumerate(found) if failure is None]
    idle = _moved(case, [(states[index][0].unloaded(), states[index][1]) for index in left], work)
    for index, failure in zip(left, idle, strict=True):
        found[index] = without_load(failure)
    return found


def _moved(case: Case, states: Sequence[tuple[PlantState, Solution]], work: Work) -> list[Failure | None]:
    faults = [
        (*faults_of(case.machine, case.circuit, state, kinds=CAN_MOVE), *_other_ways(case, state))
        for state, _ in states
    ]
    asked = [
        (state, fault, sound.pressures_bar if sound.established else state.pressures_bar)
        for (state, sound), here in zip(states, faults, strict=True)
        for fault in here
    ]
    solutions = iter(work.under_faults(case.circuit, asked))
    found: list[Failure | None] = []
    for (state, _), here in zip(states, faults, strict=True):
        failures = [_under_fault(fault, next(solutions), state) for fault in here]
        found.append(next((failure for failure in failures if failure is not None), None))
    return found


def _other_ways(case: Case, state: PlantState) -> Iterator[Fault]:
    """A spool that is held in one shifted position, held or stuck in another: one slip of a hand away."""
    for valve, positions in case.circuit.positions.items():
        if state.positions[valve] == positions[0] or isinstance(case.machine.parts[valve], HandValve):
            continue
        for position in positions[1:]:
            if position != state.positions[valve]:
                yield Fault(kind=FaultKind.SPOOL_STUCK, part=valve, position=position)


def _under_fault(fault: Fault, solution: Solution, state: PlantState) -> Failure | None:
    slip = fault.kind is FaultKind.SPOOL_STUCK and not fault.shows_in(solution.circuit, state)
    if not solution.established:
        return Failure(condition=Condition.BARRED, data={"fault": fault.kind.value, "valve": fault.part})
    failure = None if slip else moving(solution)
    if failure is not None:
        return Failure(condition=Condition.BARRED, data={**failure.data, **fault_data(fault)})
    failure = over_rating(solution)
    if failure is not None:
        return replace(failure, data={**failure.data, **fault_data(fault)})
    return None


def fault_data(fault: Fault) -> dict[str, Amount | str]:
    """A fault as data of a failure."""
    return {"fault": fault.kind.value, "valve": fault.part, "position": fault.position}


def without_load(failure: Failure | None) -> Failure | None:
    """A failure of the state without work loads, said so."""
    return None if failure is None else replace(failure, data={**failure.data, "idle": "idle"})
