"""Pumps and what drives them."""

from __future__ import annotations

from collections.abc import Iterator
from typing import ClassVar, Literal

from sheets.machine.adjusters import Adjuster, CompensatorControl, LoadSensingControl
from sheets.machine.fields import Cm3, Factor, Identifier, Kilowatt, Ratio, Rpm, Second
from sheets.machine.flaws import Flaw
from sheets.machine.part_base import PartBase, RatedPart


class ElectricMotor(PartBase):
    """Drive of one or more pumps."""

    kind: Literal["electric motor"]
    power_kw: Kilowatt
    """Rated power, from its plate."""
    speed_rpm: Rpm
    """Rated speed, from its plate."""
    service_factor: Factor = 1.0
    """Continuous overload that the plate allows; 1 where the plate gives none."""
    coasts_for_s: Second = 10.0
    """Time until it stands still after a stop."""


class Pump(RatedPart):
    """What fixed and variable pumps share."""

    LOW_PRESSURE_PORTS: ClassVar[frozenset[str]] = frozenset({"S", "L"})
    driven_by: Identifier
    """Electric motor on its shaft."""
    displacement_cm3: Cm3
    """Geometric displacement a revolution."""
    volumetric_efficiency: Ratio
    """At the pressure of its rating; leakage is linear in pressure."""
    overall_efficiency: Ratio
    """Hydraulic power over shaft power, at its rating."""

    def contradictions(self) -> Iterator[Flaw]:
        yield from super().contradictions()
        if self.overall_efficiency > self.volumetric_efficiency:
            yield Flaw(
                at=("overall efficiency",),
                what="The overall efficiency is above the volumetric one, which is a part of it.",
                fix="Look both up in the data sheet: overall = volumetric × mechanical.",
            )


class FixedPump(Pump):
    """Fixed pump."""

    kind: Literal["fixed pump"]
    PORTS: ClassVar[tuple[str, ...]] = ("S", "P")


class VariablePump(Pump):
    """Variable pump with a compensator, and with a load-sensing control where it has one."""

    kind: Literal["variable pump"]
    compensator: CompensatorControl
    """Its pressure compensator."""
    load_sensing: LoadSensingControl | None = None
    """Its load-sensing control, if it has one; port X is its LS port."""

    @property
    def ports(self) -> tuple[str, ...]:
        """All ports of this pump; X is there if it has a load-sensing control."""
        return ("S", "P", "L", "X") if self.load_sensing else ("S", "P", "L")

    def adjusters(self) -> dict[str, Adjuster]:
        """The compensator, and the load-sensing control where there is one."""
        found: dict[str, Adjuster] = {"compensator": self.compensator}
        if self.load_sensing:
            found["load sensing"] = self.load_sensing
        return found
