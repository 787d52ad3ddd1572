"""Heat and time that a setting costs."""

from __future__ import annotations

import math

OIL_HEAT_KJ_PER_L_K = 0.87 * 1.88
"""Policy: heat that a litre of the fluid takes up for each kelvin. 0.87 kg/L and 1.88 kJ/(kg·K) are common
figures for mineral oil, from memory. It serves for every kind of fluid: water-glycol, emulsions and esters
take up more, so that with them the time comes out too short, never too long."""
_STEP_S, _FINE_BELOW_S = 5.0, 10.0


def oil_warming_k_per_s(*, power_kw: float, volume_l: float) -> float:
    """How fast the oil warms when all power turns to heat in it.

    ``power_kw`` in kW, ``volume_l`` in L. Returns kelvin a second. Valid for mineral oil, no cooling, oil
    fully mixed; source: conservation of energy, with OIL_HEAT_KJ_PER_L_K.
    """
    return power_kw / (volume_l * OIL_HEAT_KJ_PER_L_K)


def longest_time_s(*, power_kw: float, volume_l: float, room_k: float, most_s: float) -> float:
    """How long power may go into the oil before it has warmed by ``room_k``, but never more than ``most_s``.

    ``power_kw`` in kW, above 0; ``volume_l`` in L; ``room_k`` in K, from the warmest oil of a try
    to the limit; ``most_s`` in s. Returns s, rounded down: to 5 s, below 10 s to 1 s. Valid as above.
    """
    time_s = max(0.0, room_k) / oil_warming_k_per_s(power_kw=power_kw, volume_l=volume_l)
    if time_s >= most_s:
        return most_s
    step_s = _STEP_S if time_s >= _FINE_BELOW_S else 1.0
    return math.floor(time_s / step_s) * step_s
