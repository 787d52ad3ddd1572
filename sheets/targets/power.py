"""Heat and time that a setting costs."""

from __future__ import annotations


def oil_warming_k_per_s(*, power_kw: float, volume_l: float) -> float:
    """How fast the oil warms when all power turns to heat in it.

    ``power_kw`` in kW, ``volume_l`` in L. Returns kelvin a second. Valid for mineral oil, no cooling, oil
    fully mixed: 0.87 kg/L and 1.88 kJ/(kg·K), common figures for mineral oil, from memory.
    """
    density_kg_per_l, heat_kj_per_kg_k = 0.87, 1.88
    return power_kw / (volume_l * density_kg_per_l * heat_kj_per_kg_k)
