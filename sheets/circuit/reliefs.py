"""Relief valves."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from sheets.circuit.smooth import Floats, Ints, ramp
from sheets.circuit.stamp import Stamp, StateArrays, two_ended

WIDEST_BEND_BAR = 0.2
LEAST_BAND_BAR = 0.2
"""Least rise from opening to reference flow: a screw that is all out leaves the valve its own flow forces."""


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

    def stamp(
        self, pressures_bar: Floats, state: StateArrays, *, widening: float, slopes: bool = True
    ) -> Stamp:
        """Flows of a batch and what they do to the nodes."""
        setting_bar = state.setting(self.adjuster)
        drop_bar = pressures_bar[:, self.first] - pressures_bar[:, self.second]
        band_bar = np.maximum(self.band_ratio * setting_bar, LEAST_BAND_BAR)
        band_slope = np.where(band_bar > LEAST_BAND_BAR, self.band_ratio, 0.0)
        bend_bar = np.minimum(WIDEST_BEND_BAR, band_bar / 10.0)
        bend_slope = np.where(bend_bar < WIDEST_BEND_BAR, band_slope / 10.0, 0.0)
        gain = self.reference_flow_lpm / (band_bar - 0.5 * bend_bar)
        # In the continuation the bend grows and the gain stays, so a wide one never passes more than it will.
        wide_bar = bend_bar * widening
        beyond_bar = drop_bar - self.opening_ratio * setting_bar
        lift_bar, share = ramp(x=beyond_bar, width=wide_bar)
        by_bend = -0.5 * share * share * widening
        by_setting = gain * (by_bend * bend_slope - share * self.opening_ratio) - gain * lift_bar * (
            band_slope - 0.5 * bend_slope
        ) / (band_bar - 0.5 * bend_bar)
        return two_ended(
            first=self.first,
            second=self.second,
            flow_lpm=gain * lift_bar,
            slope=gain * share,
            slopes=slopes,
            adjusters=self.adjuster,
            by_setting=by_setting,
        )
