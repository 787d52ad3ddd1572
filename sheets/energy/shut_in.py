"""What may stand in each line when the drive stops: what the limits let come there, not what it is rated."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from itertools import islice, product

import numpy as np

from sheets.circuit.fault_edits import throttled_way
from sheets.circuit.faults import CLOGGED_SHARE
from sheets.circuit.model import Circuit
from sheets.circuit.plant import PlantState
from sheets.circuit.solver import solve
from sheets.machine.model import Machine
from sheets.machine.parts import DirectionalValve, Filter

MOST_STATES = 8192
"""States that are solved; a machine that has more gets no figure."""
_BATCH = 256
_DIGITS = 2
"""After the point: what the solver is good for, so that rounding up takes no dust for pressure."""
_JAMMED_BAR = 1e6
"""Resistance of an actuator that nothing moves."""


def shut_in_bar(machine: Machine, circuit: Circuit) -> tuple[float, ...] | None:
    """Highest pressure that may have come to each node by the time the drive stops, in bar; None: not known.

    A rating limits nothing, so none is asked. Nobody knows how the screws stand, so each stands at the end of
    its range. The drives run, line valves are at rest, and every set of spool positions is solved with all
    actuators jammed, with all of them free of load and friction (then a blocked side can exceed the supply),
    and with one of them free. A port that leakage alone decides is taken at the outlet's pressure. All this
    also with every filter clogged, which raises what lies before it. Where a state isn't established or there
    are too many, nothing is known.
    """
    spools = [id_ for id_, part in machine.parts.items() if isinstance(part, DirectionalValve)]
    variants = [
        one for resisting in _resisting(_tight(circuit)) for one in (resisting, _clogged(machine, resisting))
    ]
    sets = 1
    for spool in spools:
        sets *= len(circuit.positions[spool])
    if sets * len(variants) > MOST_STATES:
        return None
    highest_bar = np.zeros(len(circuit.nodes))
    for variant in variants:
        states = _states(variant, spools)
        while batch := list(islice(states, _BATCH)):
            solved = solve(variant, batch)
            if not solved.established.all():
                return None
            highest_bar = np.maximum(highest_bar, solved.pressures_bar.max(axis=0))
    return tuple(np.round(highest_bar, _DIGITS).tolist())


def _states(circuit: Circuit, spools: list[str]) -> Iterator[PlantState]:
    running = circuit.rest_state({site.id: site.highest_bar for site in circuit.adjusters})
    for drive in circuit.drives:
        running = running.driven(drive, on=True)
    for positions in product(*(circuit.positions[id_] for id_ in spools)):
        state = running
        for spool, position in zip(spools, positions, strict=True):
            state = state.moved(spool, position)
        yield state


def _tight(circuit: Circuit) -> Circuit:
    """The circuit without what lowers a line only a little, and nobody vouches for."""
    sealed = np.array([f"{id_}.X" in circuit.sealed_ports for id_ in circuit.pumps.ids], dtype=np.bool_)
    reliefs, actuators = circuit.reliefs, circuit.actuators
    # Closed up to the setting; at the full flow of the pumps the reading that its own slope gives, if more.
    over_reference = 1.0 - reliefs.reference_flow_lpm / max(circuit.reference_flow_lpm, 1e-9)
    return replace(
        circuit,
        pumps=replace(circuit.pumps, bled_from_outlet=circuit.pumps.bled_from_outlet | sealed),
        reliefs=replace(
            reliefs,
            opening_ratio=np.ones_like(reliefs.opening_ratio),
            band_ratio=reliefs.band_ratio * np.maximum(0.0, over_reference),
        ),
        actuators=replace(
            actuators,
            case_leakage=np.zeros_like(actuators.case_leakage),
            cross_leakage=np.zeros_like(actuators.cross_leakage),
        ),
    )


def _resisting(circuit: Circuit) -> Iterator[Circuit]:
    count = len(circuit.actuators.ids)
    jammed = np.full(count, _JAMMED_BAR)
    rows = [jammed, np.zeros(count)] if count else [jammed]
    if count > 1:
        rows += [np.where(np.arange(count) == free, 0.0, _JAMMED_BAR) for free in range(count)]
    for resists in rows:
        actuators = replace(circuit.actuators, resists_forward_bar=resists, resists_backward_bar=resists)
        yield replace(circuit, actuators=actuators)


def _clogged(machine: Machine, circuit: Circuit) -> Circuit:
    ways = circuit.ways
    for id_, part in machine.parts.items():
        if isinstance(part, Filter) and id_ in ways.ids:
            ways = throttled_way(ways, id_, factor=CLOGGED_SHARE)
    return replace(circuit, ways=ways)
