"""What a law takes and gives: states of the plant as arrays, and what flows into which node.

The first axis of every array is the state; one state is a batch of one.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field
from typing import Any, TypeVar

import numpy as np

from sheets.circuit.smooth import Bools, Floats, Ints

_T = TypeVar("_T")

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
    loaded: Bools
    """[B] whether the work loads act."""
    _once: dict[tuple[int, str], Any] = field(default_factory=dict, init=False, repr=False, compare=False)

    def take(self, rows: Ints) -> StateArrays:
        """Some of the states, in the order asked for.

        A single state stands for itself however often it is asked for: in every law it serves all rows of
        pressures, and what was found for it once is kept.
        """
        if len(self.held_bar) == 1:
            return self
        return StateArrays(
            positions=self.positions[rows],
            running=self.running[rows],
            settings_bar=self.settings_bar[rows],
            held_bar=self.held_bar[rows],
            may_extend=self.may_extend[rows],
            may_retract=self.may_retract[rows],
            loaded=self.loaded[rows],
        )

    def once(self, family: object, name: str, find: Callable[[], _T]) -> _T:
        """What a family needs of these states whatever the pressures: found at the first call, then kept."""
        key = (id(family), name)
        if key not in self._once:
            self._once[key] = find()
        found: _T = self._once[key]
        return found

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


NO_ADJUSTERS: Ints = np.zeros((0, 0), dtype=np.intp)
"""Stands where no adjuster acts on a family."""


def two_terminals(first: Ints, second: Ints) -> Ints:
    """[E, 2] terminals of elements that have two ends."""
    return np.stack((first, second), axis=-1)


def two_ended(
    *,
    terminals: Ints,
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
    by_pressure = NO_SLOPES
    by_settings = NO_SLOPES
    if slopes:
        by_pressure = np.empty((batch, count, 2, 2))
        by_pressure[:, :, 0, 0] = by_pressure[:, :, 1, 1] = -slope
        by_pressure[:, :, 0, 1] = by_pressure[:, :, 1, 0] = slope
        if by_setting is not None:
            by_settings = np.empty((batch, count, 2, 1))
            by_settings[:, :, 0, 0], by_settings[:, :, 1, 0] = -by_setting, by_setting
    return Stamp(
        terminals=terminals,
        through_lpm=flow_lpm,
        inflow_lpm=inflow,
        slopes=by_pressure,
        adjusters=NO_ADJUSTERS if adjusters is None else adjusters[:, None],
        setting_slopes=by_settings,
    )
