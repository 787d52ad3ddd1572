"""Loads that push by themselves: what would fall or turn when the pressure goes."""

from __future__ import annotations

from sheets.amounts import Amount
from sheets.machine.model import Machine
from sheets.machine.parts import Cylinder, HydraulicMotor


def held_loads(machine: Machine) -> dict[str, tuple[Cylinder | HydraulicMotor, Amount]]:
    """Each actuator with what pushes it: weight of a cylinder, driving torque of a motor."""
    found: dict[str, tuple[Cylinder | HydraulicMotor, Amount]] = {}
    for id_, part in machine.parts.items():
        if isinstance(part, Cylinder) and part.weight_kn > 0.0:
            found[id_] = part, Amount(value=part.weight_kn, quantity="force_kn")
        elif isinstance(part, HydraulicMotor) and part.driving_torque_nm > 0.0:
            found[id_] = part, Amount(value=part.driving_torque_nm, quantity="torque_nm")
    return found
