"""Lines in which an actuator's areas raise the pressure over what the pumps give, past a rating."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from sheets.amounts import Finding, Severity, bar
from sheets.circuit.extremes import resistances, solve_every_set
from sheets.circuit.model import Circuit
from sheets.machine.model import Machine
from sheets.targets.settings import Setting

_DUST_BAR = 0.05
"""What the smooth bends of the laws may add."""


def intensified_lines(
    machine: Machine, circuit: Circuit, settings: Mapping[str, Setting]
) -> tuple[Finding, ...]:
    """Refuses a line at an actuator that passes its rating in service, every limit within its window.

    Where the rod side of a cylinder can't empty as fast as the other side fills (a throttle, a shut way),
    the ratio of areas raises it over the supply, the more the less the cylinder pushes. Valves stand in every
    set of their positions, line valves at rest, actuators free or jammed. Where a state isn't established or
    there are too many, nothing is said here: then the capacity of the reliefs isn't known either.
    """
    tops_bar = {id_: setting.high_bar for id_, setting in settings.items()}
    standing_bar = {site.id: site.highest_bar for site in circuit.adjusters} | tops_bar
    batches = solve_every_set(machine, list(resistances(circuit)), standing_bar) if tops_bar else None
    if batches is None:
        return ()
    supply_bar = max(tops_bar.values())
    highest_bar = np.zeros(len(circuit.nodes))
    for solved in batches:
        known = np.where(solved.established[:, None], solved.pressures_bar, 0.0)
        highest_bar = np.maximum(highest_bar, known.max(axis=0))
    ends = sorted({*circuit.actuators.node_a.tolist(), *circuit.actuators.node_b.tolist()})
    found = []
    for node in ends:
        here = circuit.nodes[node]
        if highest_bar[node] > max(here.rating_bar, supply_bar) + _DUST_BAR:
            data = {
                "pressure": bar(float(highest_bar[node])),
                "rating": bar(here.rating_bar),
                "part": here.rated_by,
            }
            found.append(
                Finding(code="line_intensified", severity=Severity.REFUSED, subject=here.name, data=data)
            )
    return tuple(found)
