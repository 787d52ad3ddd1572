"""Single faults of components, as data: what may fail, and the circuit and state that then hold.

A fault changes either where a spool stands, hence the state, or a figure of one law, hence the circuit. It
never adds a node, so a state of the sound circuit is a state of the faulty one.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from enum import Enum
from typing import Final

import numpy as np

from sheets.circuit.build_pumps import displaced_flow
from sheets.circuit.fault_edits import (
    leaking_check,
    leaking_spool,
    spool_leaks,
    stuck_control,
    stuck_relief,
    throttled_way,
    worn_pump,
)
from sheets.circuit.model import Circuit
from sheets.circuit.plant import PlantState
from sheets.circuit.smooth import conductance
from sheets.circuit.solution import Solution
from sheets.circuit.solver import solve
from sheets.machine.model import Machine
from sheets.machine.parts import (
    CheckValve,
    DirectionalValve,
    Filter,
    FlowControl,
    Orifice,
    Part,
    Pump,
    ReliefValve,
    VariablePump,
)

LEAKING_SHARE: Final = 0.02
"""Policy: of its rated edge, for a spool or a check that leaks."""
CLOGGED_SHARE: Final = 0.1
"""Policy: of its conductance, for a filter that is clogged."""
WORN_SHARE: Final = 0.15
"""Policy: taken off the volumetric efficiency of a pump that is worn."""


class FaultKind(Enum):
    """What may fail."""

    SPOOL_STUCK = "spool stuck"
    SPOOL_LEAKING = "spool leaking"
    COIL_DEAD = "coil dead"
    CONTROL_STUCK = "control stuck at full stroke"
    RELIEF_STUCK_SHUT = "relief stuck shut"
    RELIEF_STUCK_OPEN = "relief stuck open"
    CHECK_LEAKING = "check leaking"
    BLEED_PLUGGED = "bleed plugged"
    FILTER_CLOGGED = "filter clogged"
    PUMP_WORN = "pump worn"


CAN_MOVE: Final = frozenset({FaultKind.SPOOL_STUCK, FaultKind.SPOOL_LEAKING, FaultKind.COIL_DEAD})
"""Kinds that can set an actuator in motion."""
CAN_RAISE: Final = frozenset({FaultKind.CONTROL_STUCK, FaultKind.RELIEF_STUCK_SHUT, FaultKind.BLEED_PLUGGED})
"""Kinds that can raise a pressure."""
ALL_KINDS: Final = frozenset(FaultKind)
_IN_THE_STATE: Final = frozenset({FaultKind.SPOOL_STUCK, FaultKind.COIL_DEAD})
"""Kinds that change where a spool stands, and leave the circuit as it is."""


@dataclass(frozen=True, kw_only=True)
class Fault:
    """One component that fails in one way."""

    kind: FaultKind
    part: str
    position: str = ""
    """Spool stuck: where it stands whatever is asked. Coil dead: the position that this coil can't hold."""
    amount: float = 0.0
    """Leaking: conductance of each leak, L/min/√bar. Clogged: factor on its conductance. Worn: what it
    leaks more, L/min/bar. No other kind has one."""

    def shows_in(self, circuit: Circuit, state: PlantState) -> bool:
        """Whether it can make a difference in a state, as far as valves and drives alone decide.

        A spool that is held shifted may not have shifted; one at rest may not have come back.
        """
        if self.kind is FaultKind.SPOOL_STUCK:
            rest, stands = circuit.positions[self.part][0], state.positions[self.part]
            return self.position != stands and rest in (self.position, stands)
        if self.kind is FaultKind.COIL_DEAD:
            return self.position == state.positions[self.part]
        if self.kind in (FaultKind.CONTROL_STUCK, FaultKind.PUMP_WORN):
            pumps = circuit.pumps
            return circuit.drives[pumps.drive[pumps.ids.index(self.part)]] in state.running
        return True


def every_fault(
    machine: Machine, circuit: Circuit, *, kinds: frozenset[FaultKind] = ALL_KINDS
) -> tuple[Fault, ...]:
    """Every single fault that the circuit can have in any state, in the order of the file.

    A part that leads nowhere, so that the circuit leaves it out, has none.
    """
    return tuple(
        fault
        for part_id, part in machine.parts.items()
        for fault in _of_part(machine, circuit, part_id, part)
        if fault.kind in kinds
    )


def faults_of(
    machine: Machine, circuit: Circuit, state: PlantState, *, kinds: frozenset[FaultKind] = ALL_KINDS
) -> tuple[Fault, ...]:
    """Every single fault that can make a difference in a state, in the order of the file.

    ``kinds`` narrows it: ``CAN_MOVE``, ``CAN_RAISE``. A dead coil and a spool stuck at rest lead to the
    same state; both are listed, since a reading has to name both causes.
    """
    return tuple(
        fault for fault in every_fault(machine, circuit, kinds=kinds) if fault.shows_in(circuit, state)
    )


