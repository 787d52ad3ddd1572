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


def two_ended(*, first: Ints, second: Ints, flow_lpm: Floats, slope: Floats) -> Stamp:
    """The stamp of elements that pass a flow from one node to another, by the difference of pressures."""
    batch, count = flow_lpm.shape
    by_pressure = np.stack((-slope, slope, slope, -slope), axis=-1).reshape(batch, count, 2, 2)
    return Stamp(
        terminals=np.stack((first, second), axis=-1),
        through_lpm=flow_lpm,
        inflow_lpm=np.stack((-flow_lpm, flow_lpm), axis=-1),
        slopes=by_pressure,
        adjusters=np.full((count, 0), NONE, dtype=np.intp),
        setting_slopes=np.zeros((batch, count, 2, 0)),
    )
