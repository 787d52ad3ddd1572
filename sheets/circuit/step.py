"""One step of the plant: act, solve, settle."""

from __future__ import annotations

from collections.abc import Collection, Sequence
from dataclasses import dataclass, field, replace
from enum import Enum
from typing import Final

from sheets.circuit.model import Circuit
from sheets.circuit.plant import PlantAction, PlantState, Travel, act
from sheets.circuit.solution import Solution
from sheets.circuit.solver import solve

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
    circuit: Circuit, state: PlantState, action: PlantAction | None, *, runs: Collection[str] | None = None
) -> StepOutcome:
    """Give what follows from an action, down to where things stand; see ``take_steps``."""
    return take_steps(circuit, [(state, action)], runs=runs)[0]


def take_steps(
    circuit: Circuit,
    steps: Sequence[tuple[PlantState, PlantAction | None]],
    *,
    runs: Collection[str] | None = None,
) -> tuple[StepOutcome, ...]:
    """Give what follows from actions, each on a plant of its own, solved together for speed.

    Parameters
    ----------
    circuit : Circuit
        The circuit of all the plants.
    steps : sequence of (PlantState, PlantAction or None)
        The plant before and what is done; None settles the state as it is.
    runs : identifiers
        Cylinders that run to their stops where they move; all of them, if left out. Those that are named are
        taken to stand anywhere at first, for nobody knows where a cylinder stands before it runs. With none
        named the first pass is the last.

    Returns
    -------
    tuple of StepOutcome
        Motors have no stop, so they may go on moving. Cylinders run to their stops one after another, by
        name; a set of stops that comes back is cycling, more than 50 events are not established.

    Valid for steady states between events. Source: the solver's.
    """
    may_run = frozenset(circuit.actuators.ids if runs is None else runs)
    plants = []
    for state, action in steps:
        now = state if action is None else act(state, action)
        for actuator in runs or ():
            now = now.standing(actuator, "between")
        plants.append(_Run(circuit=circuit, may_run=may_run, now=now))
    going = plants
    while going:
        batch = solve(circuit, [plant.now for plant in going])
        for index, plant in enumerate(going):
            plant.settle(batch.one(index))
        going = [plant for plant in going if plant.outcome is None]
    return tuple(plant.result() for plant in plants)


@dataclass
class _Run:
    """One plant on its way to where it stands."""

    circuit: Circuit
    may_run: frozenset[str]
    now: PlantState
    passes: list[Solution] = field(default_factory=list)
    moved: set[str] = field(default_factory=set)
    seen: set[tuple[Travel, ...]] = field(default_factory=set)
    outcome: Outcome | None = None

    def settle(self, solution: Solution) -> None:
        """Take in the next pass: carry its pressures, run the first moving cylinder to its stop."""
        self.seen.add(_stops(self.circuit, self.now))
        self.passes.append(solution)
        if not solution.established or len(self.passes) > MOST_EVENTS:
            self.outcome = Outcome.NOT_ESTABLISHED
            return
        self.moved |= solution.moving
        self.now = replace(self.now, pressures_bar=solution.pressures_bar)
        runs = _first_to_a_stop(self.circuit, solution, self.may_run)
        if runs is None:
            self.outcome = Outcome.MOVING if solution.moving else Outcome.STILL
            return
        actuator, stop = runs
        self.now = self.now.standing(actuator, stop)
        if _stops(self.circuit, self.now) in self.seen:
            self.outcome = Outcome.CYCLING

    def result(self) -> StepOutcome:
        """The outcome, once there is one."""
        return StepOutcome(
            state=self.now,
            solution=self.passes[-1],
            outcome=self.outcome or Outcome.NOT_ESTABLISHED,
            passes=tuple(self.passes),
            moved=frozenset(self.moved),
        )


def _stops(circuit: Circuit, state: PlantState) -> tuple[Travel, ...]:
    return tuple(state.travel.get(actuator, "between") for actuator in circuit.actuators.ids)


def _first_to_a_stop(
    circuit: Circuit, solution: Solution, may_run: frozenset[str]
) -> tuple[str, Travel] | None:
    """The first moving cylinder that may run, and the stop that it runs to."""
    for actuator, stops in zip(circuit.actuators.ids, circuit.actuators.has_stops, strict=True):
        if stops and actuator in may_run & solution.moving:
            return actuator, "far stop" if solution.speeds[actuator] > 0.0 else "near stop"
    return None