def faulty_circuit(circuit: Circuit, fault: Fault) -> Circuit:
    """The circuit with a fault in it; the same object where the fault only changes the state.

    Nodes, adjusters, valves and actuators are those of the sound circuit, in the same order.
    """
    match fault.kind:
        case FaultKind.SPOOL_LEAKING:
            return replace(circuit, ways=leaking_spool(circuit, fault.part, edge=fault.amount))
        case FaultKind.CONTROL_STUCK:
            return replace(circuit, pumps=stuck_control(circuit.pumps, fault.part))
        case FaultKind.RELIEF_STUCK_SHUT:
            return replace(circuit, reliefs=stuck_relief(circuit.reliefs, fault.part, opened=False))
        case FaultKind.RELIEF_STUCK_OPEN:
            return replace(circuit, reliefs=stuck_relief(circuit.reliefs, fault.part, opened=True))
        case FaultKind.CHECK_LEAKING:
            return replace(circuit, checks=leaking_check(circuit.checks, fault.part, edge=fault.amount))
        case FaultKind.BLEED_PLUGGED:
            return replace(circuit, ways=throttled_way(circuit.ways, fault.part, factor=0.0))
        case FaultKind.FILTER_CLOGGED:
            return replace(circuit, ways=throttled_way(circuit.ways, fault.part, factor=fault.amount))
        case FaultKind.PUMP_WORN:
            return replace(circuit, pumps=worn_pump(circuit.pumps, fault.part, more_leakage=fault.amount))
        case FaultKind.SPOOL_STUCK | FaultKind.COIL_DEAD:  # _IN_THE_STATE
            return circuit


def faulty_state(circuit: Circuit, state: PlantState, fault: Fault) -> PlantState:
    """Where things stand when a state is asked for while a fault is there; pressures stay as they were.

    Ask from the state that people intend, at every step anew: a spool stays stuck, and a coil stays dead.
    """
    if fault.kind is FaultKind.SPOOL_STUCK:
        return state.moved(fault.part, fault.position)
    if fault.kind is FaultKind.COIL_DEAD and state.positions[fault.part] == fault.position:
        return state.moved(fault.part, circuit.positions[fault.part][0])
    return state


def under_fault(circuit: Circuit, state: PlantState, fault: Fault) -> tuple[Circuit, PlantState]:
    """Circuit and state with one fault in them. A long run asks ``faulty_circuit`` once."""
    return faulty_circuit(circuit, fault), faulty_state(circuit, state, fault)


def solve_faults(
    circuit: Circuit,
    state: PlantState,
    faults: Sequence[Fault],
    *,
    effects: bool = False,
    start_bar: Sequence[float] | None = None,
) -> tuple[Solution, ...]:
    """Solutions of a state under each fault alone, in their order; each follows from the state's pressures.

    ``start_bar``: by node, where to start the iteration, for speed only: the solution without a fault is
    mostly near.
    """
    start = state.pressures_bar if start_bar is None else start_bar
    return solve_under_faults(circuit, [(state, fault, start) for fault in faults], effects=effects)


def solve_under_faults(
    circuit: Circuit,
    asked: Sequence[tuple[PlantState, Fault, Sequence[float]]],
    *,
    effects: bool = False,
) -> tuple[Solution, ...]:
    """The same for many states, each with its own fault and where to start from.

    What stands in the same circuit is solved in one batch, so a fault costs little more in many states than
    in one.
    """
    changed: dict[Fault | None, Circuit] = {}
    batches: dict[Fault | None, list[int]] = {}
    for index, (_, fault, _) in enumerate(asked):
        key = None if fault.kind in _IN_THE_STATE else fault
        if key not in changed:
            changed[key] = faulty_circuit(circuit, fault)
        batches.setdefault(key, []).append(index)
    found: dict[int, Solution] = {}
    for key, places in batches.items():
        states = [faulty_state(circuit, asked[place][0], asked[place][1]) for place in places]
        start = np.array([asked[place][2] for place in places], dtype=np.float64)
        batch = solve(changed[key], states, start=start, effects=effects)
        found.update((place, batch.one(row)) for row, place in enumerate(places))
    return tuple(found[index] for index in range(len(asked)))


def _of_part(machine: Machine, circuit: Circuit, part_id: str, part: Part) -> Iterator[Fault]:
    if isinstance(part, DirectionalValve):
        yield from _of_spool(circuit, part_id, part)
    elif isinstance(part, Pump):
        if isinstance(part, VariablePump):
            yield Fault(kind=FaultKind.CONTROL_STUCK, part=part_id)
        more_lpm = WORN_SHARE * displaced_flow(machine, part_id, part)
        yield Fault(kind=FaultKind.PUMP_WORN, part=part_id, amount=more_lpm / part.rating_bar)
    elif isinstance(part, ReliefValve) and part_id in circuit.reliefs.ids:
        yield Fault(kind=FaultKind.RELIEF_STUCK_SHUT, part=part_id)
        yield Fault(kind=FaultKind.RELIEF_STUCK_OPEN, part=part_id)
    elif isinstance(part, CheckValve) and part_id in circuit.checks.ids:
        edge = float(circuit.checks.conductance[circuit.checks.ids.index(part_id)])
        yield Fault(kind=FaultKind.CHECK_LEAKING, part=part_id, amount=LEAKING_SHARE * edge)
    elif isinstance(part, Orifice | FlowControl) and part_id in circuit.ways.ids:
        yield Fault(kind=FaultKind.BLEED_PLUGGED, part=part_id)
    elif isinstance(part, Filter) and part_id in circuit.ways.ids:
        yield Fault(kind=FaultKind.FILTER_CLOGGED, part=part_id, amount=CLOGGED_SHARE)


def _of_spool(circuit: Circuit, part_id: str, part: DirectionalValve) -> Iterator[Fault]:
    for position in circuit.positions[part_id]:
        yield Fault(kind=FaultKind.SPOOL_STUCK, part=part_id, position=position)
    if any(spool_leaks(circuit, part_id)):
        edge = conductance(rated_flow_lpm=part.rated_flow_lpm, rated_drop_bar=part.rated_drop_bar)
        yield Fault(kind=FaultKind.SPOOL_LEAKING, part=part_id, amount=LEAKING_SHARE * edge)
    if part.operated_by == "solenoids":
        for position in circuit.positions[part_id][1:]:
            yield Fault(kind=FaultKind.COIL_DEAD, part=part_id, position=position)
