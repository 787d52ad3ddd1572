"""The machine file as one frozen value."""

from __future__ import annotations

from typing import Annotated, Literal

from pydantic import Field

from sheets.machine.fields import Entry, FormatNumber, Identifier, IsoDate, PortRef, Text, Volt, YesNo
from sheets.machine.parts import AnyGauge, Fluid, Part


class Isolator(Entry):
    """A device that physically prevents the transmission of energy, and takes a lock."""

    plate: Text
    """The words on its plate; printed as they stand, never translated."""
    kind: Literal["main switch", "circuit breaker", "plug", "hand valve", "blank"]
    where: Text
    action: Text
    """What to do with it: turn to OFF."""
    lock: Text
    """Where the lock goes."""


class Supply(Entry):
    """An electrical supply: power to motors, or control voltage to solenoids and controllers."""

    kind: Literal["electrical supply", "control supply"]
    voltage_v: Volt
    feeds: tuple[Identifier, ...]
    isolator: Isolator
    verify: Text
    """How to verify that it is dead, and by whom."""


class Control(Entry):
    """A start or stop place. Never an isolating device."""

    name: Text
    where: Text


class Controls(Entry):
    start: tuple[Control, ...]
    stop: tuple[Control, ...]
    emergency_stop: tuple[Control, ...]


class Units(Entry):
    """Units on the pages: the first is worked in, the second stands beside it."""

    pressure: tuple[Literal["bar", "psi", "MPa"], ...] = ("bar",)
    flow: tuple[Literal["L/min", "gal/min"], ...] = ("L/min",)


class Machine(Entry):
    """One power unit, its circuit and its energy sources."""

    format: FormatNumber
    tag: Identifier
    name: Text
    plant: Text
    area: Text
    document: Identifier
    """Number of the document that is printed."""
    dated: IsoDate
    """Date of this data."""
    language: Literal["en"] = "en"
    units: Units = Units()
    fluid: Fluid
    parts: Annotated[dict[Identifier, Part], Field(min_length=1)]
    gauges: dict[Identifier, AnyGauge]
    nets: dict[Text, tuple[PortRef, ...]]
    """Which ports are joined, by the name of the line."""
    energy: dict[Identifier, Supply]
    controls: Controls
    absent: tuple[Text, ...]
    """Sources that somebody looked for and didn't find; printed as such. May be empty, but not left out."""
    load_is_held_up: YesNo = False
