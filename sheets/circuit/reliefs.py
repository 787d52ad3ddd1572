"""Relief valves."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from sheets.circuit.smooth import Floats, Ints, ramp
from sheets.circuit.stamp import Stamp, StateArrays, two_ended, two_terminals

WIDEST_BEND_BAR = 0.2
LEAST_BAND_BAR = 0.2
"""Least rise from opening to reference flow: a screw that is all out leaves the valve its own flow forces."""


@dataclass(frozen=True, kw_only=True)
class _Bands:
    """What the settings alone decide: [B, reliefs] each, slopes by the setting."""

    opening_bar: Floats
    """Drop at which it opens."""
    bend_bar: Floats
    """Length of the bend at the opening."""
    bend_slope: Floats
    """Of that length by the setting."""
    straight_bar: Floats
    """Rise that the straight line would take from nothing to the reference flow."""
    straight_slope: Floats
    """Of that rise by the setting."""
    gain: Floats
    """L/min/bar"""


@dataclass(frozen=True, kw_only=True)
class Reliefs:
    """Relief valves: closed up to κ·S, reference flow at S, a straight line through both.

    Parameters
    ----------
    first, second : node
        Pressure port and tank port; the pressure at the tank port adds to the reading.
    opening_ratio : 1
        κ, opening pressure over setting.
    band_ratio : 1
        1 − κ, rise from opening to reference flow over setting; apart from κ for one that is stuck open.
    reference_flow_lpm : L/min
        Flow at which the setting is read.
    adjuster : index
        Adjuster that gives the setting S in bar.

    Returns
    -------
    flow : L/min
        q_ref·(Δp/S − κ)/(1 − κ) above the opening; exactly zero below it.

    Valid while the valve passes its flow within its own rating; hysteresis (closing lower than opening) is
    not in it. The bend at the opening reads up to 0.1 bar high; S at reference flow is met exactly. Where
    (1 − κ)·S is under 0.2 bar, that is taken as the rise.
    Source: the definition of the setting as the reading at reference flow, with a linear override.
    """

    ids: tuple[str, ...]
    first: Ints
    second: Ints
    opening_ratio: Floats
    band_ratio: Floats
    reference_flow_lpm: Floats
    adjuster: Ints

    @cached_property
    def terminals(self) -> Ints:
        """[E, 2] nodes of the ends."""
        return two_terminals(self.first, self.second)

    def stamp(
        self, pressures_bar: Floats, state: StateArrays, *, widening: float, slopes: bool = True
    ) -> Stamp:
        """Flows of a batch and what they do to the nodes."""
        bands = state.once(self, "bands", lambda: self._bands(state))
        drop_bar = pressures_bar[:, self.first] - pressures_bar[:, self.second]
        # In the continuation the bend grows and the gain stays, so a wide one never passes more than it will.
        lift_bar, share = ramp(x=drop_bar - bands.opening_bar, width=bands.bend_bar * widening)
        by_setting = None
        if slopes:
            by_bend = -0.5 * share * share * widening
            by_setting = (
                bands.gain * (by_bend * bands.bend_slope - share * self.opening_ratio)
                - bands.gain * lift_bar * bands.straight_slope / bands.straight_bar
            )
        return two_ended(
            terminals=self.terminals,
            flow_lpm=bands.gain * lift_bar,
            slope=bands.gain * share,
            slopes=slopes,
            adjusters=self.adjuster,
            by_setting=by_setting,
        )

    def _bands(self, state: StateArrays) -> _Bands:
        setting_bar = state.setting(self.adjuster)
        band_bar = np.maximum(self.band_ratio * setting_bar, LEAST_BAND_BAR)
        band_slope = np.where(band_bar > LEAST_BAND_BAR, self.band_ratio, 0.0)
        bend_bar = np.minimum(WIDEST_BEND_BAR, band_bar / 10.0)
        bend_slope = np.where(bend_bar < WIDEST_BEND_BAR, band_slope / 10.0, 0.0)
        straight_bar = band_bar - 0.5 * bend_bar
        return _Bands(
            opening_bar=self.opening_ratio * setting_bar,
            bend_bar=bend_bar,
            bend_slope=bend_slope,
            straight_bar=straight_bar,
            straight_slope=band_slope - 0.5 * bend_slope,
            gain=self.reference_flow_lpm / straight_bar,
        )
