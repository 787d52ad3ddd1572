"""Curves that have no corner: every law of the circuit is made of these three.

Corners stop Newton's method. Each curve here is exact again at a small distance from its bend, and a closed
one is exactly zero: a tail, however thin, would drain a group that is cut off.
"""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

Floats = npt.NDArray[np.float64]
Ints = npt.NDArray[np.intp]
Bools = npt.NDArray[np.bool_]

ORIFICE_BEND_BAR = 0.05
"""Below this drop an orifice is nearly linear; its square root would be infinitely steep at zero."""


def ramp(*, x: Floats, width: Floats | float) -> tuple[Floats, Floats]:
    """Give the compact ramp and its slope: nothing below zero, then a parabola, then a straight line.

    Parameters
    ----------
    x : any unit
        Argument, for example bar above an opening pressure.
    width : same unit as ``x``
        Length of the parabola; more than zero.

    Returns
    -------
    value, slope : unit of ``x``, and 1
        0 up to 0; x²/(2·width) up to ``width``; x − width/2 beyond.

    Valid for any finite argument.
    Source: own derivation; the once continuously differentiable curve of least degree with these two ends.
    """
    inside = np.minimum(np.maximum(x, 0.0), width)
    return inside * inside / (2.0 * width) + np.maximum(x - width, 0.0), inside / width


def smaller(*, a: Floats, b: Floats, width: Floats | float) -> tuple[Floats, Floats, Floats]:
    """Give the smaller of two values with a rounded corner, and its slopes by each of them.

    Parameters
    ----------
    a, b : same unit
        The two values.
    width : same unit
        Difference over which the corner is rounded; exact where they differ by half of it or more.

    Returns
    -------
    value, slope by a, slope by b : unit of ``a``, 1, 1
        At most width/8 below the smaller one.

    Valid for any finite argument.
    Source: own derivation from the compact ramp, moved by half its width so that it is exact outside.
    """
    over, share = ramp(x=a - b + 0.5 * width, width=width)
    return a - over, 1.0 - share, share


def orifice_flow(*, drop_bar: Floats, conductance: Floats | float) -> tuple[Floats, Floats]:
    """Give the flow through a sharp edge, smooth through zero and odd in the drop, and its slope.

    Parameters
    ----------
    drop_bar : bar
        Pressure before the edge less pressure behind it.
    conductance : L/min/√bar
        K = rated flow / √rated drop; zero conducts exactly nothing.

    Returns
    -------
    flow, slope : L/min, L/min/bar
        K·Δp / (Δp² + d²)^¼ with d = 0.05 bar.

    Valid for turbulent flow; within 0.01 % of K·√Δp from 2.5 bar, too low below about 0.1 bar.
    Source: Bernoulli's equation with a constant discharge coefficient; the rounding near zero is ours.
    """
    square = drop_bar * drop_bar + ORIFICE_BEND_BAR * ORIFICE_BEND_BAR
    root = np.sqrt(np.sqrt(square))  # not a power: square roots round alike on every processor
    flow = conductance * drop_bar / root
    return flow, conductance * (0.5 * drop_bar * drop_bar + ORIFICE_BEND_BAR**2) / (square * root)


def conductance(*, rated_flow_lpm: float, rated_drop_bar: float) -> float:
    """Give the conductance of an edge from one point of its curve.

    Parameters
    ----------
    rated_flow_lpm : L/min
        Flow that the data sheet gives.
    rated_drop_bar : bar
        Drop at that flow; more than zero.

    Returns
    -------
    float : L/min/√bar
        K = Q/√Δp.

    Valid for turbulent flow at the viscosity of the data sheet.
    Source: Bernoulli's equation with a constant discharge coefficient.
    """
    return rated_flow_lpm / float(np.sqrt(rated_drop_bar))
