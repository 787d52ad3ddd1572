"""What the machine's work needs: pressure at the pump while each actuator moves, worst direction first."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from sheets.circuit.model import Circuit
from sheets.circuit.solver import solve
from sheets.machine.model import Machine
from sheets.machine.parts import DirectionalValve, FixedPump, VariablePump


@dataclass(frozen=True, kw_only=True)
class Demand:
    """One actuator moved by one valve position, at the flow that the circuit gives it."""

    actuator: str
    valve: str
    position: str
    pump: str
    pump_pressure_bar: float
    held_back: bool
    """A limit at the end of its range set that pressure: the true need isn't known."""


def work_demands(
    machine: Machine, circuit: Circuit, settings_bar: Mapping[str, float], limits: frozenset[str]
) -> tuple[Demand, ...]:
    """Pump pressure for every move of every actuator, from the solver, highest first.

    ``settings_bar`` holds every adjuster: ``limits`` at the end of their range, the others at their
    targets. So losses and the margin of a load-sensing control are in the figures. States that don't
    converge are left out; where a value would have to come from here, that is then said.
    """
    running = circuit.rest_state(settings_bar)
    for drive in circuit.drives:
        running = running.driven(drive, on=True)
    moves = [
        (id_, position)
        for id_, part in machine.parts.items()
        if isinstance(part, DirectionalValve)
        for position in part.positions
        if position != part.rest_position
    ]
    pumps = [id_ for id_, part in machine.parts.items() if isinstance(part, FixedPump | VariablePump)]
    if not moves:
        return ()
    batch = solve(circuit, [running.moved(valve, position) for valve, position in moves])
    demands: list[Demand] = []
    for index, (valve, position) in enumerate(moves):
        solution = batch.one(index)
        if not solution.established:
            continue
        for actuator in sorted(solution.moving):
            for pump in pumps:
                outlet_bar = solution.pressure_at(f"{pump}.P")
                held_back = any(
                    site.id in limits
                    and site.controlled_node == circuit.node_of[f"{pump}.P"]
                    and outlet_bar > settings_bar[site.id] - site.width_bar
                    for site in circuit.adjusters
                )
                demands.append(
                    Demand(
                        actuator=actuator,
                        valve=valve,
                        position=position,
                        pump=pump,
                        pump_pressure_bar=outlet_bar,
                        held_back=held_back,
                    )
                )
    return tuple(sorted(demands, key=lambda demand: (-demand.pump_pressure_bar, demand.actuator)))
