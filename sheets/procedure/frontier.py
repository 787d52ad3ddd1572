"""Sets of changes, cheapest first, solved in batches, each from the set that it adds a change to."""

from __future__ import annotations

from dataclasses import dataclass

from sheets.circuit.solution import Solution
from sheets.procedure.case import Case
from sheets.procedure.changes import Candidate, Change, apply, candidates, possible_options
from sheets.procedure.work import Work

FIRST_BATCH = 16
BATCH = 512
"""Sets that are solved together: few at first, since most machines need few."""


@dataclass(frozen=True, kw_only=True)
class Tried:
    """A set of changes with its solution, whatever else at its target."""

    candidate: Candidate
    solution: Solution


class Frontier:
    """Gives every set of changes once."""

    def __init__(self, case: Case, work: Work) -> None:
        self.tried = 0
        self._case = case
        self._work = work
        self._stream = candidates(possible_options(case.machine, case.circuit))
        self._ahead = next(self._stream, None)
        self._size = FIRST_BATCH
        self._pressures_bar: dict[tuple[Change, ...], tuple[float, ...]] = {}

    @property
    def exhausted(self) -> bool:
        """Whether every set was given."""
        return self._ahead is None

    def next_batch(self) -> list[Tried]:
        """The next sets, more from call to call; none when all were given or the work is spent."""
        batch: list[Candidate] = []
        while self._ahead is not None and len(batch) < min(self._size, self._work.left):
            batch.append(self._ahead)
            self._ahead = next(self._stream, None)
        if not batch:
            return []
        self.tried += len(batch)
        self._size = min(2 * self._size, BATCH)
        solved = self._work.solve(
            self._case.circuit,
            [apply(self._case.base, candidate.changes) for candidate in batch],
            start_bar=[self._start(candidate.changes) for candidate in batch],
            effects=True,
        )
        tried = [
            Tried(candidate=candidate, solution=solved.one(index)) for index, candidate in enumerate(batch)
        ]
        for one in tried:
            if one.solution.established:
                self._pressures_bar[one.candidate.changes] = one.solution.pressures_bar
        return tried

    def _start(self, changes: tuple[Change, ...]) -> tuple[float, ...]:
        """Pressures of a set with one change less, the dearest first: they are mostly near."""
        for place in reversed(range(len(changes))):
            known = self._pressures_bar.get((*changes[:place], *changes[place + 1 :]))
            if known is not None:
                return known
        return self._case.base.pressures_bar
