"""Cylinders and hydraulic motors of a machine."""

from __future__ import annotations

import numpy as np

from sheets.circuit.actuators import Actuators
from sheets.circuit.model import TANK
from sheets.circuit.nodes import NodeBook
from sheets.circuit.ratings import BAR_LPM_OF_KW, pressure_of_torque, swept_by_area
from sheets.circuit.rows import Rows
from sheets.machine.model import Machine
from sheets.machine.parts import Cylinder, HydraulicMotor

BREAKAWAY_BAR = 0.5
"""Policy: an actuator that nothing pushes by itself takes this much over its larger side before it moves.
From memory: seals of cylinders break away at some bar, so this is little."""


def build_actuators(machine: Machine, book: NodeBook, *, reference_flow_lpm: float) -> Actuators:
    """All actuators; a port that is in no net is a dead end that keeps its oil.

    Where the plate of a motor gives no leakage, policy stands in: no plate gives the flow at which its
    volumetric efficiency holds, so that is taken as the full flow of the pumps, at the motor's rating.
    """
    rows = Rows()
    for part_id, part in sorted(machine.parts.items()):
        if isinstance(part, Cylinder):
            _add_cylinder(rows, part_id, part, book)
        elif isinstance(part, HydraulicMotor):
            _add_motor(rows, part_id, part, book, reference_flow_lpm=reference_flow_lpm)
    return Actuators(
        ids=rows.ids("id"),
        node_a=rows.index("node_a"),
        node_b=rows.index("node_b"),
        case=rows.index("case"),
        swept_a=rows.floats("swept_a"),
        swept_b=rows.floats("swept_b"),
        load_forward_bar=rows.floats("forward"),
        load_backward_bar=rows.floats("backward"),
        friction_bar=rows.floats("friction"),
        # What a weight pulls at is taken to move at once.
        breakaway_bar=np.where(rows.floats("drives") == 0.0, BREAKAWAY_BAR, 0.0),
        drives_bar=rows.floats("drives"),
        case_leakage=rows.floats("case_leakage"),
        cross_leakage=rows.floats("cross_leakage"),
        has_stops=rows.truths("has_stops"),
    )


def _add_cylinder(rows: Rows, part_id: str, part: Cylinder, book: NodeBook) -> None:
    swept_a = swept_by_area(bore_mm=part.bore_mm)
    # Force in kN times speed in m/s is power in kW; pressure times flow is 600 times that in bar·L/min.
    bar_of_kn = BAR_LPM_OF_KW / swept_a
    sign = 1.0 if part.weight_drives == "extending" else -1.0
    rows.add(
        id=part_id,
        node_a=book.closed_port(part_id, part, "A"),
        node_b=book.closed_port(part_id, part, "B"),
        case=TANK,
        swept_a=swept_a,
        swept_b=swept_by_area(bore_mm=part.bore_mm, rod_mm=part.rod_mm),
        forward=part.extending_load_kn / part.force_efficiency * bar_of_kn,
        backward=part.retracting_load_kn / part.force_efficiency * bar_of_kn,
        friction=(1.0 / part.force_efficiency - 1.0) * part.weight_kn * bar_of_kn,
        drives=sign * part.weight_kn * bar_of_kn,
        case_leakage=0.0,
        cross_leakage=0.0,
        has_stops=True,
    )


def _add_motor(
    rows: Rows, part_id: str, part: HydraulicMotor, book: NodeBook, *, reference_flow_lpm: float
) -> None:
    swept = part.displacement_cm3 / 1000.0
    bar_of_nm = pressure_of_torque(torque_nm=1.0, displacement_cm3=part.displacement_cm3)
    load_bar = part.load_torque_nm / part.mechanical_efficiency * bar_of_nm
    sign = 1.0 if part.driving_torque_turns == "forward" else -1.0
    at_rating_lpm = part.leakage_at_rating_lpm
    if at_rating_lpm is None:
        at_rating_lpm = (1.0 - part.volumetric_efficiency) * reference_flow_lpm
    leakage = at_rating_lpm / part.rating_bar
    case = book.at(f"{part_id}.L") if part.has_case_drain else None
    rows.add(
        id=part_id,
        node_a=book.closed_port(part_id, part, "A"),
        node_b=book.closed_port(part_id, part, "B"),
        case=TANK if case is None else case,
        swept_a=swept,
        swept_b=swept,
        forward=load_bar,
        backward=load_bar,
        friction=(1.0 / part.mechanical_efficiency - 1.0) * part.driving_torque_nm * bar_of_nm,
        drives=sign * part.driving_torque_nm * bar_of_nm,
        case_leakage=0.0 if case is None else leakage,
        cross_leakage=leakage if case is None else 0.0,
        has_stops=False,
    )
