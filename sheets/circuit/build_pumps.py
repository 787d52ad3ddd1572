"""Pumps of a machine."""

from __future__ import annotations

from dataclasses import dataclass

from sheets.circuit.build_adjusters import AdjusterBook
from sheets.circuit.model import SealedEnd
from sheets.circuit.nodes import NodeBook
from sheets.circuit.pumps import CLOSED_BEND_AT_LEAST, STROKE_BEND, Pumps
from sheets.circuit.rows import Rows
from sheets.circuit.stamp import NONE
from sheets.errors import InputError, Problem
from sheets.machine.model import Machine
from sheets.machine.parts import ElectricMotor, Pump, VariablePump

SIGNAL_BLEED = 1e-3
"""L/min/√bar that seeps inside a pump into its LS node: decides a port that is cut off, moves no other."""
LEAST_SETTING_BAR = 1.0


def full_flow(machine: Machine, part_id: str, pump: Pump) -> float:
    """Flow of a pump at the pressure of its rating, V·n·η_v, in L/min.

    Raises InputError where nothing of that name drives it.
    """
    return displaced_flow(machine, part_id, pump) * pump.volumetric_efficiency


def displaced_flow(machine: Machine, part_id: str, pump: Pump) -> float:
    """Theoretical flow of a pump at full stroke, V·n, in L/min.

    Raises InputError where nothing of that name drives it.
    """
    drive = machine.parts.get(pump.driven_by)
    if not isinstance(drive, ElectricMotor):
        raise InputError(
            Problem(
                where=f"parts, {part_id}, driven by",
                what=f"{pump.driven_by} is no drive of this machine.",
                fix="Name the electric motor that turns the pump.",
            )
        )
    return pump.displacement_cm3 * drive.speed_rpm / 1000.0


@dataclass(frozen=True, kw_only=True)
class _Signal:
    """Where the LS node of a pump is and what seeps into it."""

    node: int
    bleed: float
    from_outlet: bool
    open_question: bool
    """Nothing but leakage decides it once it is cut off."""


def build_pumps(
    machine: Machine,
    book: NodeBook,
    *,
    drives: tuple[str, ...],
    adjusters: AdjusterBook,
    sealed_ls: SealedEnd,
) -> tuple[Pumps, tuple[str, ...]]:
    """All pumps, and the LS ports that leakage decides once they are cut off.

    Raises InputError where a drive or a port is missing, or where nobody says what an LS port does that is
    not connected.
    """
    rows = Rows()
    open_ports: list[str] = []
    for part_id, part in sorted(machine.parts.items()):
        if not isinstance(part, Pump):
            continue
        displaced_lpm = displaced_flow(machine, part_id, part)
        leakage = (1.0 - part.volumetric_efficiency) * displaced_lpm / part.rating_bar
        outlet, suction = book.needed(f"{part_id}.P"), book.needed(f"{part_id}.S")
        case = book.at(f"{part_id}.L")
        if case is None:
            case = suction  # leakage stays inside
        compensator = load_sensing = NONE
        width = signal_width = 1.0
        lowest_bar = LEAST_SETTING_BAR
        signal = _Signal(node=case, bleed=0.0, from_outlet=False, open_question=False)
        if isinstance(part, VariablePump):
            site = adjusters.add_compensator(part_id, part.compensator, controlled=outlet, reference=case)
            compensator, width = adjusters.index(site.id), site.width_bar
            lowest_bar = site.lowest_bar
            if part.load_sensing is not None:
                signal = _signal(part_id, part, book, outlet=outlet, case=case, sealed_ls=sealed_ls)
                site = adjusters.add_load_sensing(
                    part_id,
                    part.load_sensing,
                    controlled=outlet,
                    reference=signal.node,
                    full_flow_lpm=full_flow(machine, part_id, part),
                )
                load_sensing, signal_width = adjusters.index(site.id), site.width_bar
                lowest_bar = min(lowest_bar, site.lowest_bar)
        if signal.open_question:
            open_ports.append(f"{part_id}.X")
        closed_bend = min(STROKE_BEND * displaced_lpm, leakage * max(lowest_bar, LEAST_SETTING_BAR))
        rows.add(
            id=part_id,
            outlet=outlet,
            suction=suction,
            case=case,
            signal=signal.node,
            drive=drives.index(part.driven_by),
            displaced=displaced_lpm,
            leakage=leakage,
            full=full_flow(machine, part_id, part),
            overall=part.overall_efficiency,
            compensator=compensator,
            width=width,
            load_sensing=load_sensing,
            signal_width=signal_width,
            closed_bend=max(closed_bend, CLOSED_BEND_AT_LEAST * displaced_lpm),
            bleed=signal.bleed,
            from_outlet=signal.from_outlet,
        )
    pumps = Pumps(
        ids=rows.ids("id"),
        outlet=rows.index("outlet"),
        suction=rows.index("suction"),
        case=rows.index("case"),
        signal=rows.index("signal"),
        drive=rows.index("drive"),
        displaced_lpm=rows.floats("displaced"),
        leakage_per_bar=rows.floats("leakage"),
        full_flow_lpm=rows.floats("full"),
        overall_efficiency=rows.floats("overall"),
        compensator=rows.index("compensator"),
        compensator_width_bar=rows.floats("width"),
        load_sensing=rows.index("load_sensing"),
        load_sensing_width_bar=rows.floats("signal_width"),
        closed_bend_lpm=rows.floats("closed_bend"),
        signal_bleed=rows.floats("bleed"),
        bled_from_outlet=rows.truths("from_outlet"),
    )
    return pumps, tuple(open_ports)


def _signal(
    part_id: str, part: VariablePump, book: NodeBook, *, outlet: int, case: int, sealed_ls: SealedEnd
) -> _Signal:
    """What the LS port of a pump does, connected or not."""
    inside = part.load_sensing.port_not_connected if part.load_sensing else None
    node = book.at(f"{part_id}.X")
    at_outlet = inside == "fed" or (inside != "drained" and sealed_ls == "compensator end")
    open_question = inside not in ("fed", "drained")
    if node is not None:
        return _Signal(node=node, bleed=SIGNAL_BLEED, from_outlet=at_outlet, open_question=open_question)
    if inside is None:
        raise InputError(
            Problem(
                where=f"parts, {part_id}, load sensing, port not connected",
                what="Port X is in no net, and nothing says what it does then.",
                fix="Get it from the pump maker's drawing: drained, fed or sealed.",
            )
        )
    if open_question:
        node = book.closed_port(f"{part_id}.X", rating_bar=part.rating_bar)
        return _Signal(node=node, bleed=SIGNAL_BLEED, from_outlet=at_outlet, open_question=True)
    return _Signal(node=outlet if at_outlet else case, bleed=0.0, from_outlet=at_outlet, open_question=False)
