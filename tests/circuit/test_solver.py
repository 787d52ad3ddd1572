"""What the solver promises for every circuit: one answer, whatever the start, the company and the thread."""

from __future__ import annotations

import numpy as np
import pytest
from circuit_bench import bench, compensated, many_sections, relief

from sheets.circuit import newton
from sheets.circuit.build import build_circuit
from sheets.circuit.model import Circuit
from sheets.circuit.plant import PlantState
from sheets.circuit.solver import solve, solve_one
from sheets.errors import NotEstablishedError

BATCH = 150


def mixed_states(circuit: Circuit, *, seed: int, before: np.ndarray | None = None) -> list[PlantState]:
    """States with valves, drives, settings and stops at random."""
    rng = np.random.default_rng(seed)
    travels = ("between", "near stop", "far stop")
    none = (0.0,) * len(circuit.nodes)
    return [
        PlantState(
            positions={valve: str(rng.choice(names)) for valve, names in circuit.positions.items()},
            running=frozenset(circuit.drives) if rng.random() < 0.7 else frozenset(),
            settings_bar={s.id: rng.uniform(s.lowest_bar, s.highest_bar) for s in circuit.adjusters},
            pressures_bar=none if before is None else tuple(before[index].tolist()),
            travel={actuator: travels[rng.integers(3)] for actuator in circuit.actuators_ids},
        )
        for index in range(BATCH)
    ]


@pytest.fixture(scope="module", params=["standby end", "compensator end"])
def circuit(request: pytest.FixtureRequest) -> Circuit:
    return build_circuit(many_sections(3), sealed_ls=request.param)


@pytest.fixture(scope="module")
def remembering(circuit: Circuit) -> list[PlantState]:
    """States that come after others, so that memory matters."""
    first = solve(circuit, mixed_states(circuit, seed=1))
    assert np.all(first.established)
    return mixed_states(circuit, seed=2, before=first.pressures_bar)


def test_every_mixed_state_is_established(circuit: Circuit, remembering: list[PlantState]):
    batch = solve(circuit, remembering)
    assert np.all(batch.established)
    assert np.all(batch.pressures_bar[:, 0] == 0.0)
    assert np.all(batch.pressures_bar > -1.0)
    assert np.all(batch.max_residual_lpm < 1e-6)


def test_three_starts_agree(circuit: Circuit, remembering: list[PlantState]):
    own = solve(circuit, remembering)
    for start in (
        np.full_like(own.pressures_bar, 100.0),
        np.random.default_rng(3).uniform(0.0, 300.0, own.pressures_bar.shape),
    ):
        other = solve(circuit, remembering, start=start)
        assert np.all(other.established)
        assert np.max(np.abs(other.pressures_bar - own.pressures_bar)) < 1e-5


def test_batch_equals_single_to_the_last_bit(circuit: Circuit, remembering: list[PlantState]):
    batch = solve(circuit, remembering, effects=True)
    for index in range(0, BATCH, 10):
        single = solve(circuit, [remembering[index]], effects=True)
        assert np.array_equal(single.pressures_bar[0], batch.pressures_bar[index])
        assert np.array_equal(single.way_flows_lpm[0], batch.way_flows_lpm[index])
        assert np.array_equal(single.effects[0], batch.effects[index])
    backward = solve(circuit, remembering[::-1])
    assert np.array_equal(backward.pressures_bar[::-1], batch.pressures_bar)


def test_effects_are_differences_of_two_solutions(circuit: Circuit):
    states = mixed_states(circuit, seed=4)
    batch = solve(circuit, states, effects=True)
    # Far from a bend only: there the two sides of a difference differ themselves.
    step = 1e-3
    compared = 0
    for index, site in enumerate(circuit.adjusters):
        sides = []
        for sign in (-1.0, 1.0):
            moved = [s.adjusted(site.id, s.settings_bar[site.id] + sign * step) for s in states]
            side = solve(circuit, moved, start=batch.pressures_bar)
            assert np.all(side.established)
            sides.append(side.pressures_bar)
        halves = [(batch.pressures_bar - sides[0]) / step, (sides[1] - batch.pressures_bar) / step]
        smooth = np.abs(halves[0] - halves[1]) < 5e-3
        difference = (sides[1] - sides[0]) / (2.0 * step)
        assert np.max(np.abs(difference - batch.effects[:, index])[smooth]) < 5e-3
        compared += int(np.sum(np.abs(batch.effects[:, index][smooth]) > 0.5))
    assert compared > 50


def test_a_state_that_is_not_established_shows_no_figures(monkeypatch: pytest.MonkeyPatch):
    circuit = build_circuit(
        bench(
            {"PU1": compensated(), "RV1": relief()},
            {"tank": "TK1.S TK1.T PU1.S PU1.L RV1.T", "line": "PU1.P RV1.P"},
        )
    )
    state = circuit.rest_state({"PU1.compensator": 200.0, "RV1": 250.0}).driven("M1", on=True)
    assert solve_one(circuit, state).established
    for limit in ("BOUNDED_STEPS", "NEWTON_STEPS", "TIME_STEPS"):
        monkeypatch.setattr(newton, limit, 1)
    solution = solve_one(circuit, state)
    assert not solution.established
    assert all(np.isnan(solution.pressures_bar))
    with pytest.raises(NotEstablishedError) as caught:
        solution.pressure_at("PU1.P")
    assert caught.value.problems[0].fix


def test_the_other_methods_find_what_the_first_finds(
    circuit: Circuit, remembering: list[PlantState], monkeypatch: pytest.MonkeyPatch
):
    states = remembering[:40]
    own = solve(circuit, states)
    for attempt in (newton._by_damping, newton._by_pseudo_time, newton._by_narrowing):
        monkeypatch.setattr("sheets.circuit.solver.find", attempt)
        other = solve(circuit, states)
        both = other.established
        assert np.mean(both) > 0.8
        assert np.max(np.abs(other.pressures_bar - own.pressures_bar)[both]) < 1e-5


def test_a_missing_setting_is_an_error_not_a_nought(circuit: Circuit):
    with pytest.raises(KeyError):
        solve(circuit, [circuit.rest_state({})])


def test_start_of_another_shape_is_refused(circuit: Circuit):
    states = mixed_states(circuit, seed=5)[:2]
    with pytest.raises(ValueError, match="shape"):
        solve(circuit, states, start=np.zeros((1, len(circuit.nodes))))
