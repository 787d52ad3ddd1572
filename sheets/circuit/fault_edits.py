"""Families of elements with one of them faulty: copies in which one figure, or one row, differs."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from typing import Final

import numpy as np

from sheets.circuit.model import Circuit
from sheets.circuit.pumps import Pumps
from sheets.circuit.reliefs import Reliefs
from sheets.circuit.smooth import Floats, Ints
from sheets.circuit.stamp import NONE
from sheets.circuit.ways import Checks, Ways

SPOOL_CLEARANCES: Final = (("P", "A"), ("P", "B"), ("A", "T"), ("B", "T"))
"""Pairs of ports that a spool's lands part from each other."""


def spool_leaks(circuit: Circuit, valve: str) -> Iterator[tuple[str, int, int]]:
    """Name and nodes of each clearance of a spool that joins two nodes of the circuit."""
    for ends in SPOOL_CLEARANCES:
        first, second = (circuit.node_of.get(f"{valve}.{end}") for end in ends)
        if first is not None and second is not None and first != second:
            yield f"{valve} {ends[0]} to {ends[1]} clearance", first, second


def leaking_spool(circuit: Circuit, valve: str, *, edge: float) -> Ways:
    """Give the ways of a circuit with a spool that leaks along its lands, wherever it stands.

    Parameters
    ----------
    circuit : Circuit
        The sound circuit.
    valve : identifier
        The directional valve.
    edge : L/min/√bar
        Conductance between P and each working port, and between each working port and T.

    Returns
    -------
    Ways
        The same ways, and behind them one that is always open for each clearance.

    Valid for turbulent flow; a real clearance is laminar and leaks less at a small drop for the same figure.
    Source: law of the ways; the amount is policy, a share of the plate's edge.
    """
    names, firsts, seconds = zip(*spool_leaks(circuit, valve), strict=True)
    ways, more = circuit.ways, len(names)
    return Ways(
        ids=(*ways.ids, *names),
        parts=(*ways.parts, *(valve,) * more),
        first=np.append(ways.first, firsts),
        second=np.append(ways.second, seconds),
        conductance=np.append(ways.conductance, [edge] * more),
        valve=np.append(ways.valve, [NONE] * more),
        opens=np.vstack([ways.opens, np.zeros((more, ways.opens.shape[1]), dtype=np.bool_)]),
    )


def throttled_way(ways: Ways, part: str, *, factor: float) -> Ways:
    """Give ways with one of them narrowed.

    Parameters
    ----------
    ways : Ways
        The sound ways.
    part : identifier
        Orifice, flow control or filter.
    factor : 1
        On its conductance; 0 closes it, so that it conducts exactly nothing.

    Returns
    -------
    Ways

    Valid for turbulent flow; a filter's bypass isn't modelled, so a clogged one holds back all of its drop.
    Source: law of the ways; the factor is policy.
    """
    return replace(ways, conductance=_with(ways.conductance, ways.ids.index(part), by=factor))


def leaking_check(checks: Checks, part: str, *, edge: float) -> Checks:
    """Give checks with one of them leaking backward.

    Parameters
    ----------
    checks : Checks
        The sound checks.
    part : identifier
        The check valve.
    edge : L/min/√bar
        Conductance backward.

    Returns
    -------
    Checks
        The same checks, and behind them one the other way round, without a spring, called ``CV1 backward``.

    Valid as the law of the checks; forward nothing changes, whose flow at the same drop is far larger.
    Source: law of the checks; the amount is policy, a share of the plate's edge.
    """
    row = checks.ids.index(part)
    return Checks(
        ids=(*checks.ids, f"{part} backward"),
        first=np.append(checks.first, checks.second[row]),
        second=np.append(checks.second, checks.first[row]),
        conductance=np.append(checks.conductance, edge),
        opening_bar=np.append(checks.opening_bar, 0.0),
    )


def stuck_relief(reliefs: Reliefs, part: str, *, opened: bool) -> Reliefs:
    """Give reliefs with one of them stuck.

    Parameters
    ----------
    reliefs : Reliefs
        The sound reliefs.
    part : identifier
        The relief valve.
    opened : truth
        Whether it is stuck open, else shut.

    Returns
    -------
    Reliefs
        Shut: it passes exactly nothing. Open: it passes q_ref·Δp/((1 − κ)·S), from no drop on, so it holds
        (1 − κ)·S at its reference flow.

    Valid as the law of the reliefs. Source: law of the reliefs with its opening moved; how far a stuck poppet
    stands open is nowhere published, so its band is taken.
    """
    row = reliefs.ids.index(part)
    if opened:
        return replace(reliefs, opening_ratio=_with(reliefs.opening_ratio, row, by=0.0))
    return replace(reliefs, reference_flow_lpm=_with(reliefs.reference_flow_lpm, row, by=0.0))


def stuck_control(pumps: Pumps, part: str) -> Pumps:
    """Give pumps with one of them held at full stroke, whatever its controls should ask for.

    Parameters
    ----------
    pumps : Pumps
        The sound pumps.
    part : identifier
        The variable pump.

    Returns
    -------
    Pumps
        The same pumps; this one gives V·n less its leakage as a fixed pump does, or the flow of its
        displacement stop. Its torque limiter takes nothing away: it acts through the same piston.

    Valid at any pressure. Source: law of the fixed pump.
    """
    row = pumps.ids.index(part)
    return replace(
        pumps,
        compensator=_without(pumps.compensator, row),
        load_sensing=_without(pumps.load_sensing, row),
        torque_power_bar_lpm=np.where(np.arange(len(pumps.ids)) == row, np.inf, pumps.torque_power_bar_lpm),
    )


def worn_pump(pumps: Pumps, part: str, *, more_leakage: float) -> Pumps:
    """Give pumps with one of them leaking more inside.

    Parameters
    ----------
    pumps : Pumps
        The sound pumps.
    part : identifier
        The pump.
    more_leakage : L/min/bar
        On top of what its volumetric efficiency gives.

    Returns
    -------
    Pumps

    Valid as the law of the pumps: a setting stays the reading at no net flow, as its controls stroke for the
    leakage. Source: leakage linear in pressure; the amount is policy, a loss of volumetric efficiency.
    """
    row = pumps.ids.index(part)
    leakage = pumps.leakage_per_bar.copy()
    leakage[row] += more_leakage
    return replace(pumps, leakage_per_bar=leakage)


def _with(values: Floats, row: int, *, by: float) -> Floats:
    changed = values.copy()
    changed[row] *= by
    return changed


def _without(adjusters: Ints, row: int) -> Ints:
    changed = adjusters.copy()
    changed[row] = NONE
    return changed
