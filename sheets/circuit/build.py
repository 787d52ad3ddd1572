"""The circuit of a machine: its parts sorted into families, its plate values into the figures of the laws."""

from __future__ import annotations

from sheets.circuit.build_actuators import build_actuators
from sheets.circuit.build_adjusters import AdjusterBook, Policies
from sheets.circuit.build_pumps import build_pumps, full_flow
from sheets.circuit.build_ways import build_checks, build_ways
from sheets.circuit.model import Circuit, SealedEnd
from sheets.circuit.nodes import NodeBook, read_nodes
from sheets.circuit.reliefs import Reliefs
from sheets.circuit.rows import Rows
from sheets.machine.model import Machine
from sheets.machine.parts import DirectionalValve, HandValve, Pump, ReliefValve


def build_circuit(
    machine: Machine,
    *,
    opening_ratio_direct: float = 0.80,
    opening_ratio_pilot: float = 0.93,
    control_width_bar: float = 4.0,
    sealed_ls: SealedEnd = "standby end",
) -> Circuit:
    """Give the circuit of a machine; the order of parts and nets in its file changes no figure of it.

    Parameters
    ----------
    machine : Machine
        The machine file as read.
    opening_ratio_direct, opening_ratio_pilot : 1
        Policy: opening pressure over setting of a relief whose plate gives none.
    control_width_bar : bar
        Policy: from full stroke to no net flow of a pump control whose plate gives none.
    sealed_ls : SealedEnd
        Where leakage leaves an LS port that is sealed, or cut off with nothing known about its inside. A
        machine whose circuit has ``sealed_ports`` is built with both ends and the worse is carried.

    Returns
    -------
    Circuit

    Raises InputError where a plate value that decides a pressure is missing or contradicts another.
    Valid for the kinds of part in ``machine.parts``. Source: the sources of the laws.
    """
    policies = Policies(
        opening_ratio_direct=opening_ratio_direct,
        opening_ratio_pilot=opening_ratio_pilot,
        control_width_bar=control_width_bar,
    )
    book = read_nodes(machine)
    # A motor that drives no pump (a fan's) is locked out with its supply; no pressure hangs on it.
    drives = tuple(sorted({part.driven_by for part in machine.parts.values() if isinstance(part, Pump)}))
    full_flow_lpm = sum(
        full_flow(machine, part_id, part)
        for part_id, part in sorted(machine.parts.items())
        if isinstance(part, Pump)
    )
    adjusters = AdjusterBook(machine, policies=policies)
    pumps, sealed_ports = build_pumps(machine, book, drives=drives, adjusters=adjusters, sealed_ls=sealed_ls)
    actuators = build_actuators(machine, book, reference_flow_lpm=full_flow_lpm)
    positions = _positions(machine)
    reliefs = _reliefs(machine, book, adjusters=adjusters, full_flow_lpm=full_flow_lpm)
    return Circuit(
        nodes=tuple(book.nodes),
        node_of=dict(book.node_of),
        adjusters=adjusters.sites(),
        positions=positions,
        drives=drives,
        actuators_ids=actuators.ids,
        ways=build_ways(machine, book, positions=positions),
        checks=build_checks(machine, book),
        reliefs=reliefs,
        pumps=pumps,
        actuators=actuators,
        reference_flow_lpm=full_flow_lpm,
        sealed_end=sealed_ls,
        sealed_ports=sealed_ports,
    )


def both_ends(
    machine: Machine,
    *,
    opening_ratio_direct: float = 0.80,
    opening_ratio_pilot: float = 0.93,
    control_width_bar: float = 4.0,
) -> tuple[Circuit, ...]:
    """Give the circuits between which leakage leaves a machine: one, or two where an LS port may be cut off.

    Parameters
    ----------
    machine : Machine
        The machine file as read.
    opening_ratio_direct, opening_ratio_pilot : 1
        As for ``build_circuit``.
    control_width_bar : bar
        As for ``build_circuit``.

    Returns
    -------
    tuple of Circuit
        The standby end first. States of one are states of the other; whatever is judged must hold in both,
        and the worse is carried.

    Raises InputError as ``build_circuit`` does.
    Valid as ``build_circuit``; several pumps with such ports are all taken at the same end.
    Source: nothing published tells where leakage leaves a sealed port, hence both ends.
    """
    ends: tuple[SealedEnd, ...] = ("standby end", "compensator end")
    first, second = (
        build_circuit(
            machine,
            opening_ratio_direct=opening_ratio_direct,
            opening_ratio_pilot=opening_ratio_pilot,
            control_width_bar=control_width_bar,
            sealed_ls=end,
        )
        for end in ends
    )
    return (first, second) if first.sealed_ports else (first,)


def _positions(machine: Machine) -> dict[str, tuple[str, ...]]:
    """Positions of every valve, the rest position first."""
    found: dict[str, tuple[str, ...]] = {}
    for part_id, part in sorted(machine.parts.items()):
        if isinstance(part, HandValve):
            found[part_id] = ("open", "closed") if part.rest == "open" else ("closed", "open")
        elif isinstance(part, DirectionalValve):
            others = sorted(position for position in part.positions if position != part.rest_position)
            found[part_id] = (part.rest_position, *others)
    return found


def _reliefs(machine: Machine, book: NodeBook, *, adjusters: AdjusterBook, full_flow_lpm: float) -> Reliefs:
    """All reliefs that lead somewhere; one with a plugged port protects nothing and is left out."""
    rows = Rows()
    for part_id, part in sorted(machine.parts.items()):
        if not isinstance(part, ReliefValve):
            continue
        first, second = book.at(f"{part_id}.P"), book.at(f"{part_id}.T")
        if first is None or second is None:
            continue
        site = adjusters.add_relief(
            part_id, part, controlled=first, reference=second, full_flow_lpm=full_flow_lpm
        )
        rows.add(
            id=part_id,
            first=first,
            second=second,
            ratio=site.flow_slope,
            flow=site.reference_flow_lpm,
            adjuster=adjusters.index(site.id),
        )
    return Reliefs(
        ids=rows.ids("id"),
        first=rows.index("first"),
        second=rows.index("second"),
        opening_ratio=rows.floats("ratio"),
        band_ratio=1.0 - rows.floats("ratio"),
        reference_flow_lpm=rows.floats("flow"),
        adjuster=rows.index("adjuster"),
    )
