"""What a law takes and gives: states of the plant as arrays, and what flows into which node.

The first axis of every array is the state; one state is a batch of one.
"""

from __future__ import annotations

from dataclasses import dataclass, fields

import numpy as np

from sheets.circuit.smooth import Bools, Floats, Ints

NONE = -1
"""Index of a valve, drive or adjuster that an element doesn't have."""


@dataclass(frozen=True, kw_only=True)
class StateArrays:
    """A batch of plant states."""

    positions: Ints
    """[B, valves] index into the positions of each valve."""
    running: Bools
    """[B, drives]"""
    settings_bar: Floats
    """[B, adjusters]"""
    held_bar: Floats
    """[B, nodes] pressure that each node had before: the memory."""
    may_extend: Bools
    """[B, actuators] not at the far stop."""
    may_retract: Bools
    """[B, actuators] not at the near stop."""

    def take(self, rows: Ints) -> StateArrays:
        """Some of the states, in the order asked for."""
        return StateArrays(**{field.name: getattr(self, field.name)[rows] for field in fields(self)})

    def setting(self, adjusters: Ints) -> Floats:
        """[B, elements] the setting of each element's adjuster; 0 where it has none."""
        if not self.settings_bar.shape[1]:
            return np.zeros((len(self.settings_bar), len(adjusters)))
        return np.where(adjusters >= 0, self.settings_bar[:, np.maximum(adjusters, 0)], 0.0)


@dataclass(frozen=True, kw_only=True)
class Stamp:
    """What the elements of one family do to their nodes: B states, E elements, T terminals each."""

    terminals: Ints
    """[E, T] node of each terminal."""
    through_lpm: Floats
    """[B, E] flow that the element is named by."""
    inflow_lpm: Floats
    """[B, E, T] flow out of the element into the node."""
    slopes: Floats
    """[B, E, T, T] of inflow at the first terminal by the pressure at the second, L/min/bar."""
    adjusters: Ints
    """[E, A] adjusters that act on the element; −1 for none."""
    setting_slopes: Floats
    """[B, E, T, A] of inflow by each setting, L/min/bar."""


NO_SLOPES: Floats = np.zeros((0, 0, 0, 0))
"""Stands where slopes are not wanted."""


def two_ended(
    *,
    first: Ints,
    second: Ints,
    flow_lpm: Floats,
    slope: Floats,
    slopes: bool,
    adjusters: Ints | None = None,
    by_setting: Floats | None = None,
) -> Stamp:
    """The stamp of elements that pass a flow from one node to another, by the difference of pressures."""
    batch, count = flow_lpm.shape
    inflow = np.empty((batch, count, 2))
    inflow[:, :, 0], inflow[:, :, 1] = -flow_lpm, flow_lpm
    by_pressure = by_settings = NO_SLOPES
    if slopes:
        by_pressure = np.empty((batch, count, 2, 2))
        by_pressure[:, :, 0, 0] = by_pressure[:, :, 1, 1] = -slope
        by_pressure[:, :, 0, 1] = by_pressure[:, :, 1, 0] = slope
        by_settings = np.zeros((batch, count, 2, 0))
        if by_setting is not None:
            by_settings = np.empty((batch, count, 2, 1))
            by_settings[:, :, 0, 0], by_settings[:, :, 1, 0] = -by_setting, by_setting
    terminals = np.empty((count, 2), dtype=np.intp)
    terminals[:, 0], terminals[:, 1] = first, second
    return Stamp(
        terminals=terminals,
        through_lpm=flow_lpm,
        inflow_lpm=inflow,
        slopes=by_pressure,
        adjusters=np.full((count, 0), NONE, dtype=np.intp) if adjusters is None else adjusters[:, None],
        setting_slopes=by_settings,
    )
