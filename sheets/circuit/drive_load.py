"""What the pumps ask of their drives."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from sheets.circuit.model import Circuit
from sheets.circuit.solution import Solution


@dataclass(frozen=True, kw_only=True)
class DriveLoad:
    """Load of one drive."""

    hydraulic_kw: float
    shaft_kw: float


def hydraulic_power(*, pressure_bar: float, flow_lpm: float) -> float:
    """Give the power of a flow that is raised by a pressure.

    Parameters
    ----------
    pressure_bar : bar
        Outlet less suction.
    flow_lpm : L/min
        Net flow at the outlet.

    Returns
    -------
    float : kW
        p·Q/600.

    Valid for oil that isn't compressed. Source: pressure times flow; 600 bar·L/min are 1 kW.
    """
    return pressure_bar * flow_lpm / 600.0


def drive_loads(circuit: Circuit, solution: Solution) -> Mapping[str, DriveLoad]:
    """Give the load of every drive in a solved state.

    Parameters
    ----------
    circuit : Circuit
        The circuit that was solved.
    solution : Solution
        One established state.

    Returns
    -------
    mapping : kW
        Hydraulic power, and shaft power as hydraulic power over the pump's overall efficiency; both zero for
        a drive that stands. A pump that is driven backward by its outlet counts as no load.

    Valid near full stroke, where the overall efficiency is stated. Near no stroke the true shaft power is
    higher by what leaks inside the pump. Source: definition of overall efficiency.
    """
    loads = {drive: [0.0, 0.0] for drive in circuit.drives}
    pumps = circuit.pumps
    for index, pump in enumerate(pumps.ids):
        rise_bar = solution.pressures_bar[pumps.outlet[index]] - solution.pressures_bar[pumps.suction[index]]
        power_kw = max(hydraulic_power(pressure_bar=rise_bar, flow_lpm=solution.flows_lpm[pump]), 0.0)
        load = loads[circuit.drives[pumps.drive[index]]]
        load[0] += power_kw
        load[1] += power_kw / float(pumps.overall_efficiency[index])
    return {drive: DriveLoad(hydraulic_kw=kw, shaft_kw=shaft_kw) for drive, (kw, shaft_kw) in loads.items()}
