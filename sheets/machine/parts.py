"""Kinds of part that a machine file may name, with their plate values.

The key in the file is the field's name without its unit and with spaces: ``rated_flow_lpm`` is written
``rated flow: 80 L/min``. Docstrings of fields become the descriptions in the JSON Schema.
"""

from __future__ import annotations

from typing import Annotated, ClassVar, Literal

from pydantic import Field

from sheets.machine.fields import (
    Bar,
    Celsius,
    Cm3,
    Entry,
    Kilonewton,
    Kilowatt,
    Litre,
    Lpm,
    Millimetre,
    NewtonMetre,
    PortName,
    PositiveBar,
    PositionName,
    Ratio,
    Rpm,
    Second,
    Text,
    YesNo,
)

Turning = Literal["clockwise", "counterclockwise", "not known"]


class Adjuster(Entry):
    """A screw or knob that sets a pressure."""

    setting_bar: PositiveBar | None = None
    """Value that the maker or the site requires. Left out, it is computed and is a proposal only."""
    given_by: Text = ""
    """Who requires that setting: the maker's plate, a drawing, the site."""
    tolerance_bar: PositiveBar | None = None
    """Half of the accepted window, where the maker or the site gives one."""
    lowest_bar: Bar
    """Lowest setting that the adjuster reaches."""
    highest_bar: PositiveBar
    """Setting with the adjuster at its stop."""
    raises: Turning
    """Direction that raises the setting, seen from the head of the screw."""
    where: Text
    """Where it is on the part, and which of two it is."""
    key: Text
    """Tool for the screw, for example hex 6 mm."""
    lock_nut: Text = ""
    """Tool and torque for the lock nut."""
    per_turn_bar: PositiveBar | None = None
    """Change for one turn, where the maker gives it."""
    seal: Text = ""
    """Number or kind of the seal, if it has one."""
    may_be_set: YesNo = True
    """No for a sealed or type-approved adjuster: it is never touched."""


class PartBase(Entry):
    """What every part has."""

    PORTS: ClassVar[tuple[str, ...]] = ()
    """Ports in the order of the law; flow is positive into the first."""
    LOW_PRESSURE_PORTS: ClassVar[frozenset[str]] = frozenset()
    """Ports that the part's rating doesn't speak of (suction, tank, case)."""

    designation: Text = ""
    """Code on the machine's own drawing (ISO 1219-2)."""
    name: Text = ""
    """What people call it; the kind, if left out."""
    where: Text
    """Where it is to be found."""
    plugged: tuple[PortName, ...] = ()
    """Ports that are closed with a plug, hence in no net."""

    @property
    def ports(self) -> tuple[str, ...]:
        """All ports of this part."""
        return self.PORTS

    def adjusters(self) -> dict[str, Adjuster]:
        """Adjusters on this part, by their name within it."""
        return {}


class RatedPart(PartBase):
    """A part that holds pressure."""

    rating_bar: PositiveBar
    """Highest pressure that the part may see, from its plate or data sheet."""
    tank_rating_bar: PositiveBar | None = None
    """Highest pressure at the tank, suction or case port, where the maker gives one."""


class Reservoir(PartBase):
    """Tank. Its ports all stand at tank pressure."""

    kind: Literal["reservoir"]
    PORTS: ClassVar[tuple[str, ...]] = ("S", "T", "L")
    volume_l: Litre


class ElectricMotor(PartBase):
    """Drive of one or more pumps."""

    kind: Literal["electric motor"]
    power_kw: Kilowatt
    speed_rpm: Rpm
    service_factor: Ratio = 1.0
    """Continuous overload that the plate allows; 1 where the plate gives none."""
    coasts_for_s: Second = 10.0
    """Time until it stands still after a stop."""


