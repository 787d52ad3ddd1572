"""Values of a machine file as they are read off plates, in the machine's units."""

from __future__ import annotations

from typing import Final

from sheets.machine.leaves import Leaf
from sheets.machine.model import Units
from sheets.quantities import number, to_unit

_DIGITS: Final = 5
"""A plate has no more digits than these; converted values are rounded to them."""
_YES: Final = {True: "yes", False: "no"}


def plate_value(leaf: Leaf, units: Units) -> str:
    """One value with its unit. A value that was given in another unit is converted."""
    value = leaf.value
    if isinstance(value, bool):
        return _YES[value]
    if isinstance(value, str):
        return value
    if isinstance(value, tuple):
        return ", ".join(value) if value else "none"
    unit = {"bar": units.pressure[0], "L/min": units.flow[0]}.get(leaf.unit or "", leaf.unit or "")
    shown = to_unit(value, unit) if unit and unit != "%" else value
    rounded = float(f"{shown:.{_DIGITS}g}")
    return f"{number(rounded if abs(rounded) >= 1e-6 else shown)} {unit}".rstrip()


def plate_values(leaves: tuple[Leaf, ...], units: Units) -> str:
    """Several values in one line, each with its last key."""
    return "; ".join(f"{leaf.path[-1]} {plate_value(leaf, units)}" for leaf in leaves)
