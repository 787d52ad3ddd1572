"""Pumps: fixed, and variable with a compensator and a load-sensing control."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from sheets.circuit.smooth import Bools, Floats, Ints, orifice_flow, smaller
from sheets.circuit.stamp import NO_SLOPES, Stamp, StateArrays

STROKE_BEND = 0.05
"""Share of full flow over which one limit of the stroke hands over to another."""
CLOSED_BEND_AT_LEAST = 1e-9
"""Of full flow: keeps the bend at no stroke from vanishing where a plate claims no leakage."""

OUTLET, SUCTION, CASE, SIGNAL = range(4)


@dataclass(frozen=True, kw_only=True)
class _Asks:
    """What states decide whatever the pressures: [B, pumps] each."""

    turning: Floats
    """1 where the drive runs, else 0."""
    compensator_bar: Floats
    """Setting of the compensator."""
    full_at_limit: Floats
    """Net flow at whole stroke, a width below the compensator's setting."""
    load_sensing_bar: Floats
    """Setting of the load-sensing control."""


@dataclass(frozen=True, kw_only=True)
class _Fixed:
    """What neither pressures nor states change."""

    bled_from: Ints
    """[E] node that seeps into the LS node."""
    seeps_into: Floats
    """[E, 4] flow into each node for 1 L/min that seeps."""
    by_seep: Floats
    """[E, 4, 4] slopes for a slope of 1 L/min/bar of what seeps."""
    by_leakage: Floats
    """[E, 4, 4] at suction and case."""
    by_fixed_pump: Floats
    """[E, 4] slopes of the net flow without controls."""
    controlled: Bools
    """[E] whether it has a compensator."""
    has_signal: Bools
    """[E] whether it has a load-sensing control."""
    signal_gain: Floats
    """[E] L/min/bar of the load-sensing control."""
    variable: bool
    """Whether any pump is controlled."""
    senses: bool
    """Whether any pump has a load-sensing control."""
    torque: bool
    """Whether any pump has a torque limit."""


