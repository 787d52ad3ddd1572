"""Groups of nodes that oil joins in a solved state, and whether each kept its volume."""

from __future__ import annotations

import numpy as np

from sheets.circuit.equations import Balance
from sheets.circuit.model import TANK, Circuit
from sheets.circuit.smooth import Bools, Floats, Ints
from sheets.circuit.stamp import StateArrays

VOLUME_BAR = 2e-6
"""Drift of a group that is accepted, as a pressure over its whole capacity."""


def _joined(circuit: Circuit, state: StateArrays, at: Balance) -> Bools:
    """[B, paths] in which states oil passes along each path of ``Circuit.oil_paths``."""
    batch = len(at.void_lpm)
    ways, motors, pumps = circuit.ways, circuit.actuators, circuit.pumps
    leaks = np.concatenate((motors.cross_leakage, motors.case_leakage, motors.case_leakage)) > 0.0
    turning = pumps.turning(state)
    return np.concatenate(
        (
            ways.is_open(state) & (ways.conductance > 0.0),
            at.checks.through_lpm != 0.0,
            at.reliefs.through_lpm != 0.0,
            np.broadcast_to(leaks, (batch, len(leaks))),
            turning,
            turning,
            turning & (pumps.signal_bleed > 0.0),
        ),
        axis=1,
    )


def _labels(circuit: Circuit, joined: Bools) -> Ints:
    """[B, N] lowest node of the group that each node belongs to, along the first so many paths."""
    batch, paths = joined.shape
    first, second = (ends[:paths] for ends in circuit.oil_paths)
    count = len(circuit.nodes)
    labels: Ints = np.tile(np.arange(count, dtype=np.intp), (batch, 1))
    row, path = np.nonzero(joined)
    one, other = row * count + first[path], row * count + second[path]
    flat = labels.reshape(-1)
    while True:
        ends = flat[one], flat[other]
        if np.array_equal(*ends):
            return labels
        lower = np.minimum(*ends)
        np.minimum.at(flat, one, lower)
        np.minimum.at(flat, other, lower)


def volume_kept(circuit: Circuit, state: StateArrays, at: Balance, pressures_bar: Floats) -> Bools:
    """[B] whether every group without a way to tank holds what it had and what came in, to 2e-6 bar.

    What came in is the oil that a moving piston shifts and the void that stands for missing oil.
    """
    batch, count = pressures_bar.shape
    labels = _labels(circuit, _joined(circuit, state, at))
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
    """[B, pumps] whether leakage alone decides the LS port of a turning pump in this state.

    It doesn't where a check valve leads from the outlet to the port: shut, it holds the port above the
    outlet, and it opens before the port falls so far below that the load-sensing control would act.
    """
    pumps = circuit.pumps
    asked = pumps.turning(state) & (pumps.signal_bleed > 0.0)
    if not asked.any():
        return asked
    by_pumps = 3 * len(pumps.ids)  # what a pump moves or seeps decides nothing here
    joined = _joined(circuit, state, at)
    labels = _labels(circuit, joined[:, : joined.shape[1] - by_pumps])
    row = np.arange(len(labels))[:, None]
    held = labels[:, [TANK, *pumps.outlet]]
    of_signal = labels[row, pumps.signal[None, :]]
    decided = np.any(of_signal[:, :, None] == held[:, None, :], axis=2)
    return np.asarray(asked & ~decided & ~_refilled(circuit, state, labels))


def _refilled(circuit: Circuit, state: StateArrays, labels: Ints) -> Bools:
    """[B, pumps] whether a check valve feeds the LS port from the outlet's group before the control acts."""
    pumps, checks = circuit.pumps, circuit.checks
    refilled = np.zeros((len(labels), len(pumps.ids)), dtype=np.bool_)
    for pump, control in enumerate(pumps.load_sensing):
        if control < 0:
            continue
        room_bar = state.settings_bar[:, control] - pumps.load_sensing_width_bar[pump]
        from_outlet = labels[:, checks.first] == labels[:, [pumps.outlet[pump]]]
        to_port = labels[:, checks.second] == labels[:, [pumps.signal[pump]]]
        opens = checks.opening_bar[None, :] < room_bar[:, None]
        refilled[:, pump] = np.any(from_outlet & to_port & opens, axis=1)
    return refilled
