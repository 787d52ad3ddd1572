"""What the machine's work needs: pressure at the pump while each actuator moves, worst direction first."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from itertools import chain, islice, product

from sheets.amounts import Amount, Finding, Severity
from sheets.circuit.model import Circuit
from sheets.circuit.plant import PlantState
from sheets.circuit.solver import solve
from sheets.energy.held import held_loads
from sheets.machine.model import Machine
from sheets.machine.parts import Cylinder, DirectionalValve, FixedPump, HydraulicMotor, VariablePump

_MOST_POSITIONS = 1024
"""Sets of spool positions that are tried for a load."""
_BATCH = 256


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

    ``settings_bar`` holds every adjuster: ``limits`` at the end of their range, the others at their targets.
    So losses and the margin of a load-sensing control are in the figures. States that don't converge are left
    out; where a value would have to come from here, that is then said.
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


def idle_loads(machine: Machine, circuit: Circuit, settings_bar: Mapping[str, float]) -> tuple[Finding, ...]:
    """Refuses loads that no spool position moves, though every limit stands at the end of its range.

    ``settings_bar`` as for ``work_demands``. Such a load can't be what the pump is set for: the load, the
    nets or what is said of an LS port is wrong, and no work pressure is known. Single spools are tried first.
    Where there are too many sets of positions to look at, or a state isn't established, a load that nothing
    moved so far isn't known to move, and is refused as that.
    """
    left = dict(_loads(machine))
    running = circuit.rest_state(settings_bar)
    for drive in circuit.drives:
        running = running.driven(drive, on=True)
    spools = [id_ for id_, part in machine.parts.items() if isinstance(part, DirectionalValve)]
    sets = chain(_singles(circuit, spools), product(*(circuit.positions[id_] for id_ in spools)))
    if not spools:
        return ()
    tried, established = 0, True
    while left and (batch := list(islice(sets, _BATCH))):
        tried += len(batch)
        if tried > _MOST_POSITIONS:
            established = False
            break
        states: list[PlantState] = []
        for positions in batch:
            state = running
            for spool, position in zip(spools, positions, strict=True):
                state = state.moved(spool, position)
            states.append(state)
        solved = solve(circuit, states)
        for index in range(len(batch)):
            solution = solved.one(index)
            if not solution.established:
                established = False
                continue
            for actuator in solution.moving:
                turns = isinstance(machine.parts[actuator], HydraulicMotor)
                left.pop((actuator, turns or solution.speeds[actuator] > 0.0), None)
    return tuple(
        _unmoved(actuator, {"load": load, "sense": sense}, established=established)
        for (actuator, _), (load, sense) in left.items()
    )


def _unmoved(actuator: str, data: Mapping[str, Amount | str], *, established: bool) -> Finding:
    if established:
        return Finding(code="load_never_moves", severity=Severity.REFUSED, subject=actuator, data=data)
    return Finding(code="load_not_known_to_move", severity=Severity.REFUSED, subject=actuator, data=data)


def _singles(circuit: Circuit, spools: list[str]) -> Iterator[tuple[str, ...]]:
    """Positions with one spool shifted and the others at rest."""
    rest = tuple(circuit.positions[id_][0] for id_ in spools)
    for place, id_ in enumerate(spools):
        for position in circuit.positions[id_][1:]:
            yield (*rest[:place], position, *rest[place + 1 :])


def undescribed_loads(machine: Machine) -> tuple[Finding, ...]:
    """Refuses a held-up load that no part describes, and one declared absent although a part has it."""
    described = held_loads(machine)
    absent = [source for source in machine.absent if "suspended" in source.casefold()]
    if machine.load_is_held_up and not described:
        nothing = Finding(code="load_not_described", severity=Severity.REFUSED, subject=machine.tag, data={})
        return (nothing,)
    if absent and described:
        subject = ", ".join(described)
        return (Finding(code="load_declared_absent", severity=Severity.REFUSED, subject=subject, data={}),)
    return ()


def _loads(machine: Machine) -> Iterator[tuple[tuple[str, bool], tuple[Amount, str]]]:
    """Every load that a file names, by actuator and whether it is of the positive sense, as a motor's is."""
    for id_, part in machine.parts.items():
        if isinstance(part, Cylinder):
            both = ((part.extending_load_kn, "extending"), (part.retracting_load_kn, "retracting"))
            for load_kn, sense in both:
                if load_kn > 0.0:
                    yield (id_, sense == "extending"), (Amount(value=load_kn, quantity="force_kn"), sense)
        elif isinstance(part, HydraulicMotor) and part.load_torque_nm > 0.0:
            yield (id_, True), (Amount(value=part.load_torque_nm, quantity="torque_nm"), "either way")
