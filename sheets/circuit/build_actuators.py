"""Cylinders and hydraulic motors of a machine."""

from __future__ import annotations

import math

from sheets.circuit.actuators import Actuators
from sheets.circuit.model import TANK
from sheets.circuit.nodes import NodeBook
from sheets.circuit.rows import Rows
from sheets.machine.model import Machine
from sheets.machine.parts import Cylinder, HydraulicMotor

KW_OF_BAR_LPM = 1.0 / 600.0


def build_actuators(machine: Machine, book: NodeBook, *, reference_flow_lpm: float) -> Actuators:
    """All actuators; a port that is in no net is a dead end that keeps its oil.

    No plate gives the flow at which a motor's volumetric efficiency holds: it is taken at the full flow of
    the pumps and at the motor's rating, so that what leaks there is (1 − η_v) of that flow.
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
        resists_forward_bar=rows.floats("forward"),
        resists_backward_bar=rows.floats("backward"),
        drives_bar=rows.floats("drives"),
        case_leakage=rows.floats("case_leakage"),
        cross_leakage=rows.floats("cross_leakage"),
        has_stops=rows.truths("has_stops"),
    )


def swept_by_area(*, bore_mm: float, rod_mm: float = 0.0) -> float:
    """Give the flow that a piston side takes for each m/s.

    Parameters
    ----------
    bore_mm, rod_mm : mm
        Diameters; no rod at the cap end.

    Returns
    -------
    float : L/min per m/s
        Area × speed: 6 for each cm².

    Valid for any pair with rod below bore. Source: geometry.
    """
    return 6.0 * math.pi * (bore_mm * bore_mm - rod_mm * rod_mm) / 400.0


def _add_cylinder(rows: Rows, part_id: str, part: Cylinder, book: NodeBook) -> None:
    swept_a = swept_by_area(bore_mm=part.bore_mm)
    # Force in kN times speed in m/s is power in kW; pressure times flow is 600 times that in bar·L/min.
    bar_of_kn = 1.0 / KW_OF_BAR_LPM / swept_a
    friction_kn = (1.0 / part.force_efficiency - 1.0) * part.weight_kn
    sign = 1.0 if part.weight_drives == "extending" else -1.0
    rows.add(
        id=part_id,
        node_a=book.closed_port(f"{part_id}.A", rating_bar=part.rating_bar),
        node_b=book.closed_port(f"{part_id}.B", rating_bar=part.rating_bar),
        case=TANK,
        swept_a=swept_a,
        swept_b=swept_by_area(bore_mm=part.bore_mm, rod_mm=part.rod_mm),
        forward=(part.extending_load_kn / part.force_efficiency + friction_kn) * bar_of_kn,
        backward=(part.retracting_load_kn / part.force_efficiency + friction_kn) * bar_of_kn,
        drives=sign * part.weight_kn * bar_of_kn,
        case_leakage=0.0,
        cross_leakage=0.0,
        has_stops=True,
    )


def _add_motor(
    rows: Rows, part_id: str, part: HydraulicMotor, book: NodeBook, *, reference_flow_lpm: float
) -> None:
    swept = part.displacement_cm3 / 1000.0
    bar_of_nm = 20.0 * math.pi / part.displacement_cm3
    friction_nm = (1.0 / part.mechanical_efficiency - 1.0) * part.driving_torque_nm
    resists = (part.load_torque_nm / part.mechanical_efficiency + friction_nm) * bar_of_nm
    sign = 1.0 if part.driving_torque_turns == "forward" else -1.0
    leakage = (1.0 - part.volumetric_efficiency) * reference_flow_lpm / part.rating_bar
    case = book.at(f"{part_id}.L") if part.has_case_drain else None
    rows.add(
        id=part_id,
        node_a=book.closed_port(f"{part_id}.A", rating_bar=part.rating_bar),
        node_b=book.closed_port(f"{part_id}.B", rating_bar=part.rating_bar),
        case=TANK if case is None else case,
        swept_a=swept,
        swept_b=swept,
        forward=resists,
        backward=resists,
        drives=sign * part.driving_torque_nm * bar_of_nm,
        case_leakage=0.0 if case is None else leakage,
        cross_leakage=leakage if case is None else 0.0,
        has_stops=False,
    )
