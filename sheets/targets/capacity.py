"""What every relief valve must pass, and its line stand, with all controls of pumps stuck at full stroke."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, replace

import numpy as np

from sheets.amounts import Finding, Severity, bar
from sheets.circuit.extremes import resistances, solve_every_set
from sheets.circuit.fault_edits import stuck_control
from sheets.circuit.model import Circuit
from sheets.circuit.reach import weakest_loaded
from sheets.machine.model import Machine
from sheets.machine.parts import ReliefValve, VariablePump
from sheets.targets.rules import relief_capacity
from sheets.targets.settings import Setting

_DUST_BAR = 1e-3
_DUST_LPM = 0.1
"""What the bends of the laws leave over: a relief that is rated for the pump's flow passes it."""


@dataclass(frozen=True, kw_only=True)
class _Reached:
    """The most that comes to one relief."""

    flow_lpm: float
    pressure_bar: float


def capacity_findings(
    machine: Machine, circuit: Circuit, settings: Mapping[str, Setting]
) -> tuple[Finding, ...]:
    """Refuses each relief that can't pass what reaches it, or whose line then passes a rating.

    ``settings``: those known; reliefs stand at the top of their windows, one without a setting at the end of
    its range, where it isn't judged. Every pump that has controls gives its full stroke, the spools stand in
    every set of positions, and the actuators are jammed or free, so that what a swept side returns is in it.
    A line is judged by the lowest rating that its pressure comes to. Where a state isn't established, or
    there are too many, the capacity isn't known, and that is refused.
    """
    ids = [id_ for id_ in circuit.reliefs.ids if id_ in settings]
    if not ids:
        return ()
    reached = _most_reached(machine, circuit, settings)
    if reached is None:
        return tuple(
            Finding(code="relief_capacity_not_known", severity=Severity.NOT_ESTABLISHED, subject=id_)
            for id_ in ids
        )
    return tuple(finding for id_ in ids for finding in _judged(machine, circuit, settings, id_, reached[id_]))


def _most_reached(
    machine: Machine, circuit: Circuit, settings: Mapping[str, Setting]
) -> dict[str, _Reached] | None:
    pumps = circuit.pumps
    for id_ in pumps.ids:
        if isinstance(machine.parts[id_], VariablePump):
            pumps = stuck_control(pumps, id_)
    stuck = replace(circuit, pumps=pumps)
    standing_bar = {
        site.id: settings[site.id].high_bar if site.id in settings else site.highest_bar
        for site in circuit.adjusters
    }
    batches = solve_every_set(machine, list(resistances(stuck)), standing_bar)
    if batches is None:
        return None
    reliefs = circuit.reliefs
    flows_lpm, pressures_bar = np.zeros(len(reliefs.ids)), np.zeros(len(reliefs.ids))
    for solved in batches:
        if not solved.established.all():
            return None
        flows_lpm = np.maximum(flows_lpm, solved.relief_flows_lpm.max(axis=0))
        pressures_bar = np.maximum(pressures_bar, solved.pressures_bar[:, reliefs.first].max(axis=0))
    return {
        id_: _Reached(flow_lpm=flow_lpm, pressure_bar=pressure_bar)
        for id_, flow_lpm, pressure_bar in zip(
            reliefs.ids, flows_lpm.tolist(), pressures_bar.tolist(), strict=True
        )
    }


def _judged(
    machine: Machine, circuit: Circuit, settings: Mapping[str, Setting], relief: str, reached: _Reached
) -> Iterator[Finding]:
    part, setting = machine.parts[relief], settings[relief]
    if not isinstance(part, ReliefValve):
        return
    too_small = relief_capacity(
        relief=relief, rated_flow_lpm=part.rated_flow_lpm, reaching_flow_lpm=reached.flow_lpm - _DUST_LPM
    )
    known = {finding.code for finding in setting.findings}
    yield from (finding for finding in too_small if finding.code not in known)
    weakest = weakest_loaded(
        machine,
        circuit,
        circuit.node_of[f"{relief}.P"],
        set_bar=setting.target_bar,
        reliefs_bar={id_: other.target_bar for id_, other in settings.items()},
    )
    if setting.high_bar <= weakest.rating_bar < reached.pressure_bar - _DUST_BAR:
        yield Finding(
            code="relief_lets_over_rating",
            severity=Severity.REFUSED,
            subject=relief,
            data={
                "pressure": bar(reached.pressure_bar),
                "rated_part": weakest.rated_by,
                "rating": bar(weakest.rating_bar),
            },
        )
