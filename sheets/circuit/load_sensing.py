"""A load-sensing control whose maker gives its differential: the standby that follows, and back."""

from __future__ import annotations

from sheets.circuit.build_pumps import control_flow
from sheets.errors import InputError, Problem
from sheets.machine.model import Machine
from sheets.machine.parts import LoadSensingControl, VariablePump
from sheets.quantities import number


def standby_from_differential(
    *, differential_bar: float, flow_lpm: float, width_bar: float, full_flow_lpm: float
) -> float:
    """Give the standby reading of a load-sensing control from its differential at a flow.

    Parameters
    ----------
    differential_bar : bar
        Outlet less LS at the flow.
    flow_lpm : L/min
        Flow at which the maker states it; at most the full flow.
    width_bar : bar
        From full stroke to no net flow.
    full_flow_lpm : L/min
        V·n·η_v of the pump, without a displacement stop: a stop doesn't change the gain of a control.

    Returns
    -------
    float : bar
        differential + width·flow/full flow.

    Valid where the pump's own controls hold the flow below full stroke. Source: law of the load-sensing
    control, in which the flow falls linearly to none over its width.
    """
    return differential_bar + width_bar * flow_lpm / full_flow_lpm


def differential_at_flow(
    *, standby_bar: float, flow_lpm: float, width_bar: float, full_flow_lpm: float
) -> float:
    """Give outlet less LS at a flow, from the standby reading of a load-sensing control.

    Parameters
    ----------
    standby_bar : bar
        Reading with LS at tank and no flow.
    flow_lpm : L/min
        Net flow of the pump; at most the full flow.
    width_bar : bar
        From full stroke to no net flow.
    full_flow_lpm : L/min
        V·n·η_v of the pump, without a displacement stop.

    Returns
    -------
    float : bar
        standby − width·flow/full flow.

    Valid where the load-sensing control is the one that limits the stroke. Source: law of the load-sensing
    control.
    """
    return standby_bar - width_bar * flow_lpm / full_flow_lpm


def standby_of(machine: Machine, part_id: str, *, width_bar: float) -> float | None:
    """Standby in bar that the maker of a pump requires: its setting, or what follows from its differential.

    ``width_bar``: from full stroke to no net flow, from the plate or by policy. By policy the standby is no
    known value, so it isn't held against the adjuster's range: whoever asks must say so. None where the
    maker gives neither. Raises InputError where what is given can't be true of this pump, KeyError for no
    such part.
    """
    part = machine.parts[part_id]
    control = part.load_sensing if isinstance(part, VariablePump) else None
    if not isinstance(part, VariablePump) or control is None:
        return None
    differential_bar, flow_lpm = control.differential_bar, control.differential_flow_lpm
    if differential_bar is None or flow_lpm is None:
        return control.setting_bar
    full_flow_lpm = control_flow(machine, part_id, part)
    where = f"parts, {part_id}, load sensing"
    if flow_lpm > full_flow_lpm:
        raise InputError(
            Problem(
                where=f"{where}, differential flow",
                what=f"The pump gives {number(full_flow_lpm, decimals=1)} L/min at the most.",
                fix="Write the flow at which the maker states the differential, at this drive's speed.",
            )
        )
    if control.setting_bar is not None:
        return control.setting_bar
    standby_bar = standby_from_differential(
        differential_bar=differential_bar,
        flow_lpm=flow_lpm,
        width_bar=width_bar,
        full_flow_lpm=full_flow_lpm,
    )
    if control.width_bar is not None:
        _within_reach(control, standby_bar, where=f"{where}, differential")
    return standby_bar


def _within_reach(control: LoadSensingControl, standby_bar: float, *, where: str) -> None:
    if control.lowest_bar <= standby_bar <= control.highest_bar:
        return
    reach = f"{number(control.lowest_bar, decimals=1)} to {number(control.highest_bar, decimals=1)} bar"
    raise InputError(
        Problem(
            where=where,
            what=f"Its standby is {number(standby_bar, decimals=1)} bar; the adjuster reaches from {reach}.",
            fix="Correct differential, differential flow and width, or lowest and highest.",
        )
    )
