"""Solving plant states: pressures, flows, speeds, and the effect of every adjuster."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from sheets.circuit.equations import Balance, balance, by_settings, jacobian
from sheets.circuit.groups import loose_signals, volume_kept
from sheets.circuit.model import TANK, Circuit
from sheets.circuit.newton import STEP_BAR, Found, acceptable, find, newton_step, solve_each
from sheets.circuit.plant import PlantState
from sheets.circuit.smooth import Bools, Floats
from sheets.circuit.solution import MOVING_LPM, BatchSolution, Solution
from sheets.circuit.stamp import StateArrays

POLISHING_STEPS = 40

__all__ = ["BatchSolution", "Solution", "as_arrays", "solve", "solve_one"]


def solve(
    circuit: Circuit,
    states: Sequence[PlantState],
    *,
    start: Floats | None = None,
    effects: bool = False,
) -> BatchSolution:
    """Give the steady pressures and flows of plant states, each following from the pressures that it had.

    Parameters
    ----------
    circuit : Circuit
        From ``build_circuit``.
    states : sequence of PlantState
        Any mixture of valve positions, drives and settings; solved together, each on its own.
    start : bar, [B, nodes]
        Where to start the iteration, for speed only; the states' own earlier pressures if left out.
    effects : truth
        Whether to work out the change of every pressure by every setting.

    Returns
    -------
    BatchSolution
        ``established`` is false where no solution was found within the limits of the method, where the last
        step was not small, or where a group that is cut off did not keep its oil.

    Raises KeyError where a state lacks a valve, an adjuster or an actuator of the circuit.
    Valid for steady states; transients are not in it. Source: the laws of the families.
    """
    arrays = as_arrays(circuit, states)
    start_bar = arrays.held_bar if start is None else np.array(start, dtype=np.float64)
    if start_bar.shape != arrays.held_bar.shape:
        raise ValueError(f"start must have shape {arrays.held_bar.shape}, not {start_bar.shape}")
    start_bar = start_bar.copy()
    start_bar[:, TANK] = 0.0
    found = find(circuit, arrays, start_bar)
    established, settled = _polished(circuit, arrays, found)
    at = settled or balance(circuit, arrays, found.pressures_bar)
    speeds = circuit.actuators.speeds(at.actuators)
    larger = np.maximum(circuit.actuators.swept_a, circuit.actuators.swept_b)
    pump_flows = at.pumps.through_lpm
    return BatchSolution(
        circuit=circuit,
        established=established,
        pressures_bar=_shown(found.pressures_bar, established),
        way_flows_lpm=_shown(at.ways.through_lpm, established),
        check_flows_lpm=_shown(at.checks.through_lpm, established),
        relief_flows_lpm=_shown(at.reliefs.through_lpm, established),
        pump_flows_lpm=_shown(pump_flows, established),
        strokes=_shown(circuit.pumps.stroke(found.pressures_bar, pump_flows, arrays), established),
        speeds=_shown(speeds, established),
        moving=np.abs(speeds) * larger > MOVING_LPM,
        void_flows_lpm=_shown(at.void_lpm, established),
        loose_signals=loose_signals(circuit, arrays, at),
        effects=_effects(circuit, at, established) if effects else None,
        max_residual_lpm=np.max(np.abs(at.residual_lpm), axis=1, initial=0.0),
    )


def solve_one(circuit: Circuit, state: PlantState, *, effects: bool = False) -> Solution:
    """Give the solution of one state as plain figures; see ``solve``."""
    return solve(circuit, [state], effects=effects).one(0)


def as_arrays(circuit: Circuit, states: Sequence[PlantState]) -> StateArrays:
    """Plant states as arrays, in the orders of the circuit.

    Raises KeyError or ValueError where a state lacks something of the circuit or names an unknown position.
    """
    valves = list(circuit.positions.items())
    sites = [site.id for site in circuit.adjusters]
    travels = [
        [state.travel.get(actuator, "between") if stops else "between" for state in states]
        for actuator, stops in zip(circuit.actuators.ids, circuit.actuators.has_stops, strict=True)
    ]
    shape = (len(states), len(travels))
    return StateArrays(
        positions=np.array(
            [[names.index(state.positions[valve]) for valve, names in valves] for state in states],
            dtype=np.intp,
        ).reshape(len(states), len(valves)),
        running=np.array(
            [[drive in state.running for drive in circuit.drives] for state in states], dtype=np.bool_
        ).reshape(len(states), len(circuit.drives)),
        settings_bar=np.array(
            [[state.settings_bar[id_] for id_ in sites] for state in states], dtype=np.float64
        ).reshape(len(states), len(sites)),
        held_bar=np.array([state.pressures_bar for state in states], dtype=np.float64).reshape(
            len(states), len(circuit.nodes)
        ),
        may_extend=np.array(travels, dtype=object).T.reshape(shape) != "far stop",
        may_retract=np.array(travels, dtype=object).T.reshape(shape) != "near stop",
        loaded=np.array([state.loaded for state in states], dtype=np.bool_),
    )


def _polished(circuit: Circuit, state: StateArrays, found: Found) -> tuple[Bools, Balance | None]:
    """[B] whether a state is established, after undamped steps where a group does not yet hold its volume.

    The balance comes with it where no state needed such a step.

    Inside a group the flows round coarser than what the group stores, so its nodes may pass one by one
    while their sum does not.
    """
    established = np.zeros(len(found.accepted), dtype=np.bool_)
    left = np.flatnonzero(found.accepted)
    moved = False
    for _ in range(POLISHING_STEPS):
        if not left.size:
            break
        part, here = state.take(left), found.pressures_bar[left]
        whole = len(left) == len(established)
        at = (found.last if whole and not moved else None) or balance(circuit, part, here)
        slopes = jacobian(circuit, at)
        step_bar = newton_step(slopes, at)
        settled = acceptable(circuit, at, slopes, here, step_bar) & volume_kept(circuit, part, at, here)
        established[left[settled]] = True
        if whole and np.all(settled):
            return established, at
        moved = True
        here[:, 1:] += np.clip(step_bar, -STEP_BAR, STEP_BAR)
        left = left[~settled]
        found.pressures_bar[left] = here[~settled]
    return established, None


def _shown(values: Floats, established: Bools) -> Floats:
    return np.where(established[:, None], values, np.nan)


def _effects(circuit: Circuit, at: Balance, established: Bools) -> Floats:
    """[B, adjusters, N] the implicit derivative: one factorisation gives every adjuster and every node."""
    batch, count = at.void_lpm.shape
    found = np.zeros((batch, len(circuit.adjusters), count))
    if circuit.adjusters:
        found[:, :, 1:] = np.swapaxes(solve_each(jacobian(circuit, at), by_settings(circuit, at)), 1, 2)
    return np.where(established[:, None, None], found, np.nan)
