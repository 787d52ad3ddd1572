"""Cylinders and hydraulic motors."""

from __future__ import annotations

from collections.abc import Iterator
from typing import ClassVar, Literal

from sheets.machine.fields import (
    Cm3,
    Entry,
    Kilonewton,
    Lpm,
    Millimetre,
    NewtonMetre,
    PositiveKilonewton,
    PositiveNewtonMetre,
    Ratio,
    SaidText,
    Text,
    YesNo,
)
from sheets.machine.flaws import Flaw
from sheets.machine.part_base import RatedPart


class StopRun(Entry):
    """Leave to run a cylinder to one of its stops, and to hold it there, while an adjuster is set."""

    stop: Literal["extended", "retracted"]
    """At which of its stops it may be held."""
    given_by: SaidText
    """Who says that this stop takes the full force: the maker's drawing, the site."""
    guarded_by: SaidText
    """What keeps people out of its reach while it runs."""
    stand_at: SaidText
    """Where the person stands who holds the lever."""
    before_service: SaidText
    """What is done with it, from that stop, before the machine works again."""


class Cylinder(RatedPart):
    """Double-acting cylinder: A is the cap end, B the rod end. Extending is the positive sense."""

    kind: Literal["cylinder"]
    PORTS: ClassVar[tuple[str, ...]] = ("A", "B")
    bore_mm: Millimetre
    """Bore diameter."""
    rod_mm: Millimetre
    """Rod diameter."""
    stroke_mm: Millimetre
    """Whole stroke."""
    extending_load_kn: Kilonewton = 0.0
    """Resists while it extends, and only then."""
    retracting_load_kn: Kilonewton = 0.0
    """Resists while it retracts, and only then."""
    weight_kn: Kilonewton = 0.0
    """Drives it one way by itself; nought for a level cylinder."""
    weight_drives: Literal["extending", "retracting"] = "retracting"
    """The way in which the weight drives it."""
    force_efficiency: Ratio = 0.95
    """Force at the rod over pressure times area."""
    structure_force_limit_kn: PositiveKilonewton | None = None
    """Highest force, either way, that the structure it works on stands."""
    moves: Text = "cylinder rod"
    """What people see move."""
    may_run_to_stop: StopRun | None = None
    """Leave to run it to a stop for a setting. Left out, no setting moves it."""

    def contradictions(self) -> Iterator[Flaw]:
        yield from super().contradictions()
        if self.may_run_to_stop is not None and (
            self.weight_kn > 0.0 or "weight_kn" not in self.model_fields_set
        ):
            yield Flaw(
                at=("may run to stop",),
                what="A cylinder runs to its stop for a setting only where nothing drives it by itself.",
                fix="If that is so, write weight: 0 kN. Else leave may run to stop out.",
            )
        if self.rod_mm >= self.bore_mm:
            yield Flaw(
                at=("rod",),
                what="The rod isn't thinner than the bore.",
                fix="Look up both diameters on the plate; bore is the larger one.",
            )


class HydraulicMotor(RatedPart):
    """Hydraulic motor; pressure at A turns it in the positive sense."""

    kind: Literal["hydraulic motor"]
    LOW_PRESSURE_PORTS: ClassVar[frozenset[str]] = frozenset({"L"})
    NEVER_PLUGGED: ClassVar[frozenset[str]] = frozenset({"L"})
    displacement_cm3: Cm3
    """Geometric displacement a revolution."""
    volumetric_efficiency: Ratio
    """At the pressure of its rating; leakage is linear in pressure."""
    leakage_at_rating_lpm: Lpm | None = None
    """What leaks from its high side at the pressure of its rating, where the maker gives it. Left out, it is
    taken as what the volumetric efficiency leaves of the full flow of all pumps: policy."""
    mechanical_efficiency: Ratio = 0.9
    """Torque at the shaft over pressure times displacement."""
    structure_torque_limit_nm: PositiveNewtonMetre | None = None
    """Highest torque, either way, that the structure it works on stands."""
    load_torque_nm: NewtonMetre = 0.0
    """Resists in both directions."""
    driving_torque_nm: NewtonMetre = 0.0
    """Turns it by itself (a load hung on a winch); nought for most."""
    driving_torque_turns: Literal["forward", "backward"] = "backward"
    """The sense in which the driving torque turns it."""
    has_case_drain: YesNo = True
    """Whether it has a case port L."""
    moves: Text = "motor shaft"
    """What people see move."""

    @property
    def ports(self) -> tuple[str, ...]:
        """All ports of this motor; L is there if it has a case drain."""
        return ("A", "B", "L") if self.has_case_drain else ("A", "B")