class Pump(RatedPart):
    """What fixed and variable pumps share."""

    driven_by: Text
    displacement_cm3: Cm3
    """Geometric displacement a revolution."""
    volumetric_efficiency: Ratio
    """At the pressure of its rating; leakage is linear in pressure."""
    overall_efficiency: Ratio
    LOW_PRESSURE_PORTS: ClassVar[frozenset[str]] = frozenset({"S", "L"})


class FixedPump(Pump):
    kind: Literal["fixed pump"]
    PORTS: ClassVar[tuple[str, ...]] = ("S", "P")


class CompensatorControl(Adjuster):
    """Pressure compensator. Its setting is the deadhead reading."""

    width_bar: PositiveBar | None = None
    """From full stroke to none; policy 4 bar where the plate gives none."""


class LoadSensingControl(Adjuster):
    """Load-sensing control. Its setting is the standby reading (LS at tank, no flow)."""

    width_bar: PositiveBar | None = None
    """From full stroke to none; found from standby and differential where both are given."""
    differential_bar: PositiveBar | None = None
    """Outlet less LS at the stated flow, where the maker gives that."""
    differential_flow_lpm: Lpm | None = None
    port_not_connected: Literal["drained", "fed", "sealed"] | None = None
    """Where port X is in no net: drained inside, fed from the outlet, or sealed. No default."""


class VariablePump(Pump):
    """Variable pump with a compensator, and with a load-sensing control where it has one."""

    kind: Literal["variable pump"]
    compensator: CompensatorControl
    load_sensing: LoadSensingControl | None = None

    @property
    def ports(self) -> tuple[str, ...]:
        return ("S", "P", "L", "X") if self.load_sensing else ("S", "P", "L")

    def adjusters(self) -> dict[str, Adjuster]:
        found: dict[str, Adjuster] = {"compensator": self.compensator}
        if self.load_sensing:
            found["load sensing"] = self.load_sensing
        return found


class ReliefValve(RatedPart):
    """Relief valve. Its setting is the reading at the reference flow."""

    kind: Literal["relief valve"]
    PORTS: ClassVar[tuple[str, ...]] = ("P", "T")
    LOW_PRESSURE_PORTS: ClassVar[frozenset[str]] = frozenset({"T"})
    acting: Literal["direct", "pilot operated"]
    adjuster: Adjuster
    opening_ratio: Ratio | None = None
    """Opening pressure over setting; policy where the plate gives none."""
    closing_ratio: Ratio | None = None
    """Closing pressure over setting; policy where the plate gives none."""
    reference_flow_lpm: Lpm | None = None
    """Flow at which the setting is read; the full flow that can reach it, if left out."""
    rated_flow_lpm: Lpm
    """Largest flow that it passes within its rating."""

    def adjusters(self) -> dict[str, Adjuster]:
        return {"adjuster": self.adjuster}


class FlowPath(RatedPart):
    """A part with a flow at a pressure drop, from A to B."""

    PORTS: ClassVar[tuple[str, ...]] = ("A", "B")
    rated_flow_lpm: Lpm
    rated_drop_bar: PositiveBar


class CheckValve(FlowPath):
    """Passes from A to B only."""

    kind: Literal["check valve"]
    opening_bar: Bar
    """Pressure difference at which it opens."""


class HandValve(FlowPath):
    kind: Literal["hand valve"]
    rest: Literal["open", "closed"]
    """As it stands in normal service."""
    lockable: YesNo
    """Whether it takes a padlock."""
    operated: Text = "turn the handle"


class FlowControl(FlowPath):
    """Adjustable throttle, at the opening in which it is left."""

    kind: Literal["flow control"]


class Orifice(FlowPath):
    kind: Literal["orifice"]


class Filter(FlowPath):
    kind: Literal["filter"]


class Signal(Entry):
    """The small ways inside a directional valve that carry the load signal."""

    rated_flow_lpm: Lpm
    rated_drop_bar: PositiveBar


