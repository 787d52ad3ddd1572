"""How the solver compares with the linear algebra that it cannot do without.

Run: python tests/benchmarks/solver_ratio.py. It prints times and their ratio; nothing is asserted, since
times hang on the computer.
"""

from __future__ import annotations

import sys
import time
from pathlib import Path

import numpy as np

sys.path.insert(0, str(Path(__file__).parents[1] / "circuit"))

from circuit_bench import many_sections

from sheets.circuit import newton
from sheets.circuit.build import build_circuit
from sheets.circuit.plant import PlantState
from sheets.circuit.solver import solve

STATES = 4000


def main() -> None:
    """Solve 4000 mixed states of a circuit of some 25 nodes, cold and after a small change, and compare."""
    circuit = build_circuit(many_sections(4))
    rng = np.random.default_rng(1)
    travels = ("between", "near stop", "far stop")
    states = [
        PlantState(
            positions={valve: str(rng.choice(names)) for valve, names in circuit.positions.items()},
            running=frozenset(circuit.drives),
            settings_bar={s.id: rng.uniform(s.lowest_bar, s.highest_bar) for s in circuit.adjusters},
            pressures_bar=(0.0,) * len(circuit.nodes),
            travel={actuator: travels[rng.integers(3)] for actuator in circuit.actuators_ids},
        )
        for _ in range(STATES)
    ]
    sizes: list[int] = []
    plain = newton.solve_each

    def counted(matrices: newton.Floats, right: newton.Floats) -> newton.Floats:
        sizes.append(len(matrices))
        return plain(matrices, right)

    newton.solve_each = counted
    print(f"{len(circuit.nodes)} nodes, {len(circuit.ways.ids)} ways, {STATES} states")
    solve(circuit, states[:100])
    start = None
    for name, batch in (("cold", states), ("after 2 %", [_nudged(state) for state in states])):
        sizes.clear()
        begun = time.perf_counter()
        solved = solve(circuit, batch, start=start)
        took = time.perf_counter() - begun
        start = solved.pressures_bar
        unknowns = len(circuit.nodes) - 1
        matrices = rng.normal(size=(STATES, unknowns, unknowns)) + 30.0 * np.eye(unknowns)
        right = rng.normal(size=(STATES, unknowns, 1))
        begun = time.perf_counter()
        for size in sizes:
            np.linalg.solve(matrices[:size], right[:size])
        bare = time.perf_counter() - begun
        print(
            f"{name}: {1000.0 * took / STATES:.3f} ms a state, "
            f"{sum(sizes) / STATES:.1f} linear solves a state, "
            f"{100.0 * np.mean(solved.established):.2f} % established, "
            f"{took / bare:.1f} times the bare linear algebra"
        )


def _nudged(state: PlantState) -> PlantState:
    settings_bar = {id_: 1.02 * value for id_, value in state.settings_bar.items()}
    return PlantState(**{**vars(state), "settings_bar": settings_bar})


if __name__ == "__main__":
    main()
