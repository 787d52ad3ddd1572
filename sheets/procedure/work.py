"""What a search may spend, counted in solved states and never timed: one file has one answer everywhere."""

from __future__ import annotations

import sys
from collections.abc import Callable, Collection, Sequence

import numpy as np

from sheets.circuit.faults import Fault, solve_under_faults
from sheets.circuit.model import Circuit
from sheets.circuit.plant import PlantAction, PlantState
from sheets.circuit.solution import BatchSolution, Solution
from sheets.circuit.solver import solve
from sheets.circuit.step import StepOutcome, take_steps

ALL = sys.maxsize
"""No limit: what is asked for is few."""
Watch = Callable[[int, int], None]
"""Is told how many states were solved, and how many may be; for a person who waits."""


def unwatched(_done: int, _most: int) -> None:
    """Nobody waits."""


class Work:
    """Solves states and counts them, up to a limit at which whoever asks must stop."""

    def __init__(self, most: int, watch: Watch = unwatched) -> None:
        self.most = most
        self.done = 0
        self._watch = watch

    @property
    def left(self) -> int:
        """States that may still be solved."""
        return max(0, self.most - self.done)

    @property
    def spent(self) -> bool:
        """Whether the limit is reached: what is open then stays open."""
        return self.done >= self.most

    def solve(
        self,
        circuit: Circuit,
        states: Sequence[PlantState],
        *,
        start_bar: Sequence[Sequence[float]] | None = None,
        effects: bool = False,
    ) -> BatchSolution:
        """``solve`` of the circuit, counted. ``start_bar``: by state and node, for speed only."""
        self._count(len(states))
        start = np.array(start_bar, dtype=np.float64) if start_bar else None
        return solve(circuit, states, start=start, effects=effects)

    def under_faults(
        self, circuit: Circuit, asked: Sequence[tuple[PlantState, Fault, Sequence[float]]]
    ) -> tuple[Solution, ...]:
        """``solve_under_faults`` of the circuit, counted."""
        self._count(len(asked))
        return solve_under_faults(circuit, asked)

    def run(
        self,
        circuit: Circuit,
        steps: Sequence[tuple[PlantState, PlantAction | None]],
        *,
        runs: Collection[str],
    ) -> tuple[StepOutcome, ...]:
        """``take_steps`` of the circuit, counted by its passes."""
        outcomes = take_steps(circuit, steps, runs=runs)
        self._count(sum(len(outcome.passes) for outcome in outcomes))
        return outcomes

    def _count(self, states: int) -> None:
        self.done += states
        self._watch(self.done, self.most)