class DirectionalValve(RatedPart):
    """Positions as sets of open paths, ``P to A``. A port in no path of a position is blocked there."""

    kind: Literal["directional valve"]
    LOW_PRESSURE_PORTS: ClassVar[frozenset[str]] = frozenset({"T"})
    positions: dict[PositionName, tuple[Text, ...]]
    rest_position: PositionName
    operated_by: Literal["lever", "solenoids"]
    solenoids: dict[PositionName, Text] = Field(default_factory=dict)
    """Solenoid that shifts the valve into each position."""
    rated_flow_lpm: Lpm
    rated_drop_bar: PositiveBar
    """At the rated flow, over one path."""
    signal: Signal | None = None
    """Required where the valve has a port LS."""

    @property
    def ports(self) -> tuple[str, ...]:
        return ("P", "T", "A", "B", "LS") if self.signal else ("P", "T", "A", "B")


class Cylinder(RatedPart):
    """Double-acting cylinder: A is the cap end, B the rod end. Extending is the positive sense."""

    kind: Literal["cylinder"]
    PORTS: ClassVar[tuple[str, ...]] = ("A", "B")
    bore_mm: Millimetre
    rod_mm: Millimetre
    stroke_mm: Millimetre
    extending_load_kn: Kilonewton = 0.0
    """Resists while it extends, and only then."""
    retracting_load_kn: Kilonewton = 0.0
    """Resists while it retracts, and only then."""
    weight_kn: Kilonewton = 0.0
    """Drives it one way by itself; nought for a level cylinder."""
    weight_drives: Literal["extending", "retracting"] = "retracting"
    force_efficiency: Ratio = 0.95
    moves: Text = "cylinder rod"
    """What people see move."""


class HydraulicMotor(RatedPart):
    """Hydraulic motor; pressure at A turns it in the positive sense."""

    kind: Literal["hydraulic motor"]
    LOW_PRESSURE_PORTS: ClassVar[frozenset[str]] = frozenset({"L"})
    displacement_cm3: Cm3
    volumetric_efficiency: Ratio
    mechanical_efficiency: Ratio = 0.9
    load_torque_nm: NewtonMetre = 0.0
    """Resists in both directions."""
    driving_torque_nm: NewtonMetre = 0.0
    """Turns it by itself (a load hung on a winch); nought for most."""
    driving_torque_turns: Literal["forward", "backward"] = "backward"
    has_case_drain: YesNo = True
    moves: Text = "motor shaft"

    @property
    def ports(self) -> tuple[str, ...]:
        return ("A", "B", "L") if self.has_case_drain else ("A", "B")


class TestPoint(RatedPart):
    kind: Literal["test point"]
    PORTS: ClassVar[tuple[str, ...]] = ("P",)


class Gauge(Entry):
    """What dial and digital gauges share. Fixed on a net by port P, or fitted at test points for the job."""

    name: Text = ""
    where: Text = "in the gauge box"
    range_bar: PositiveBar
    """End of its scale or of its measuring range."""
    rating_bar: PositiveBar
    """Highest pressure that doesn't harm it."""
    fitted_at: tuple[Text, ...]
    """Test points at which it may be fitted for the job; the first is the usual one."""


class DialGauge(Gauge):
    kind: Literal["dial gauge"]
    graduation_bar: PositiveBar
    accuracy_class: Ratio
    """Error in percent of the range (EN 837-1 class, or the largest of an ASME grade)."""


class DigitalGauge(Gauge):
    kind: Literal["digital gauge"]
    resolution_bar: PositiveBar
    error_bar: PositiveBar


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

AnyGauge = Annotated[DialGauge | DigitalGauge, Field(discriminator="kind")]


class Fluid(Entry):
    kind: Text
    """For example mineral oil. The policy temperatures hold for mineral oil only."""
    grade: Text
    """ISO VG grade, for example ISO VG 46."""
    lowest_setting_temperature_c: Celsius | None = None
    """Settings are made in this oil temperature window; policy for mineral oil, if left out."""
    highest_setting_temperature_c: Celsius | None = None
    limit_temperature_c: Celsius
    """Above this the work stops."""