@dataclass(frozen=True, kw_only=True)
class Pumps:
    """Pumps on a shaft of constant speed; with the drive off every flow is exactly zero.

    Parameters
    ----------
    outlet, suction, case, signal : node
        Case is the suction node where leakage stays inside. Signal is the LS node: the case node where the
        port is drained, the outlet where it is fed.
    drive : index
        Drive that turns it.
    displaced_lpm : L/min
        V·n, theoretical flow at full stroke.
    stopped_lpm : L/min
        Theoretical flow with the stroke at the displacement stop; V·n where it has none.
    torque_power_bar_lpm : bar·L/min
        20π·T·n/1000 of a torque limiter; infinite where it has none.
    leakage_per_bar : L/min/bar
        (1 − η_v)·V·n / rating.
    compensator, load_sensing : index
        Adjusters in bar; −1 where there is none. A pump with neither is fixed.
    compensator_width_bar, load_sensing_width_bar : bar
        Rise of the controlled pressure that takes the pump from full stroke to no net flow.
    closed_bend_lpm : L/min
        Bend at no stroke; no more than twice the leakage at the lowest setting, so that the reading at no
        net flow stays exact.
    signal_bleed : L/min/√bar
        Tiny conductance inside the pump, from the outlet or the case into the LS node, while it turns.
    bled_from_outlet : truth
        Where that bleed comes from.

    Returns
    -------
    net flow : L/min
        The smallest of full stroke (the stop's V·n, or 20π·T·n/1000 over p − p_case where that is less, each
        less leakage), compensator: full flow·(S − (p − p_case))/width, and
        load sensing: full flow·(S − (p − p_LS))/width; never below −leakage (no stroke).
        A setting is thus the reading at no net flow. Full flow is V·n less the leakage at (S − width) for
        the compensator, V·n·η_v for load sensing: there width = (standby − differential)·full flow/flow.
        A stop or a torque limit changes no gain: both only end the stroke.

    Valid for steady states at the drive's speed; suction is assumed filled (a void is reported apart).
    Limits that meet within 5 % of full flow are rounded by at most 0.6 % of it. The torque is the hydraulic
    one, p·V(s)/20π: mechanical losses are not in it.
    Source: definition of deadhead and standby readings; leakage linear in pressure by volumetric efficiency;
    torque times angle is pressure times volume.
    """

    ids: tuple[str, ...]
    outlet: Ints
    suction: Ints
    case: Ints
    signal: Ints
    drive: Ints
    displaced_lpm: Floats
    stopped_lpm: Floats
    torque_power_bar_lpm: Floats
    leakage_per_bar: Floats
    full_flow_lpm: Floats
    """V·n·η_v: at the pressure of its rating."""
    overall_efficiency: Floats
    """Hydraulic power over shaft power: for the load of its drive."""
    compensator: Ints
    compensator_width_bar: Floats
    load_sensing: Ints
    load_sensing_width_bar: Floats
    closed_bend_lpm: Floats
    signal_bleed: Floats
    bled_from_outlet: Bools

    def turning(self, state: StateArrays) -> Bools:
        """[B, pumps] whether its drive runs."""
        return state.running[:, self.drive]

    @cached_property
    def terminals(self) -> Ints:
        """[E, 4] outlet, suction, case and LS node of each pump."""
        return np.stack((self.outlet, self.suction, self.case, self.signal), axis=-1)

    @cached_property
    def adjusters(self) -> Ints:
        """[E, 2] compensator and load-sensing control of each pump."""
        return np.stack((self.compensator, self.load_sensing), axis=-1)

    def stamp(
        self, pressures_bar: Floats, state: StateArrays, *, widening: float, slopes: bool = True
    ) -> Stamp:
        """Net flows of a batch and what they do to the nodes."""
        fixed = self._fixed
        asks = state.once(self, "asks", lambda: self._asks(state))
        at_bar = pressures_bar[:, self.terminals]
        over_case = at_bar[:, :, OUTLET] - at_bar[:, :, CASE]
        leakage = self.leakage_per_bar * over_case
        net, by_pressure, by_setting = self._net_flow(at_bar, over_case, leakage, asks, widening, slopes)
        # What seeps inside into the LS node comes from the outlet or from the case.
        seeps, seep_slope = orifice_flow(
            drop_bar=pressures_bar[:, fixed.bled_from] - at_bar[:, :, SIGNAL], conductance=self.signal_bleed
        )

        inflow = fixed.seeps_into * seeps[:, :, None]
        inflow[:, :, OUTLET] += net
        inflow[:, :, SUCTION] -= net + leakage
        inflow[:, :, CASE] += leakage
        inflow *= asks.turning[:, :, None]
        by_pressures = by_settings = NO_SLOPES
        if slopes:
            by_pressures = fixed.by_seep * seep_slope[:, :, None, None]
            by_pressures += fixed.by_leakage
            by_pressures[:, :, OUTLET] += by_pressure
            by_pressures[:, :, SUCTION] -= by_pressure
            by_pressures *= asks.turning[:, :, None, None]
            by_settings = np.zeros((*net.shape, 4, 2))
            by_settings[:, :, OUTLET] = by_setting * asks.turning[:, :, None]
            by_settings[:, :, SUCTION] = -by_settings[:, :, OUTLET]
        return Stamp(
            terminals=self.terminals,
            through_lpm=net * asks.turning,
            inflow_lpm=inflow,
            slopes=by_pressures,
            adjusters=self.adjusters,
            setting_slopes=by_settings,
        )

    def stroke(self, pressures_bar: Floats, net_flow_lpm: Floats, state: StateArrays) -> Floats:
        """[B, pumps] stroke that the controls ask for, 0 to 1; 0 where the drive stands."""
        leakage = self.leakage_per_bar * (pressures_bar[:, self.outlet] - pressures_bar[:, self.case])
        return np.where(self.turning(state), (net_flow_lpm + leakage) / self.displaced_lpm, 0.0)

    def _net_flow(
        self,
        at_bar: Floats,
        over_case: Floats,
        leakage: Floats,
        asks: _Asks,
        widening: float,
        slopes: bool,
    ) -> tuple[Floats, Floats, Floats]:
        """Net flow, [B, E, 4] slopes by the terminals' pressures and [B, E, 2] by the two settings."""
        fixed = self._fixed
        bend = min(STROKE_BEND * widening, 1.0) * self.stopped_lpm
        longest, by_torque = (
            self._longest_stroke(over_case, bend) if fixed.torque else (self.stopped_lpm, 0.0)
        )
        full = longest - leakage
        if not fixed.variable:
            return full, fixed.by_fixed_pump + np.zeros((*full.shape, 4)), np.zeros((*full.shape, 2))

        opening = (asks.compensator_bar - over_case) / self.compensator_width_bar
        asked = asks.full_at_limit * opening
        # One more control joins at a time; `keeps` is the share by which the earlier ones still decide.
        keeps: Floats | float = 1.0
        takes: Floats | float = 0.0
        if fixed.senses:
            over_signal = at_bar[:, :, OUTLET] - at_bar[:, :, SIGNAL]
            signal_opening = (asks.load_sensing_bar - over_signal) / self.load_sensing_width_bar
            both, keeps, takes = smaller(a=asked, b=self.full_flow_lpm * signal_opening, width=bend)
            asked = np.where(fixed.has_signal, both, asked)
        limited, by_full, by_asked = smaller(a=full, b=asked, width=bend)
        # The larger of two is the smaller of their negatives.
        closed_bend = np.minimum(self.closed_bend_lpm * widening, self.stopped_lpm)
        negative, by_limited, by_closed = smaller(a=-limited, b=leakage, width=closed_bend)
        net = np.where(fixed.controlled, -negative, full)
        if not slopes:
            return net, NO_SLOPES, NO_SLOPES

        if fixed.senses:
            keeps, takes = np.where(fixed.has_signal, keeps, 1.0), np.where(fixed.has_signal, takes, 0.0)
        by_case_rise = -asks.full_at_limit / self.compensator_width_bar
        by_compensator = -by_case_rise - self.leakage_per_bar * opening
        through = np.where(fixed.controlled, by_limited * by_asked, 0.0)
        leaks = np.where(fixed.controlled, -by_limited * by_full - by_closed, -1.0) * self.leakage_per_bar
        if fixed.torque:
            leaks = leaks + np.where(fixed.controlled, by_limited * by_full, 1.0) * by_torque
        by_over_case = leaks + through * keeps * by_case_rise
        by_over_signal = -through * takes * fixed.signal_gain
        by_pressure = np.zeros((*through.shape, 4))
        by_pressure[:, :, OUTLET] = by_over_case + by_over_signal
        by_pressure[:, :, CASE], by_pressure[:, :, SIGNAL] = -by_over_case, -by_over_signal
        by_setting = np.empty((*through.shape, 2))
        by_setting[:, :, 0] = through * keeps * by_compensator
        by_setting[:, :, 1] = through * takes * fixed.signal_gain
        return net, by_pressure, by_setting

    def _asks(self, state: StateArrays) -> _Asks:
        compensator_bar = state.setting(self.compensator)
        at_limit_bar = compensator_bar - self.compensator_width_bar
        return _Asks(
            turning=self.turning(state).astype(np.float64),
            compensator_bar=compensator_bar,
            full_at_limit=self.displaced_lpm - self.leakage_per_bar * at_limit_bar,
            load_sensing_bar=state.setting(self.load_sensing),
        )

    @cached_property
    def _fixed(self) -> _Fixed:
        count = len(self.ids)
        from_outlet = self.bled_from_outlet.astype(np.float64)
        seeps_into, by_seep = np.zeros((count, 4)), np.zeros((count, 4, 4))
        seeps_into[:, OUTLET], seeps_into[:, CASE], seeps_into[:, SIGNAL] = (
            -from_outlet,
            from_outlet - 1.0,
            1.0,
        )
        for terminal, share in ((OUTLET, from_outlet), (CASE, 1.0 - from_outlet)):
            by_seep[:, terminal, terminal] -= share
            by_seep[:, terminal, SIGNAL] += share
            by_seep[:, SIGNAL, terminal] += share
        by_seep[:, SIGNAL, SIGNAL] -= 1.0
        by_leakage, by_fixed_pump = np.zeros((count, 4, 4)), np.zeros((count, 4))
        for node, sign in ((OUTLET, 1.0), (CASE, -1.0)):
            by_leakage[:, CASE, node] += sign * self.leakage_per_bar
            by_leakage[:, SUCTION, node] -= sign * self.leakage_per_bar
            by_fixed_pump[:, node] = -sign * self.leakage_per_bar
        controlled, has_signal = self.compensator >= 0, self.load_sensing >= 0
        return _Fixed(
            bled_from=np.where(self.bled_from_outlet, self.outlet, self.case),
            seeps_into=seeps_into,
            by_seep=by_seep,
            by_leakage=by_leakage,
            by_fixed_pump=by_fixed_pump,
            controlled=controlled,
            has_signal=has_signal,
            signal_gain=self.full_flow_lpm / self.load_sensing_width_bar,
            variable=bool(np.any(controlled)),
            senses=bool(np.any(has_signal)),
            torque=bool(np.any(np.isfinite(self.torque_power_bar_lpm))),
        )

    def _longest_stroke(self, over_case: Floats, bend: Floats) -> tuple[Floats, Floats]:
        """Theoretical flow at the longest stroke that stop and torque limit allow, and its slope by pressure.

        At half the pressure where the limit begins it stands at twice the stop, where it decides nothing; so
        it need not be followed further down, where it would grow without end.
        """
        limited = np.isfinite(self.torque_power_bar_lpm)
        power = np.where(limited, self.torque_power_bar_lpm, 0.0)
        begins_bar = np.where(limited, power / self.stopped_lpm, 1.0)
        pressure_bar = np.maximum(over_case, 0.5 * begins_bar)
        by_limit = power / pressure_bar
        longest, _, share = smaller(a=self.stopped_lpm, b=by_limit, width=bend)
        return (
            np.where(limited, longest, self.stopped_lpm),
            np.where(limited, -share * by_limit / pressure_bar, 0.0),
        )
