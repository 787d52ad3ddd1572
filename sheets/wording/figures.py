"""Amounts as printed, in the units that the machine file names first and second."""

from __future__ import annotations

import math
from typing import Final

from sheets.amounts import Amount
from sheets.machine.model import Units
from sheets.quantities import from_unit, number, shown, to_unit

_PLAIN: Final[dict[str, tuple[str, int]]] = {
    "power_kw": ("kW", 1),
    "speed_m_s": ("m/s", 2),
    "speed_rpm": ("rev/min", 0),
    "ratio": ("", 2),
    "time_s": ("s", 0),
    "temperature_c": ("°C", 0),
    "temperature_rise_k": ("°C", 3),
    "force_kn": ("kN", 1),
    "torque_nm": ("N·m", 0),
    "voltage_v": ("V", 0),
    "volume_l": ("L", 0),
    "count": ("", 0),
}
"""Quantities that have one printed unit only: that unit, and digits after the point."""
_PRESSURE_DECIMALS: Final = {"bar": 0, "psi": 0, "MPa": 1}
_SMALL_PRESSURE_BAR: Final = 10.0
"""Below this a pressure gets one digit more."""

_DUST: Final = 1e-6
"""Of a last digit: what a conversion of units leaves."""
_SLOW_M_S: Final = 0.1
"""Below this a speed is printed in mm/s: whatever moves never prints as nought."""
_SLOW_RPM: Final = 10.0
"""Below this it gets digits more, likewise."""
_SMALL_FLOW_LPM: Final = 10.0
"""Below this a flow gets one digit more."""


def _slow(value: float, unit: str) -> str:
    """A small speed with two digits, and never as nought unless it is."""
    size = abs(value)
    if 0.0 < size < 0.01:
        return f"less than 0.01 {unit}"
    decimals = 0 if size >= 10.0 else 1 if size >= 1.0 else 2
    return f"{number(value, decimals=decimals)} {unit}"


class Figures:
    """Prints amounts for one machine."""

    def __init__(self, units: Units) -> None:
        self.pressure_unit: str = units.pressure[0]
        self.second_pressure_unit: str = units.pressure[1] if len(units.pressure) > 1 else ""
        self.flow_unit: str = units.flow[0]
        self.second_temperature_unit: str = units.temperature[1] if len(units.temperature) > 1 else ""

    def amount(self, amount: Amount | str) -> str:
        """An amount with its unit; text as it stands."""
        if isinstance(amount, str):
            return amount
        if amount.quantity == "pressure_bar":
            return self.pressure(amount.value)
        if amount.quantity == "flow_lpm":
            return self.flow(amount.value)
        if amount.quantity == "speed_m_s" and abs(amount.value) < _SLOW_M_S:
            return _slow(1000.0 * amount.value, "mm/s")
        if amount.quantity == "speed_rpm" and abs(amount.value) < _SLOW_RPM:
            return _slow(amount.value, "rev/min")
        unit, decimals = _PLAIN[amount.quantity]
        digits = number(amount.value, decimals=decimals)
        return f"{digits} {unit}" if unit else digits

    def pressure(self, value_bar: float, *, up: bool = False) -> str:
        """A pressure in the first unit, without regard to a gauge; ``up``: never less than it is."""
        decimals = _PRESSURE_DECIMALS[self.pressure_unit]
        if abs(value_bar) < _SMALL_PRESSURE_BAR and self.pressure_unit != "psi":
            decimals += 1
        if up:
            scale = 10.0**decimals
            top = math.ceil(to_unit(value_bar, self.pressure_unit) * scale - _DUST) / scale
            value_bar = from_unit(top, self.pressure_unit)
        return shown(value_bar, self.pressure_unit, decimals=decimals)

    def flow(self, value_lpm: float) -> str:
        """A flow in the first unit."""
        decimals = 1 if self.flow_unit == "gal/min" or value_lpm < _SMALL_FLOW_LPM else 0
        return shown(value_lpm, self.flow_unit, decimals=decimals)

    def digits(self, value_bar: float, graduation_bar: float, *, half: bool = False) -> str:
        """A reading without its unit, as a gauge with that division shows it.

        ``half``: to half a division, for a target that need not stand on a mark.
        """
        step = to_unit(graduation_bar, self.pressure_unit) * (0.5 if half else 1.0)
        return number(to_unit(value_bar, self.pressure_unit), step=float(f"{step:.9g}"))

    def reading(self, value_bar: float, graduation_bar: float, *, half: bool = False) -> str:
        """The same with its unit."""
        return f"{self.digits(value_bar, graduation_bar, half=half)} {self.pressure_unit}"

    def second(self, value_bar: float) -> str:
        """A pressure in the second unit; empty where the machine file names one only."""
        if not self.second_pressure_unit:
            return ""
        decimals = _PRESSURE_DECIMALS[self.second_pressure_unit]
        return shown(value_bar, self.second_pressure_unit, decimals=decimals)

    def second_inside(self, low_bar: float, high_bar: float) -> str:
        """A window in the second unit, rounded inward so that it never accepts more than the first.

        A narrow one gets digits more, so that rounding leaves something of it.
        """
        unit = self.second_pressure_unit
        if not unit:
            return ""
        low_digits, high_digits = "", ""
        for decimals in range(_PRESSURE_DECIMALS[unit], _PRESSURE_DECIMALS[unit] + 3):
            scale = 10.0**decimals
            low = math.ceil(to_unit(low_bar, unit) * scale - _DUST) / scale
            high = math.floor(to_unit(high_bar, unit) * scale + _DUST) / scale
            low_digits, high_digits = number(low, decimals=decimals), number(high, decimals=decimals)
            if low < high:
                break
        return f"{low_digits} to {high_digits} {unit}"

    def oil_second(self, low_c: float, high_c: float, limit_c: float) -> tuple[str, str, str]:
        """Both ends of a window and a limit in the second unit of temperature, whole degrees, never more.

        Empty where the machine file names one unit only.
        """
        if not self.second_temperature_unit:
            return "", "", ""
        low, high, limit = (1.8 * value_c + 32.0 for value_c in (low_c, high_c, limit_c))
        whole = (math.ceil(low - _DUST), math.floor(high + _DUST), math.floor(limit + _DUST))
        first, last, most = (f"{number(value, decimals=0)} °F" for value in whole)
        return first, last, most

    def limit_c(self, value_c: float) -> str:
        """A highest temperature in whole degrees, never more than it is."""
        return f"{number(math.floor(value_c + _DUST), decimals=0)} °C"

    def inside_c(self, low_c: float, high_c: float) -> tuple[str, str]:
        """Both ends of a window of temperatures, rounded inward; in tenths where degrees leave nothing."""
        for decimals in (0, 1):
            scale = 10.0**decimals
            low = math.ceil(low_c * scale - _DUST) / scale
            high = math.floor(high_c * scale + _DUST) / scale
            if low < high:
                break
        return f"{number(low, decimals=decimals)} °C", f"{number(high, decimals=decimals)} °C"

    def in_unit(self, value_bar: float) -> float:
        """A pressure in the first unit, as a number for a drawn scale."""
        return round(to_unit(value_bar, self.pressure_unit), 6)

    def from_first(self, value: float) -> float:
        """Back to bar."""
        return from_unit(value, self.pressure_unit)
