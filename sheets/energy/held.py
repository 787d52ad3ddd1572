"""Loads that push by themselves: what would fall or turn when the pressure goes."""

from __future__ import annotations

from sheets.amounts import Amount
from sheets.circuit.model import Circuit
from sheets.energy.trapped import find_trapped
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


def stuck_loads(machine: Machine, circuit: Circuit) -> frozenset[str]:
    """Held loads that nobody can lower once everything is isolated: nothing lets the oil under them out.

    Only a dead solenoid, or nothing at all, would open a way to tank; with a lever or a hand valve, or with a
    way that stands open at rest, a load can be lowered.
    """
    shut = {volume.node for volume in find_trapped(machine, circuit).without_relief}
    return frozenset(
        id_
        for id_, (part, _) in held_loads(machine).items()
        if circuit.node_of.get(f"{id_}.{_leaves_by(part)}") in shut
    )


def _leaves_by(part: Cylinder | HydraulicMotor) -> str:
    """Port out of which the load presses the oil."""
    if isinstance(part, Cylinder):
        return "B" if part.weight_drives == "extending" else "A"
    return "B" if part.driving_torque_turns == "forward" else "A"
