"""What a test state asks of the drives."""

from __future__ import annotations

from sheets.amounts import Amount, Finding, Severity, kw
from sheets.circuit.drive_load import drive_loads
from sheets.circuit.solution import Solution
from sheets.machine.model import Machine
from sheets.machine.parts import ElectricMotor
from sheets.procedure.conditions import Condition, Failure


def overloaded(machine: Machine, solution: Solution) -> dict[str, Amount | str] | None:
    """The first drive that is asked for more than power times service factor, with the figures."""
    for drive, load in drive_loads(solution.circuit, solution).items():
        motor = machine.parts[drive]
        if not isinstance(motor, ElectricMotor):
            continue
        carries_kw = motor.power_kw * motor.service_factor
        if load.shaft_kw > carries_kw:
            return {"drive": drive, "asked": kw(load.shaft_kw), "carries": kw(carries_kw)}
    return None


def drive_findings(
    machine: Machine, *, at_target: Solution, at_top: Solution, adjuster: str
) -> tuple[Finding, ...] | Failure:
    """Refuses a state that overloads a drive at the target; warns of one that does at the window's top."""
    data = overloaded(machine, at_target)
    if data is not None:
        return Failure(condition=Condition.POWERED, data=data)
    data = overloaded(machine, at_top)
    if data is None:
        return ()
    return (Finding(code="drive_over_at_top", severity=Severity.WARNING, subject=adjuster, data=data),)
