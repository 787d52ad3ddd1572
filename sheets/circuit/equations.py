"""The one equation of every node: what a step of time leaves of its volume is what flows into it.

C·(p − p_before) = Σ flow into the node, with C so small that a node with a way to a source or to tank stands
at steady flow, and a group that is cut off keeps its oil. That is the whole of the memory.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from sheets.circuit.laws import void_flow
from sheets.circuit.model import Circuit
from sheets.circuit.smooth import Floats, Ints
from sheets.circuit.stamp import Stamp, StateArrays

NOTHING: Floats = np.zeros((0, 1))
"""Stands where the amounts of flows are not wanted."""


@dataclass(frozen=True, kw_only=True)
class Balance:
    """All nodes of a batch at some pressures. The tank has no equation; it is left out of the residuals."""

    ways: Stamp
    checks: Stamp
    reliefs: Stamp
    pumps: Stamp
    actuators: Stamp
    void_lpm: Floats
    """[B, N]"""
    void_slopes: Floats
    residual_lpm: Floats
    """[B, N − 1] stored less what flows in; 0 at the solution."""
    throughput_lpm: Floats
    """[B, N − 1] sum of the amounts of all flows at the node; nothing where slopes were not wanted."""

    @property
    def stamps(self) -> tuple[Stamp, ...]:
        """The stamps of all families."""
        return self.ways, self.checks, self.reliefs, self.pumps, self.actuators


def balance(
    circuit: Circuit,
    state: StateArrays,
    pressures_bar: Floats,
    *,
    widening: float = 1.0,
    slopes: bool = True,
) -> Balance:
    """Evaluate every law and sum up at every node; without slopes where only the residuals are wanted."""
    ways = circuit.ways.stamp(pressures_bar, state, slopes=slopes)
    checks = circuit.checks.stamp(pressures_bar, widening=widening, slopes=slopes)
    reliefs = circuit.reliefs.stamp(pressures_bar, state, widening=widening, slopes=slopes)
    pumps = circuit.pumps.stamp(pressures_bar, state, widening=widening, slopes=slopes)
    actuators = circuit.actuators.stamp(pressures_bar, state, widening=widening, slopes=slopes)
    void, void_slopes = void_flow(pressures_bar=pressures_bar, widening=widening)
    stamps = (ways, checks, reliefs, pumps, actuators)

    batch, count = pressures_bar.shape
    flows = np.concatenate([stamp.inflow_lpm.reshape(batch, -1) for stamp in stamps], axis=1)
    into = _sum_at(flows, circuit.places, count) + void
    amounts = _sum_at(np.abs(flows), circuit.places, count) + void if slopes else NOTHING
    stored = circuit.capacities * (pressures_bar - state.held_bar)
    return Balance(
        ways=ways,
        checks=checks,
        reliefs=reliefs,
        pumps=pumps,
        actuators=actuators,
        void_lpm=void,
        void_slopes=void_slopes,
        residual_lpm=(stored - into)[:, 1:],
        throughput_lpm=amounts[:, 1:],
    )


def jacobian(circuit: Circuit, at: Balance) -> Floats:
    """[B, N − 1, N − 1] slopes of the residuals by the pressures."""
    batch, count = at.void_lpm.shape
    slopes = np.concatenate([stamp.slopes.reshape(batch, -1) for stamp in at.stamps], axis=1)
    into = _sum_at(slopes, circuit.pairs, count * count).reshape(batch, count, count)
    node = np.arange(count)
    into[:, node, node] += at.void_slopes - circuit.capacities
    return -into[:, 1:, 1:]


def by_settings(circuit: Circuit, at: Balance) -> Floats:
    """[B, N − 1, adjusters] slopes of the flows into the nodes by the settings."""
    batch, count = at.void_lpm.shape
    adjusters = len(circuit.adjusters)
    into = np.zeros((batch, count * adjusters))
    for stamp in (at.reliefs, at.pumps):
        target = stamp.terminals[:, :, None] * adjusters + np.maximum(stamp.adjusters, 0)[:, None, :]
        present = np.broadcast_to((stamp.adjusters >= 0)[:, None, :], target.shape)
        values = np.where(present, stamp.setting_slopes, 0.0).reshape(batch, -1)
        into += _sum_at(values, target.ravel(), count * adjusters)
    return into.reshape(batch, count, adjusters)[:, 1:]


def _sum_at(values: Floats, places: Ints, count: int) -> Floats:
    """[B, count] sums of values by their place, always in the order in which they stand.

    No matrix product: its rounding would hang on how many states are solved together.
    """
    batch = len(values)
    if not places.size or not count:
        return np.zeros((batch, count))
    index = places if batch == 1 else (np.arange(batch)[:, None] * count + places[None, :]).ravel()
    sums = np.bincount(index, weights=values.ravel(), minlength=batch * count)
    return sums.astype(np.float64, copy=False).reshape(batch, count)
