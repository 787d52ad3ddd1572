"""Cylinders and hydraulic motors, as one family."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from sheets.circuit.smooth import Bools, Floats, Ints, ramp
from sheets.circuit.stamp import NO_SLOPES, NONE, Stamp, StateArrays

LEAST_FORCE_BEND_BAR = 0.05
DAMPING_BAR_PER_LPM = 2e-4
"""Pressure that is left over to move: small against every reading, large enough to decide a speed."""

A, B, CASE = range(3)


@dataclass(frozen=True, kw_only=True)
class Actuators:
    """Actuators: still inside the dead band of what resists, else as fast as the oil comes.

    Parameters
    ----------
    node_a, node_b, case : node
        Pressure at A drives in the positive sense (extending, forward).
    swept_a, swept_b : L/min per m/s for a cylinder, L/min per rev/min for a motor
        6·A for an area in cm²; V/1000 for a displacement in cm³. Force times speed is pressure times flow,
        so the same figure turns pressure into force.
    resists_forward_bar, resists_backward_bar : bar
        Load and friction against each sense, over the larger side: the dead band.
    drives_bar : bar
        What pushes in the positive sense by itself (a weight), over the larger side; negative for backward.
    case_leakage, cross_leakage : L/min/bar
        From each side to the case, and from A to B (motors).

    Returns
    -------
    speed : m/s or rev/min
        q/swept of the larger side, with q = (ramp(f − forward) − ramp(−f − backward))/c and the surplus
        f = (p_A·swept_a − p_B·swept_b)/larger + drives. Nothing into a stop.
    flow : L/min
        speed·swept at each side.

    Valid for steady motion. c = 0.0002 bar/(L/min) and a bend of 0.05 bar leave a surplus of under 0.1 bar.
    Source: balance of forces or torques, and of volumes; friction by a force efficiency on the load.
    """

    ids: tuple[str, ...]
    node_a: Ints
    node_b: Ints
    case: Ints
    swept_a: Floats
    swept_b: Floats
    resists_forward_bar: Floats
    resists_backward_bar: Floats
    drives_bar: Floats
    case_leakage: Floats
    cross_leakage: Floats
    has_stops: Bools
    """Whether its way ends: a cylinder's does, a motor's doesn't."""

    @cached_property
    def terminals(self) -> Ints:
        """[E, 3] nodes at A, at B and at the case."""
        return np.stack((self.node_a, self.node_b, self.case), axis=-1)

    def stamp(
        self, pressures_bar: Floats, state: StateArrays, *, widening: float, slopes: bool = True
    ) -> Stamp:
        """Flows of a batch; ``through`` is the flow into side A that moves it."""
        batch, count = len(pressures_bar), len(self.ids)
        p_a, p_b, p_case = (pressures_bar[:, node] for node in (self.node_a, self.node_b, self.case))
        larger = np.maximum(self.swept_a, self.swept_b)
        surplus = (p_a * self.swept_a - p_b * self.swept_b) / larger + self.drives_bar
        bend = LEAST_FORCE_BEND_BAR * widening
        forward, by_forward = ramp(x=surplus - self.resists_forward_bar, width=bend)
        backward, by_backward = ramp(x=-surplus - self.resists_backward_bar, width=bend)
        swept_flow = (forward * state.may_extend - backward * state.may_retract) / DAMPING_BAR_PER_LPM
        gain = (by_forward * state.may_extend + by_backward * state.may_retract) / DAMPING_BAR_PER_LPM

        share_a, share_b = self.swept_a / larger, self.swept_b / larger
        to_case_a, to_case_b = self.case_leakage * (p_a - p_case), self.case_leakage * (p_b - p_case)
        across = self.cross_leakage * (p_a - p_b)
        inflow = np.empty((batch, count, 3))
        inflow[:, :, A] = -share_a * swept_flow - to_case_a - across
        inflow[:, :, B] = share_b * swept_flow - to_case_b + across
        inflow[:, :, CASE] = to_case_a + to_case_b
        by_pressures = NO_SLOPES
        if slopes:
            leaks = self.case_leakage + self.cross_leakage
            by_pressures = np.empty((batch, count, 3, 3))
            by_pressures[:, :, A, A] = -share_a * share_a * gain - leaks
            by_pressures[:, :, A, B] = share_a * share_b * gain + self.cross_leakage
            by_pressures[:, :, B, A] = by_pressures[:, :, A, B]
            by_pressures[:, :, B, B] = -share_b * share_b * gain - leaks
            by_pressures[:, :, (A, B), CASE] = self.case_leakage[:, None]
            by_pressures[:, :, CASE, (A, B)] = self.case_leakage[:, None]
            by_pressures[:, :, CASE, CASE] = -2.0 * self.case_leakage
        return Stamp(
            terminals=self.terminals,
            through_lpm=share_a * swept_flow,
            inflow_lpm=inflow,
            slopes=by_pressures,
            adjusters=np.full((count, 0), NONE, dtype=np.intp),
            setting_slopes=np.zeros((batch, count, 3, 0)),
        )

    def speeds(self, stamp: Stamp) -> Floats:
        """[B, actuators] m/s of a cylinder, rev/min of a motor, from its stamp."""
        return stamp.through_lpm / self.swept_a

    def moves_volume(self, stamp: Stamp) -> Floats:
        """[B, actuators, 2] flow into the nodes at A and B that motion alone gives."""
        return np.stack((-stamp.through_lpm, stamp.through_lpm / self.swept_a * self.swept_b), axis=-1)
