"""Ways that oil may take both ways, and checks that pass it one way."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from sheets.circuit.smooth import Bools, Floats, Ints, orifice_flow, ramp
from sheets.circuit.stamp import Stamp, StateArrays, two_ended, two_terminals

CHECK_BEND_BAR = 0.05
"""A check goes from closed to open over this pressure."""


@dataclass(frozen=True, kw_only=True)
class Ways:
    """Edges with a flow at a drop: orifice, hand valve, filter, flow control, path of a directional valve.

    Parameters
    ----------
    first, second : node
        Ends; flow is positive from first to second.
    conductance : L/min/√bar
        K = rated flow / √rated drop.
    valve : index
        Valve whose position opens it; −1 for a way that is always open.
    opens : truth
        [E, positions] whether it is open in each position of that valve.

    Returns
    -------
    flow : L/min
        K·Δp/(Δp² + d²)^¼; exactly zero where the valve closes it.

    Valid for turbulent flow, oil at working temperature; friction of pipes is not in it.
    Source: Bernoulli's equation with a constant discharge coefficient; the edge is the plate's rated point.
    """

    ids: tuple[str, ...]
    """Part id; ``DV1 P to A`` for a path of a directional valve."""
    parts: tuple[str, ...]
    first: Ints
    second: Ints
    conductance: Floats
    valve: Ints
    opens: Bools

    @cached_property
    def terminals(self) -> Ints:
        """[E, 2] nodes of the ends."""
        return two_terminals(self.first, self.second)

    def is_open(self, state: StateArrays) -> Bools:
        """[B, E] whether each way is open."""
        always = np.ones((len(state.positions), len(self.ids)), dtype=np.bool_)
        if not state.positions.shape[1]:
            return always
        position = state.positions[:, np.maximum(self.valve, 0)]
        return np.where(self.valve >= 0, self.opens[np.arange(len(self.ids)), position], always)

    def stamp(self, pressures_bar: Floats, state: StateArrays, *, slopes: bool = True) -> Stamp:
        """Flows of a batch and what they do to the nodes."""
        drop_bar = pressures_bar[:, self.first] - pressures_bar[:, self.second]
        conducts = state.once(self, "conducts", lambda: np.where(self.is_open(state), self.conductance, 0.0))
        flow, slope = orifice_flow(drop_bar=drop_bar, conductance=conducts)
        return two_ended(terminals=self.terminals, flow_lpm=flow, slope=slope, slopes=slopes)


@dataclass(frozen=True, kw_only=True)
class Checks:
    """Check valves: nothing back, nothing below the opening pressure, an edge beyond.

    Parameters
    ----------
    first, second : node
        Ends; it passes from first to second only.
    conductance : L/min/√bar
        K = rated flow / √(rated drop − opening): the spring holds its share of the rated drop.
    opening_bar : bar
        Drop at which it opens.

    Returns
    -------
    flow : L/min
        Orifice flow at (drop − opening); exactly zero below the opening.

    Valid for a clean seat; its bend takes 0.05 bar, so a flow reads up to 0.025 bar high.
    Source: force balance of a poppet on a spring of constant force, with a constant discharge coefficient.
    """

    ids: tuple[str, ...]
    first: Ints
    second: Ints
    conductance: Floats
    opening_bar: Floats

    @cached_property
    def terminals(self) -> Ints:
        """[E, 2] nodes of the ends."""
        return two_terminals(self.first, self.second)

    def stamp(self, pressures_bar: Floats, *, widening: float, slopes: bool = True) -> Stamp:
        """Flows of a batch and what they do to the nodes."""
        drop_bar = pressures_bar[:, self.first] - pressures_bar[:, self.second]
        beyond, share = ramp(x=drop_bar - self.opening_bar, width=CHECK_BEND_BAR * widening)
        flow, slope = orifice_flow(drop_bar=beyond, conductance=self.conductance)
        return two_ended(terminals=self.terminals, flow_lpm=flow, slope=slope * share, slopes=slopes)
