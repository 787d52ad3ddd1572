"""How long a search takes: one that finds its states, and two that are refused.

Run: PYTHONPATH=. python tests/benchmarks/search_times.py. It prints times, their ratio to the bare linear
algebra, and with --profile where they go; nothing is asserted, since times hang on the computer.
"""

from __future__ import annotations

import cProfile
import pstats
import sys
import tempfile
import time
from pathlib import Path

import numpy as np
from made_machines import sections_text

from sheets.circuit import newton
from sheets.pipeline import check, targets
from sheets.procedure.case import Case
from sheets.procedure.changes import count_candidates, possible_options
from sheets.procedure.search import WORK_LIMIT, find_test_states
from sheets.procedure.work import Work

SAMPLE = Path(__file__).parents[2] / "sample_machines" / "clay_mixer.yaml"
REPEATS = 3


def case_of(file: Path) -> Case:
    described = check(file)
    return Case(described.machine, described.circuit, targets(described), described.policies)


def measured(name: str, case: Case, *, repeats: int) -> None:
    """Best of so many searches, warm, against the linear solves that the solver asked for."""
    shapes: list[tuple[int, ...]] = []
    plain = newton.solve_each

    def counted(matrices: newton.Floats, right: newton.Floats) -> newton.Floats:
        shapes.append(matrices.shape)
        return plain(matrices, right)

    took = float("inf")
    answer = None
    for _ in range(repeats):
        shapes.clear()
        newton.solve_each = counted
        begun = time.process_time()
        work = Work(WORK_LIMIT)
        answer = find_test_states(case, work)
        took = min(took, time.process_time() - begun)
        newton.solve_each = plain
    rng = np.random.default_rng(1)
    count = len(case.circuit.nodes) - 1
    most = max(shape[0] for shape in shapes)
    matrices = rng.normal(size=(most, count, count)) + 30.0 * np.eye(count)
    right = rng.normal(size=(most, count, 1))
    begun = time.process_time()
    for shape in shapes:
        np.linalg.solve(matrices[: shape[0]], right[: shape[0]])
    bare = time.process_time() - begun
    sets = count_candidates(possible_options(case.machine, case.circuit))
    answers = ", ".join(f"{id_} {type(one).__name__}" for id_, one in answer.answers.items())
    print(
        f"{name}: {len(case.machine.parts)} parts, {count} unknowns, {answer.states} of {sets} sets of "
        f"changes, {work.done} states, {took:.2f} s, {1000 * took / answer.states:.2f} ms a set, "
        f"{took / bare:.1f} times the bare linear algebra of its {sum(shape[0] for shape in shapes)} solves\n"
        f"    {answers}"
    )


def main() -> None:
    """A sample that is found; a relief that no state reaches, up to the limit; a gauge that won't do."""
    found = case_of(SAMPLE)
    find_test_states(found)
    measured("found", found, repeats=REPEATS)
    with tempfile.TemporaryDirectory() as folder:
        unreached, unseen = Path(folder) / "unreached.yaml", Path(folder) / "unseen.yaml"
        unreached.write_text(sections_text(3, compensator_highest_bar=200.0), encoding="utf-8")
        unseen.write_text(sections_text(3, accuracy_class=1.6), encoding="utf-8")
        refused, badly_seen = case_of(unreached), case_of(unseen)
    measured(f"not reached, limit {WORK_LIMIT}", refused, repeats=1)
    measured("not seen", badly_seen, repeats=1)
    if "--profile" in sys.argv:
        profile = cProfile.Profile()
        profile.runcall(find_test_states, badly_seen)
        pstats.Stats(profile).sort_stats("cumulative").print_stats(35)


if __name__ == "__main__":
    main()
