"""Voids: where oil would fall below what it can bear, a source of nothing fills the gap."""

from __future__ import annotations

from sheets.circuit.smooth import Floats, ramp

VOID_BAR = -0.95
VOID_BEND_BAR = 0.05
VOID_GAIN = 20_000.0


def void_flow(*, pressures_bar: Floats, widening: float = 1.0) -> tuple[Floats, Floats]:
    """Give the flow that stands for a void growing at each node, and its slope.

    Parameters
    ----------
    pressures_bar : bar
        Gauge pressures of the nodes.
    widening : 1
        Factor on the bend, for the continuation.

    Returns
    -------
    flow, slope : L/min, L/min/bar
        20000·ramp(−0.95 − p); more than zero means that a void forms there.

    Valid for telling that a void forms and where; not for how fast it grows. Keeps p above −1 bar up to
    500 L/min.
    Source: oil boils off near absolute zero pressure; the gain and the bend are ours.
    """
    lift_bar, share = ramp(x=VOID_BAR - pressures_bar, width=VOID_BEND_BAR * widening)
    return VOID_GAIN * lift_bar, -VOID_GAIN * share
