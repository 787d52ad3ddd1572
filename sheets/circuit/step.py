"""One step of the plant: act, solve, settle."""

from __future__ import annotations

from dataclasses import dataclass, replace
from enum import Enum
from typing import Final

from sheets.circuit.model import Circuit
from sheets.circuit.plant import PlantAction, PlantState, Travel, act
from sheets.circuit.solution import Solution
from sheets.circuit.solver import solve_one

MOST_EVENTS: Final = 50


class Outcome(Enum):
    """How a step ends."""

    STILL = "still"
    MOVING = "moving"
    CYCLING = "cycling"
    NOT_ESTABLISHED = "not established"


@dataclass(frozen=True, kw_only=True)
class StepOutcome:
    """What a step did."""

    state: PlantState
    """The plant after it, with its memory; as it was right after the action where nothing is established."""
    solution: Solution
    """The last pass."""
    outcome: Outcome
    passes: tuple[Solution, ...]
    """All passes, in order: the worst values of the step are the worst over these."""
    moved: frozenset[str]
    """Actuators that moved in any pass."""


def take_step(
    circuit: Circuit, state: PlantState, action: PlantAction | None, *, to_stops: bool = True
) -> StepOutcome:
    """Give what follows from an action, down to where things stand.

    Parameters
    ----------
    circuit, state : Circuit, PlantState
        The plant before.
    action : PlantAction or None
        What is done; None settles the state as it is.
    to_stops : truth
        Whether a moving cylinder runs to its stop. Without it the first pass is the last.

    Returns
    -------
    StepOutcome
        Motors have no stop, so they may go on moving. Cylinders run to their stops one after another, by
        name; a set of stops that comes back is cycling, more than 50 events are not established.

    Valid for steady states between events. Source: the solver's.
    """
    now = state if action is None else act(state, action)
    passes: list[Solution] = []
    moved: set[str] = set()
    seen = {_stops(circuit, now)}
    while True:
        solution = solve_one(circuit, now)
        passes.append(solution)
        if not solution.established or len(passes) > MOST_EVENTS:
            return _outcome(now, passes, moved, Outcome.NOT_ESTABLISHED)
        moved |= solution.moving
        now = replace(now, pressures_bar=solution.pressures_bar)
        runs = _first_to_a_stop(circuit, solution)
        if runs is None or not to_stops:
            return _outcome(now, passes, moved, Outcome.MOVING if solution.moving else Outcome.STILL)
        actuator, stop = runs
        now = replace(now, travel={**now.travel, actuator: stop})
        if _stops(circuit, now) in seen:
            return _outcome(now, passes, moved, Outcome.CYCLING)
        seen.add(_stops(circuit, now))


def _outcome(
    state: PlantState, passes: list[Solution], moved: set[str], outcome: Outcome
) -> StepOutcome:
    return StepOutcome(
        state=state, solution=passes[-1], outcome=outcome, passes=tuple(passes), moved=frozenset(moved)
    )


def _stops(circuit: Circuit, state: PlantState) -> tuple[Travel, ...]:
    return tuple(state.travel.get(actuator, "between") for actuator in circuit.actuators.ids)


def _first_to_a_stop(circuit: Circuit, solution: Solution) -> tuple[str, Travel] | None:
    """The first moving cylinder and the stop that it runs to."""
    for actuator, stops in zip(circuit.actuators.ids, circuit.actuators.has_stops, strict=True):
        if stops and actuator in solution.moving:
            return actuator, "far stop" if solution.speeds[actuator] > 0.0 else "near stop"
    return None
