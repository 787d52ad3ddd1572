"""Cylinders and hydraulic motors, as one family."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from sheets.circuit.smooth import Bools, Floats, Ints, ramp
from sheets.circuit.stamp import NO_ADJUSTERS, NO_SLOPES, Stamp, StateArrays

LEAST_FORCE_BEND_BAR = 0.05
DAMPING_BAR_PER_LPM = 2e-4
"""Pressure that is left over to move: small against every reading, large enough to decide a speed."""

A, B, CASE = range(3)


@dataclass(frozen=True, kw_only=True)
class _Fixed:
    """What neither pressures nor states change."""

    larger: Floats
    """Swept flow of the larger side."""
    share_a: Floats
    """1: swept flow at A over that of the larger side."""
    moves: Floats
    """[E, 3] flow into each node for 1 L/min that the larger side takes."""
    by_gain: Floats
    """[E, 3, 3] slopes for a gain of 1 L/min/bar."""
    by_leakage: Floats
    """[E, 3, 3] L/min/bar that leakage alone gives."""
    leaks: bool
    """Whether any actuator leaks."""


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
    load_forward_bar, load_backward_bar : bar
        Work load and the friction that comes with it, against each sense, over the larger side. Only while
        the state is ``loaded``: an idle machine doesn't press on anything.
    friction_bar : bar
        Friction of what pushes by itself (a weight), against both senses. It is always there.
    breakaway_bar : bar
        Over the larger side: the dead band is never less.
    drives_bar : bar
        What pushes in the positive sense by itself (a weight), over the larger side; negative for backward.
    case_leakage, cross_leakage : L/min/bar
        From each side to the case, and from A to B (motors).

    Returns
    -------
    speed : m/s or rev/min
        q/swept of the larger side, with q = (ramp(f − forward) − ramp(−f − backward))/c, the dead band of
        load and friction, and the surplus
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
    load_forward_bar: Floats
    load_backward_bar: Floats
    friction_bar: Floats
    breakaway_bar: Floats
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
        fixed = self._fixed
        p_a, p_b = pressures_bar[:, self.node_a], pressures_bar[:, self.node_b]
        surplus = (p_a * self.swept_a - p_b * self.swept_b) / fixed.larger + self.drives_bar
        bend = LEAST_FORCE_BEND_BAR * widening
        resists_forward, resists_backward = state.once(self, "resists", lambda: self._resists(state))
        forward, by_forward = ramp(x=surplus - resists_forward, width=bend)
        backward, by_backward = ramp(x=-surplus - resists_backward, width=bend)
        swept_flow = (forward * state.may_extend - backward * state.may_retract) / DAMPING_BAR_PER_LPM

        inflow = fixed.moves * swept_flow[:, :, None]
        if fixed.leaks:
            p_case = pressures_bar[:, self.case]
            to_case_a, to_case_b = self.case_leakage * (p_a - p_case), self.case_leakage * (p_b - p_case)
            across = self.cross_leakage * (p_a - p_b)
            inflow[:, :, A] -= to_case_a
            inflow[:, :, A] -= across
            inflow[:, :, B] -= to_case_b
            inflow[:, :, B] += across
            inflow[:, :, CASE] = to_case_a + to_case_b
        by_pressures = NO_SLOPES
        if slopes:
            gain = (by_forward * state.may_extend + by_backward * state.may_retract) / DAMPING_BAR_PER_LPM
            by_pressures = fixed.by_gain * gain[:, :, None, None]
            if fixed.leaks:
                by_pressures += fixed.by_leakage
        return Stamp(
            terminals=self.terminals,
            through_lpm=fixed.share_a * swept_flow,
            inflow_lpm=inflow,
            slopes=by_pressures,
            adjusters=NO_ADJUSTERS,
            setting_slopes=NO_SLOPES,
        )

    def _resists(self, state: StateArrays) -> tuple[Floats, Floats]:
        """[B, actuators] the dead band against each sense, in bar over the larger side."""
        acts = state.loaded[:, None]
        return (
            np.maximum(acts * self.load_forward_bar + self.friction_bar, self.breakaway_bar),
            np.maximum(acts * self.load_backward_bar + self.friction_bar, self.breakaway_bar),
        )

    @cached_property
    def _fixed(self) -> _Fixed:
        larger = np.maximum(self.swept_a, self.swept_b)
        share_a, share_b = self.swept_a / larger, self.swept_b / larger
        count = len(self.ids)
        moves = np.zeros((count, 3))
        moves[:, A], moves[:, B] = -share_a, share_b
        by_gain, by_leakage = np.zeros((2, count, 3, 3))
        by_gain[:, A, A], by_gain[:, B, B] = -share_a * share_a, -share_b * share_b
        by_gain[:, A, B] = by_gain[:, B, A] = share_a * share_b
        by_leakage[:, A, A] = by_leakage[:, B, B] = -(self.case_leakage + self.cross_leakage)
        by_leakage[:, A, B] = by_leakage[:, B, A] = self.cross_leakage
        by_leakage[:, (A, B), CASE] = by_leakage[:, CASE, (A, B)] = self.case_leakage[:, None]
        by_leakage[:, CASE, CASE] = -2.0 * self.case_leakage
        return _Fixed(
            larger=larger,
            share_a=share_a,
            moves=moves,
            by_gain=by_gain,
            by_leakage=by_leakage,
            leaks=bool(np.any(by_leakage)),
        )

    def speeds(self, stamp: Stamp) -> Floats:
        """[B, actuators] m/s of a cylinder, rev/min of a motor, from its stamp."""
        return stamp.through_lpm / self.swept_a

    def moves_volume(self, stamp: Stamp) -> Floats:
        """[B, actuators, 2] flow into the nodes at A and B that motion alone gives."""
        return np.stack((-stamp.through_lpm, stamp.through_lpm / self.swept_a * self.swept_b), axis=-1)
