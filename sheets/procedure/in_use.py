"""Which adjusters can govern at all: one that can is never called 'not in use'. And which only protect."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from itertools import islice, product

from sheets.circuit.extremes import resistances, solve_every_set
from sheets.circuit.faults import FaultKind, every_fault, faulty_circuit
from sheets.circuit.model import AdjusterSite, Circuit
from sheets.circuit.plant import PlantState
from sheets.machine.model import Machine
from sheets.procedure.work import ALL, Work

STILL_EFFECT = 1e-6
"""Effect below which a reading doesn't answer at all."""
OPEN_LPM = 0.1
"""A relief that passes more has opened."""
_BATCH = 256


def ever_governs(
    circuit: Circuit,
    base: PlantState,
    adjuster: str,
    trusted_ports: frozenset[str] = frozenset(),
    work: Work | None = None,
) -> bool | None:
    """Whether the adjuster's reading answers to it in any state that no opened line makes.

    Valves stand in every combination of their positions, the adjuster at both ends and the middle of its
    range (at its target in ``base`` it may only be hidden), the others at their targets, all at the
    highest or all at the lowest end. States that move or aren't fit for setting count too: what governs
    there is in use. So does a state that isn't established, since nobody knows what governs it; nor does
    anybody where leakage alone decides the LS port of the adjuster's own pump, unless that is one of the
    ``trusted_ports``. None where the work was spent before every state was looked at: then nobody knows.
    """
    work = work or Work(ALL)
    place = next(index for index, site in enumerate(circuit.adjusters) if site.id == adjuster)
    site = circuit.adjusters[place]
    states = _states(circuit, base, site)
    own_port = f"{site.part}.X"
    doubtful = [id_ == site.part and own_port not in trusted_ports for id_ in circuit.pumps.ids]
    while batch := list(islice(states, _BATCH)):
        if work.spent:
            return None
        solved = work.solve(circuit, batch, effects=True)
        if solved.effects is None or not solved.established.all():
            return True
        if solved.loose_signals[:, doubtful].any():
            return True
        if (abs(solved.effects[:, place, site.controlled_node]) > STILL_EFFECT).any():
            return True
    return False


def guarded_pumps(machine: Machine, circuit: Circuit, base: PlantState, adjuster: str) -> tuple[str, ...]:
    """Pumps of which a control stuck at full stroke lets a relief open, wherever the spools stand.

    The adjusters stand as in ``base``, line valves at rest, the actuators jammed or free. Empty for an
    adjuster that is no relief's. Where that isn't established it may open, so the pump is named.
    """
    site = next(site for site in circuit.adjusters if site.id == adjuster)
    if site.part not in circuit.reliefs.ids:
        return ()
    row = circuit.reliefs.ids.index(site.part)
    pumps = []
    for fault in every_fault(machine, circuit, kinds=frozenset({FaultKind.CONTROL_STUCK})):
        variants = list(resistances(faulty_circuit(circuit, fault)))
        batches = solve_every_set(machine, variants, base.settings_bar)
        if batches is None or any(
            not solved.established.all() or (solved.relief_flows_lpm[:, row] > OPEN_LPM).any()
            for solved in batches
        ):
            pumps.append(fault.part)
    return tuple(pumps)


def _states(circuit: Circuit, base: PlantState, site: AdjusterSite) -> Iterator[PlantState]:
    valves = list(circuit.positions)
    own_bar = (site.lowest_bar, (site.lowest_bar + site.highest_bar) / 2.0, site.highest_bar)
    for positions in product(*circuit.positions.values()):
        standing = base
        for valve, position in zip(valves, positions, strict=True):
            standing = standing.moved(valve, position)
        for others_bar in _others(circuit, base, site):
            state = standing
            for id_, setting_bar in others_bar:
                state = state.adjusted(id_, setting_bar)
            for setting_bar in own_bar:
                yield state.adjusted(site.id, setting_bar)


def _others(
    circuit: Circuit, base: PlantState, site: AdjusterSite
) -> Sequence[tuple[tuple[str, float], ...]]:
    others = [other for other in circuit.adjusters if other.id != site.id]
    return (
        tuple((other.id, other.highest_bar) for other in others),
        tuple((other.id, base.settings_bar[other.id]) for other in others),
        tuple((other.id, other.lowest_bar) for other in others),
    )
