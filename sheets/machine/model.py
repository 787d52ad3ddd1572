"""The machine file as one frozen value."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Annotated, Literal

from pydantic import Field

from sheets.machine.fields import (
    Entry,
    FormatNumber,
    Identifier,
    IsoDate,
    PortRef,
    SaidText,
    Text,
    Volt,
    YesNo,
)
from sheets.machine.flaws import Flaw
from sheets.machine.isolating import ELECTRICAL, IsolatorKind
from sheets.machine.parts import AnyGauge, Fluid, Part


class Isolator(Entry):
    """A device that physically prevents the transmission of energy, and takes a lock."""

    plate: SaidText
    """The words on its plate; printed as they stand, never translated."""
    kind: IsolatorKind
    """What it is. A device of the control circuit is refused."""
    where: SaidText
    """Where it is to be found."""
    action: SaidText
    """What to do with it: turn to OFF."""
    lock: SaidText
    """Where the lock goes."""
    shared: YesNo = False
    """Yes where this one device cuts another supply too; each of them says so, in the same words."""
    inside_panel: YesNo = False
    """Yes where it is behind a door that only a qualified person opens."""


class Supply(Entry):
    """An electrical supply: power to motors, or control voltage to solenoids and controllers."""

    kind: Literal["electrical supply", "control supply"]
    """Electrical supply for motors, control supply for solenoids."""
    voltage_v: Volt
    """Rated voltage."""
    feeds: tuple[Identifier, ...]
    """Parts that it feeds."""
    isolator: Isolator
    """What isolates it."""
    verify: SaidText
    """How to verify that it is dead, and by whom."""

    def contradictions(self) -> Iterator[Flaw]:
        yield from super().contradictions()
        if self.isolator.kind not in ELECTRICAL:
            yield Flaw(
                at=("isolator", "kind"),
                what=f"A {self.isolator.kind} doesn't isolate an electrical supply.",
                fix=f"Name the device that separates it: {', '.join(ELECTRICAL)}.",
            )


class Control(Entry):
    """A start or stop place. Never an isolating device."""

    name: Text
    """The words beside it."""
    where: Text
    """Where it is to be found."""


class Controls(Entry):
    """Where the machine is started and stopped."""

    start: Annotated[tuple[Control, ...], Field(min_length=1)]
    """Places from which it can be started."""
    stop: Annotated[tuple[Control, ...], Field(min_length=1)]
    """Places from which it is stopped in normal service."""
    emergency_stop: tuple[Control, ...]
    """Emergency stops."""


class Units(Entry):
    """Units on the pages: the first is worked in, the second stands beside it."""

    pressure: tuple[Literal["bar", "psi", "MPa"], ...] = ("bar",)
    """One or two units of pressure."""
    flow: tuple[Literal["L/min", "gal/min"], ...] = ("L/min",)
    """One or two units of flow; the gallon is the US gallon."""
    temperature: tuple[Literal["°C", "°F"], ...] = ("°C",)
    """Units of the oil's temperature; °C is the first, since readings are recorded in it."""

    def contradictions(self) -> Iterator[Flaw]:
        yield from super().contradictions()
        if self.temperature[:1] == ("°F",):
            yield Flaw(
                at=("temperature",),
                what="°F can't be the first unit: oil temperatures are recorded in °C.",
                fix="Write temperature: [°C, °F]; both are then printed where the oil is read.",
            )
        for key, units in (
            ("pressure", self.pressure),
            ("flow", self.flow),
            ("temperature", self.temperature),
        ):
            if not 1 <= len(units) <= 2 or len(set(units)) < len(units):
                yield Flaw(
                    at=(key,),
                    what="One unit, or two different ones, can stand here.",
                    fix="Write the unit that is worked in first, such as [bar, psi], [L/min] or [°C, °F].",
                )


class Machine(Entry):
    """One power unit, its circuit and its energy sources."""

    format: FormatNumber
    """Number of the file format; 1."""
    tag: Identifier
    """The machine's own tag."""
    name: Text
    """What people call the machine."""
    plant: Text
    """Works in which it stands."""
    area: Text
    """Where in the works it stands."""
    document: Identifier
    """Number of the document that is printed."""
    dated: IsoDate
    """Date of this data."""
    language: Literal["en"] = "en"
    """Language of the pages."""
    units: Units = Units()
    """Units on the pages."""
    fluid: Fluid
    """The fluid and its temperatures."""
    parts: Annotated[dict[Identifier, Part], Field(min_length=1)]
    """Parts by their identifier."""
    gauges: dict[Identifier, AnyGauge]
    """Gauges by their identifier. May be empty, but not left out."""
    nets: Annotated[dict[Text, tuple[PortRef, ...]], Field(min_length=1)]
    """Which ports are joined, by the name of the line."""
    energy: Annotated[dict[Identifier, Supply], Field(min_length=1)]
    """Energy sources beside the hydraulic ones, by their identifier."""
    controls: Controls
    """Start and stop places; none of them isolates anything."""
    absent: tuple[Text, ...]
    """Sources that somebody looked for and didn't find; printed as such. May be empty, but not left out."""
    load_is_held_up: YesNo = False
    """Yes if a load could fall or turn by itself when the pressure goes."""

    @property
    def isolated(self) -> tuple[str, ...]:
        """A supply for each isolating device: the first of those that share it."""
        isolators = [supply.isolator for supply in self.energy.values()]
        return tuple(id for place, id in enumerate(self.energy) if isolators[place] not in isolators[:place])

    def fed_through(self, isolator: Isolator) -> tuple[str, ...]:
        """Parts that an isolating device cuts off, over all supplies that share it."""
        return tuple(
            part for supply in self.energy.values() if supply.isolator == isolator for part in supply.feeds
        )
