"""What the ports of parts may see: the part's rating, and what the structure around an actuator stands."""

from __future__ import annotations

import math

from sheets.machine.parts import Cylinder, HydraulicMotor, RatedPart

BAR_LPM_OF_KW = 600.0
"""Pressure times flow over power."""


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


def pressure_of_force(*, force_kn: float, swept: float) -> float:
    """Give the pressure that exerts a force.

    Parameters
    ----------
    force_kn : kN
        At the piston, friction not counted.
    swept : L/min per m/s
        From ``swept_by_area``.

    Returns
    -------
    float : bar
        600·F/swept, which is 100·F/A with A in cm².

    Valid with no pressure on the other side. Source: pressure times area; force times speed is pressure
    times flow.
    """
    return BAR_LPM_OF_KW * force_kn / swept


def pressure_of_torque(*, torque_nm: float, displacement_cm3: float) -> float:
    """Give the pressure difference that exerts a torque.

    Parameters
    ----------
    torque_nm : N·m
        Hydraulic torque, mechanical losses not counted.
    displacement_cm3 : cm³/rev
        Displacement.

    Returns
    -------
    float : bar
        20π·T/V.

    Valid for any displacement. Source: torque times angle is pressure times volume, over one revolution.
    """
    return 20.0 * math.pi * torque_nm / displacement_cm3


def port_rating_bar(part: RatedPart, port: str) -> float | None:
    """Highest pressure that a port of a part may see, in bar; None where nobody rates it.

    At a port of an actuator that is the lower of the part's rating and the pressure that alone exerts the
    highest force or torque which the structure stands, losses not counted. A port for tank, suction or case
    is rated only where the maker rates it.
    """
    if port in part.LOW_PRESSURE_PORTS:
        return part.tank_rating_bar
    if isinstance(part, Cylinder) and part.structure_force_limit_kn is not None:
        swept = swept_by_area(bore_mm=part.bore_mm, rod_mm=part.rod_mm if port == "B" else 0.0)
        return min(part.rating_bar, pressure_of_force(force_kn=part.structure_force_limit_kn, swept=swept))
    if isinstance(part, HydraulicMotor) and part.structure_torque_limit_nm is not None:
        limit_bar = pressure_of_torque(
            torque_nm=part.structure_torque_limit_nm, displacement_cm3=part.displacement_cm3
        )
        return min(part.rating_bar, limit_bar)
    return part.rating_bar
