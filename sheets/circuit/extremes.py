"""States between which a machine works: every set of spool positions, actuators jammed and free."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import replace
from itertools import islice, product
from math import prod

import numpy as np

from sheets.circuit.model import Circuit
from sheets.circuit.plant import PlantState
from sheets.circuit.solution import BatchSolution
from sheets.circuit.solver import solve
from sheets.machine.model import Machine
from sheets.machine.parts import DirectionalValve

MOST_STATES = 8192
"""States that are solved; a machine that has more gets no answer."""
_BATCH = 256
_JAMMED_BAR = 1e6
"""Resistance of an actuator that nothing moves."""


def resistances(circuit: Circuit) -> Iterator[Circuit]:
    """The circuit with all actuators jammed, with all of them free of load and friction, with one free.

    Weights and driving torques stay. Jammed, a line comes to what limits it; free, a blocked side can exceed
    the supply, and a side that is swept faster than the other gives more flow than the pumps.
    """
    count = len(circuit.actuators.ids)
    rows = [np.full(count, _JAMMED_BAR)]
    if count:
        rows.append(np.zeros(count))
    if count > 1:
        rows += [np.where(np.arange(count) == free, 0.0, _JAMMED_BAR) for free in range(count)]
    for resists in rows:
        actuators = replace(
            circuit.actuators,
            load_forward_bar=np.zeros(count),
            load_backward_bar=np.zeros(count),
            friction_bar=resists,
            breakaway_bar=np.zeros(count),
        )
        yield replace(circuit, actuators=actuators)


def solve_every_set(
    machine: Machine, variants: list[Circuit], settings_bar: Mapping[str, float]
) -> Iterator[BatchSolution] | None:
    """Every set of spool positions in each variant, drives on, line valves at rest; None: too many.

    ``settings_bar`` holds every adjuster, in bar.
    """
    spools = [id_ for id_, part in machine.parts.items() if isinstance(part, DirectionalValve)]
    sets = prod(len(variants[0].positions[spool]) for spool in spools)
    if sets * len(variants) > MOST_STATES:
        return None
    return _solved(variants, spools, settings_bar)


def _solved(
    variants: list[Circuit], spools: list[str], settings_bar: Mapping[str, float]
) -> Iterator[BatchSolution]:
    for variant in variants:
        states = _states(variant, spools, settings_bar)
        while batch := list(islice(states, _BATCH)):
            yield solve(variant, batch)


def _states(circuit: Circuit, spools: list[str], settings_bar: Mapping[str, float]) -> Iterator[PlantState]:
    running = circuit.rest_state(settings_bar)
    for drive in circuit.drives:
        running = running.driven(drive, on=True)
    for positions in product(*(circuit.positions[id_] for id_ in spools)):
        state = running
        for spool, position in zip(spools, positions, strict=True):
            state = state.moved(spool, position)
        yield state
