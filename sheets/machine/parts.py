"""Kinds of part that a machine file may name, with their plate values.

The key in the file is the field's name without its unit and with spaces: ``rated_flow_lpm`` is written
``rated flow: 80 L/min``. Docstrings of fields become the descriptions in the JSON Schema.

All kinds are to be imported from here; they are written in the modules beside this one.
"""

from __future__ import annotations

from typing import Annotated, ClassVar, Literal

from pydantic import Field

from sheets.machine.actuators import Cylinder, HydraulicMotor
from sheets.machine.adjusters import Adjuster, CompensatorControl, LoadSensingControl, Turning
from sheets.machine.directional_valve import DirectionalValve, Signal
from sheets.machine.fields import Litre, Text
from sheets.machine.fluid import Fluid
from sheets.machine.gauges import AnyGauge, DialGauge, DigitalGauge, Gauge
from sheets.machine.part_base import FlowPath, PartBase, RatedPart
from sheets.machine.pumps import ElectricMotor, FixedPump, Pump, VariablePump
from sheets.machine.valves import CheckValve, HandValve, ReliefValve

__all__ = [
    "Adjuster",
    "AnyGauge",
    "CheckValve",
    "CompensatorControl",
    "Cylinder",
    "DialGauge",
    "DigitalGauge",
    "DirectionalValve",
    "ElectricMotor",
    "Filter",
    "FixedPump",
    "FlowControl",
    "FlowPath",
    "Fluid",
    "Gauge",
    "HandValve",
    "HydraulicMotor",
    "Line",
    "LoadSensingControl",
    "Orifice",
    "Part",
    "PartBase",
    "Pump",
    "RatedPart",
    "ReliefValve",
    "Reservoir",
    "Signal",
    "TestPoint",
    "Turning",
    "VariablePump",
]


class Reservoir(PartBase):
    """Tank. Its ports all stand at tank pressure."""

    kind: Literal["reservoir"]
    PORTS: ClassVar[tuple[str, ...]] = ("S", "T", "L")
    volume_l: Litre
    """Oil that it holds at the usual level."""


class FlowControl(FlowPath):
    """Adjustable throttle, at the opening in which it is left."""

    kind: Literal["flow control"]


class Orifice(FlowPath):
    """Fixed throttle."""

    kind: Literal["orifice"]


class Filter(FlowPath):
    """Filter with a clean element; the bypass isn't modelled."""

    kind: Literal["filter"]


class TestPoint(RatedPart):
    """Coupling at which a gauge can be fitted."""

    __test__: ClassVar[bool] = False  # the name begins as those that pytest collects
    kind: Literal["test point"]
    PORTS: ClassVar[tuple[str, ...]] = ("P",)


class Line(RatedPart):
    """Hose or pipe, by its rating."""

    kind: Literal["hose", "pipe"]
    PORTS: ClassVar[tuple[str, ...]] = ("A", "B")
    rated_after: Text = ""
    """Where the rating comes from: marking, standard, data sheet."""


Part = Annotated[
    Reservoir
    | ElectricMotor
    | FixedPump
    | VariablePump
    | ReliefValve
    | CheckValve
    | HandValve
    | FlowControl
    | Orifice
    | Filter
    | DirectionalValve
    | Cylinder
    | HydraulicMotor
    | TestPoint
    | Line,
    Field(discriminator="kind"),
]
