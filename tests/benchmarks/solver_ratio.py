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
ALONE = 100
"""States that are solved one by one, too."""


def main() -> None:
    """Solve mixed states of a circuit of some 25 nodes, cold and after a small change, and compare."""
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
    unknowns = len(circuit.nodes) - 1
    matrices = rng.normal(size=(STATES, unknowns, unknowns)) + 30.0 * np.eye(unknowns)
    right = rng.normal(size=(STATES, unknowns, 1))
    for together in (STATES, 1):
        some = states if together > 1 else states[:ALONE]
        start = None
        for name, batch in (("cold", some), ("after 2 %", [_nudged(state) for state in some])):
            sizes.clear()
            begun = time.process_time()
            solved = [
                solve(
                    circuit,
                    batch[first : first + together],
                    start=None if start is None else start[first : first + together],
                )
                for first in range(0, len(batch), together)
            ]
            took = time.process_time() - begun
            start = np.concatenate([each.pressures_bar for each in solved])
            begun = time.process_time()
            for size in sizes:
                np.linalg.solve(matrices[:size], right[:size])
            bare = time.process_time() - begun
            print(
                f"{together} together, {name}: {1000.0 * took / len(batch):.3f} ms a state, "
                f"{sum(sizes) / len(batch):.1f} linear solves a state, "
                f"{100.0 * np.mean([each.established for each in solved]):.2f} % established, "
                f"{took / bare:.1f} times the bare linear algebra"
            )


def _nudged(state: PlantState) -> PlantState:
    settings_bar = {id_: 1.02 * value for id_, value in state.settings_bar.items()}
    return PlantState(**{**vars(state), "settings_bar": settings_bar})


if __name__ == "__main__":
    main()
