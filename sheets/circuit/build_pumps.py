"""Pumps of a machine."""

from __future__ import annotations

import math
from dataclasses import dataclass

from sheets.circuit.build_adjusters import AdjusterBook
from sheets.circuit.model import SealedEnd
from sheets.circuit.nodes import NodeBook
from sheets.circuit.pumps import CLOSED_BEND_AT_LEAST, STROKE_BEND, Pumps
from sheets.circuit.ratings import pressure_of_torque
from sheets.circuit.rows import Rows
from sheets.circuit.stamp import NONE
from sheets.errors import InputError, Problem
from sheets.machine.model import Machine
from sheets.machine.parts import ElectricMotor, Pump, VariablePump

SIGNAL_BLEED = 1e-3
"""L/min/√bar that seeps inside a pump into its LS node: decides a port that is cut off, moves no other."""
LEAST_SETTING_BAR = 1.0


def full_flow(machine: Machine, part_id: str, pump: Pump) -> float:
    """Greatest flow of a pump at the pressure of its rating, in L/min: with its stroke at its stop.

    A torque limit isn't counted, since it fails as controls do: this is what a relief must pass.
    Raises InputError where nothing of that name drives it.
    """
    lost_to_stop_lpm = displaced_flow(machine, part_id, pump) - stopped_flow(machine, part_id, pump)
    return control_flow(machine, part_id, pump) - lost_to_stop_lpm


def control_flow(machine: Machine, part_id: str, pump: Pump) -> float:
    """Flow of a pump at whole stroke and at the pressure of its rating, V·n·η_v, in L/min.

    The width of a control is the rise over this flow: a stop ends the stroke, and leaves the gain as it was.
    Raises InputError where nothing of that name drives it.
    """
    return displaced_flow(machine, part_id, pump) * pump.volumetric_efficiency


def stopped_flow(machine: Machine, part_id: str, pump: Pump) -> float:
    """Theoretical flow of a pump with its stroke at its stop, in L/min; V·n where it has none.

    Raises InputError where nothing of that name drives it.
    """
    stop_cm3 = pump.displacement_stop_cm3 if isinstance(pump, VariablePump) else None
    speed_rpm = _drive(machine, part_id, pump).speed_rpm
    return (pump.displacement_cm3 if stop_cm3 is None else stop_cm3) * speed_rpm / 1000.0


def displaced_flow(machine: Machine, part_id: str, pump: Pump) -> float:
    """Theoretical flow of a pump at whole stroke, V·n, in L/min.

    Raises InputError where nothing of that name drives it.
    """
    return pump.displacement_cm3 * _drive(machine, part_id, pump).speed_rpm / 1000.0


def torque_power(*, torque_nm: float, speed_rpm: float) -> float:
    """Give pressure times displaced flow at a hydraulic torque.

    Parameters
    ----------
    torque_nm : N·m
        p·V(s)/20π with p in bar and V(s) in cm³: mechanical losses are not counted.
    speed_rpm : rev/min
        Of the shaft.

    Returns
    -------
    float : bar·L/min
        20π·T·n/1000; 600 of them are 1 kW.

    Valid for any stroke. Source: torque times angle is pressure times volume, over one revolution.
    """
    return pressure_of_torque(torque_nm=torque_nm, displacement_cm3=1000.0) * speed_rpm


def _drive(machine: Machine, part_id: str, pump: Pump) -> ElectricMotor:
    drive = machine.parts.get(pump.driven_by)
    if not isinstance(drive, ElectricMotor):
        raise InputError(
            Problem(
                where=f"parts, {part_id}, driven by",
                what=f"{pump.driven_by} is no drive of this machine.",
                fix="Name the electric motor that turns the pump.",
            )
        )
    return drive


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
        torque_power_bar_lpm = math.inf
        lowest_bar = LEAST_SETTING_BAR
        signal = _Signal(node=case, bleed=0.0, from_outlet=False, open_question=False)
        if isinstance(part, VariablePump):
            site = adjusters.add_compensator(part_id, part.compensator, controlled=outlet, reference=case)
            compensator, width = adjusters.index(site.id), site.width_bar
            if part.torque_limit_nm is not None:
                speed_rpm = _drive(machine, part_id, part).speed_rpm
                torque_power_bar_lpm = torque_power(torque_nm=part.torque_limit_nm, speed_rpm=speed_rpm)
            lowest_bar = site.lowest_bar
            if part.load_sensing is not None:
                signal = _signal(part_id, part, book, outlet=outlet, case=case, sealed_ls=sealed_ls)
                site = adjusters.add_load_sensing(
                    part_id,
                    part.load_sensing,
                    controlled=outlet,
                    reference=signal.node,
                    signal_node=book.at(f"{part_id}.X"),
                    full_flow_lpm=control_flow(machine, part_id, part),
                )
                load_sensing, signal_width = adjusters.index(site.id), site.width_bar
                lowest_bar = min(lowest_bar, site.lowest_bar)
        if signal.open_question:
            open_ports.append(f"{part_id}.X")
        stopped_lpm = stopped_flow(machine, part_id, part)
        closed_bend = min(STROKE_BEND * stopped_lpm, leakage * max(lowest_bar, LEAST_SETTING_BAR))
        rows.add(
            id=part_id,
            outlet=outlet,
            suction=suction,
            case=case,
            signal=signal.node,
            drive=drives.index(part.driven_by),
            displaced=displaced_lpm,
            stopped=stopped_lpm,
            torque=torque_power_bar_lpm,
            leakage=leakage,
            full=control_flow(machine, part_id, part),
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
        stopped_lpm=rows.floats("stopped"),
        torque_power_bar_lpm=rows.floats("torque"),
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
        node = book.closed_port(part_id, part, "X")
        return _Signal(node=node, bleed=SIGNAL_BLEED, from_outlet=at_outlet, open_question=True)
    return _Signal(node=outlet if at_outlet else case, bleed=0.0, from_outlet=at_outlet, open_question=False)
