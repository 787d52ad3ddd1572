"""Pumps and what drives them."""

from __future__ import annotations

import math
from collections.abc import Iterator
from typing import ClassVar, Literal

from sheets.machine.adjusters import Adjuster, CompensatorControl, LoadSensingControl
from sheets.machine.fields import Cm3, Factor, Identifier, Kilowatt, PositiveNewtonMetre, Ratio, Rpm, Second
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


_LEAST_STROKE = 0.05
"""Share of full stroke that a torque limit must leave at the rating, over what leaks: below it the control
would hand over to the limit, and a deadhead reading would no longer be its setting."""


class FixedPump(Pump):
    """Fixed pump."""

    kind: Literal["fixed pump"]
    PORTS: ClassVar[tuple[str, ...]] = ("S", "P")


class VariablePump(Pump):
    """Variable pump with a compensator, and with a load-sensing control where it has one."""

    kind: Literal["variable pump"]
    NEVER_PLUGGED: ClassVar[frozenset[str]] = frozenset({"L"})
    compensator: CompensatorControl
    """Its pressure compensator."""
    load_sensing: LoadSensingControl | None = None
    """Its load-sensing control, if it has one; port X is its LS port."""
    displacement_stop_cm3: Cm3 | None = None
    """Displacement at which a stop ends its stroke; its whole displacement, if left out."""
    torque_limit_nm: PositiveNewtonMetre | None = None
    """Hydraulic torque at which its torque limiter takes stroke away: pressure times displacement over 20π,
    mechanical losses not counted. None, if left out."""

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

    def contradictions(self) -> Iterator[Flaw]:
        yield from super().contradictions()
        leaks_cm3 = (1.0 - self.volumetric_efficiency) * self.displacement_cm3
        stop_cm3 = self.displacement_stop_cm3
        if stop_cm3 is not None and stop_cm3 > self.displacement_cm3:
            yield Flaw(
                at=("displacement stop",),
                what="The stop would allow more than the whole displacement of the pump.",
                fix="Correct displacement or displacement stop; leave the stop out where none is set.",
            )
        elif stop_cm3 is not None and stop_cm3 <= leaks_cm3:
            yield Flaw(
                at=("displacement stop",),
                what="The stop leaves the pump no more stroke than it leaks at its rating.",
                fix="Look up displacement stop and volumetric efficiency in the data sheet.",
            )
        if self.torque_limit_nm is not None:
            at_rating_cm3 = 20.0 * math.pi * self.torque_limit_nm / self.rating_bar
            if at_rating_cm3 < leaks_cm3 + _LEAST_STROKE * self.displacement_cm3:
                yield Flaw(
                    at=("torque limit",),
                    what="At its rating, the torque limit leaves the pump hardly more stroke than it leaks.",
                    fix="Look the limit up on the plate: it is pressure × displacement / 20π, in N m.",
                )
