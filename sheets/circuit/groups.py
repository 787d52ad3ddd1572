"""Groups of nodes that oil joins in a solved state, and whether each kept its volume."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from sheets.circuit.equations import Balance
from sheets.circuit.model import TANK, Circuit
from sheets.circuit.smooth import Bools, Floats, Ints
from sheets.circuit.stamp import StateArrays

VOLUME_BAR = 2e-6
"""Drift of a group that is accepted, as a pressure over its whole capacity."""


def _edges(circuit: Circuit, state: StateArrays, at: Balance) -> Iterator[tuple[int, int, Bools]]:
    """Pairs of nodes and in which states oil passes between them, pumps left out."""
    ways_open = circuit.ways.is_open(state) & (circuit.ways.conductance > 0.0)
    yield from _pairs(circuit.ways.first, circuit.ways.second, ways_open)
    yield from _pairs(circuit.checks.first, circuit.checks.second, at.checks.through_lpm != 0.0)
    yield from _pairs(circuit.reliefs.first, circuit.reliefs.second, at.reliefs.through_lpm != 0.0)
    motors = circuit.actuators
    always = np.ones((len(at.void_lpm), len(motors.ids)), dtype=np.bool_)
    yield from _pairs(motors.node_a, motors.node_b, always & (motors.cross_leakage > 0.0))
    yield from _pairs(motors.node_a, motors.case, always & (motors.case_leakage > 0.0))
    yield from _pairs(motors.node_b, motors.case, always & (motors.case_leakage > 0.0))


def _pump_edges(circuit: Circuit, state: StateArrays) -> Iterator[tuple[int, int, Bools]]:
    """Pairs of nodes that a turning pump joins, by what it moves or by what seeps inside it."""
    pumps = circuit.pumps
    turning = pumps.turning(state)
    for other in (pumps.suction, pumps.case):
        yield from _pairs(pumps.outlet, other, turning)
    source = np.where(pumps.bled_from_outlet, pumps.outlet, pumps.case)
    yield from _pairs(source, pumps.signal, turning & (pumps.signal_bleed > 0.0))


def _pairs(first: Ints, second: Ints, active: Bools) -> Iterator[tuple[int, int, Bools]]:
    for column in np.flatnonzero(np.any(active, axis=0)):
        yield int(first[column]), int(second[column]), active[:, column]


def _labels(edges: list[tuple[int, int, Bools]], *, batch: int, count: int) -> Ints:
    """[B, N] lowest node of the group that each node belongs to."""
    labels = np.broadcast_to(np.arange(count), (batch, count)).copy()
    changed = True
    while changed:
        before = labels.copy()
        for one, other, active in edges:
            lower = np.minimum(labels[:, one], labels[:, other])
            labels[:, one] = np.where(active, lower, labels[:, one])
            labels[:, other] = np.where(active, lower, labels[:, other])
        changed = not np.array_equal(before, labels)
    return labels


def volume_kept(circuit: Circuit, state: StateArrays, at: Balance, pressures_bar: Floats) -> Bools:
    """[B] whether every group without a way to tank holds what it had and what came in, to 2e-6 bar.

    What came in is the oil that a moving piston shifts and the void that stands for missing oil.
    """
    batch, count = pressures_bar.shape
    labels = _labels([*_edges(circuit, state, at), *_pump_edges(circuit, state)], batch=batch, count=count)
    capacity = np.broadcast_to(circuit.capacities, (batch, count))
    surplus = capacity * (pressures_bar - state.held_bar) - at.void_lpm
    yields = -at.void_slopes
    moved = circuit.actuators.moves_volume(at.actuators)
    for end, nodes in enumerate((circuit.actuators.node_a, circuit.actuators.node_b)):
        for column, node in enumerate(nodes):
            surplus[:, node] -= moved[:, column, end]
            yields[:, node] += np.sum(np.abs(at.actuators.slopes[:, column, end]), axis=-1)
    place = (np.arange(batch)[:, None] * count + labels).ravel()
    highest = np.max(np.abs(pressures_bar), axis=1, initial=0.0)[:, None]
    drift, takes, passed, slope = (
        np.bincount(place, weights=values.ravel(), minlength=batch * count).reshape(batch, count)
        for values in (surplus, capacity, np.abs(surplus), yields)
    )
    rounding = 4.0 * np.finfo(np.float64).eps * (slope * highest + passed)
    kept = np.abs(drift) <= VOLUME_BAR * takes + rounding
    kept[:, TANK] = True
    return np.asarray(np.all(kept, axis=1))


def loose_signals(circuit: Circuit, state: StateArrays, at: Balance) -> Bools:
    """[B, pumps] whether leakage alone decides the LS port of a turning pump in this state."""
    batch, count = at.void_lpm.shape
    labels = _labels(list(_edges(circuit, state, at)), batch=batch, count=count)
    pumps = circuit.pumps
    row = np.arange(batch)[:, None]
    held = labels[:, [TANK, *pumps.outlet]]
    of_signal = labels[row, pumps.signal[None, :]]
    decided = np.any(of_signal[:, :, None] == held[:, None, :], axis=2)
    return np.asarray(pumps.turning(state) & (pumps.signal_bleed > 0.0) & ~decided)
