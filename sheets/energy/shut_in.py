"""What may stand in each line when the drive stops: what the limits let come there, not what it is rated."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from sheets.circuit.extremes import resistances, solve_every_set
from sheets.circuit.fault_edits import throttled_way
from sheets.circuit.faults import CLOGGED_SHARE
from sheets.circuit.model import Circuit
from sheets.machine.model import Machine
from sheets.machine.parts import Filter

_DIGITS = 2
"""After the point: what the solver is good for, so that rounding up takes no dust for pressure."""


def shut_in_bar(machine: Machine, circuit: Circuit) -> tuple[float, ...] | None:
    """Highest pressure that may have come to each node by the time the drive stops, in bar; None: not known.

    A rating limits nothing, so none is asked. Nobody knows how the screws stand, so each stands at the end of
    its range. The drives run, line valves are at rest, and every set of spool positions is solved with all
    actuators jammed, with all of them free of load and friction (then a blocked side can exceed the supply),
    and with one of them free. A port that leakage alone decides is taken at the outlet's pressure. All this
    also with every filter clogged, which raises what lies before it. Where a state isn't established or there
    are too many, nothing is known.
    """
    variants = [
        one for resisting in resistances(_tight(circuit)) for one in (resisting, _clogged(machine, resisting))
    ]
    batches = solve_every_set(machine, variants, {site.id: site.highest_bar for site in circuit.adjusters})
    if batches is None:
        return None
    highest_bar = np.zeros(len(circuit.nodes))
    for solved in batches:
        if not solved.established.all():
            return None
        highest_bar = np.maximum(highest_bar, solved.pressures_bar.max(axis=0))
    return tuple(np.round(highest_bar, _DIGITS).tolist())


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


def _clogged(machine: Machine, circuit: Circuit) -> Circuit:
    ways = circuit.ways
    for id_, part in machine.parts.items():
        if isinstance(part, Filter) and id_ in ways.ids:
            ways = throttled_way(ways, id_, factor=CLOGGED_SHARE)
    return replace(circuit, ways=ways)
