"""Small machines for the tests of the circuit, made of parts with round plate values."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from sheets.machine.model import Machine
from sheets.machine.parts import Adjuster as Screw
from sheets.machine.parts import (
    CheckValve,
    CompensatorControl,
    Cylinder,
    DirectionalValve,
    ElectricMotor,
    Filter,
    FixedPump,
    HandValve,
    HydraulicMotor,
    Line,
    LoadSensingControl,
    Orifice,
    ReliefValve,
    Reservoir,
    Signal,
    TestPoint,
    VariablePump,
)

HERE = "on the bench"


def bench(parts: Mapping[str, Any], nets: Mapping[str, str]) -> Machine:
    """A machine of these parts, with a tank and a drive; nets are ports with blanks between."""
    everything = {"TK1": tank(), "M1": motor_drive(), **parts}
    return Machine.model_construct(
        parts=everything,
        nets={name: tuple(ports.split()) for name, ports in nets.items()},
        gauges={},
    )


def tank() -> Reservoir:
    return Reservoir(kind="reservoir", where=HERE, volume_l=100.0)


def motor_drive(**changes: Any) -> ElectricMotor:
    values = {"kind": "electric motor", "where": HERE, "power_kw": 30.0, "speed_rpm": 1500.0}
    return ElectricMotor(**{**values, **changes})


def screw_values(**changes: Any) -> dict[str, Any]:
    return {
        "lowest_bar": 10.0,
        "highest_bar": 350.0,
        "raises": "clockwise",
        "where": HERE,
        "key": "hex 5 mm",
        **changes,
    }


PUMP = {
    "where": HERE,
    "driven_by": "M1",
    "displacement_cm3": 40.0,
    "volumetric_efficiency": 0.9,
    "overall_efficiency": 0.8,
    "rating_bar": 300.0,
}
"""60 L/min theoretical, 54 L/min at 300 bar: it leaks 0.02 L/min for each bar."""


def fixed_pump(**changes: Any) -> FixedPump:
    return FixedPump(**{"kind": "fixed pump", **PUMP, **changes})


def compensated(**changes: Any) -> VariablePump:
    control = CompensatorControl(**screw_values(width_bar=4.0))
    values = {"kind": "variable pump", **PUMP, "compensator": control}
    return VariablePump(**{**values, **changes})


def load_sensing(port_not_connected: str | None = None, **changes: Any) -> VariablePump:
    control = LoadSensingControl(
        **screw_values(width_bar=5.0, highest_bar=40.0, port_not_connected=port_not_connected)
    )
    return compensated(**{"load_sensing": control, **changes})


def relief(**changes: Any) -> ReliefValve:
    values = {
        "kind": "relief valve",
        "where": HERE,
        "rating_bar": 350.0,
        "acting": "direct",
        "adjuster": Screw(**screw_values()),
        "opening_ratio": 0.9,
        "reference_flow_lpm": 54.0,
        "rated_flow_lpm": 100.0,
    }
    return ReliefValve(**{**values, **changes})


def edge(kind: str, flow_lpm: float, drop_bar: float, **changes: Any) -> Any:
    values = {
        "where": HERE,
        "rating_bar": 350.0,
        "rated_flow_lpm": flow_lpm,
        "rated_drop_bar": drop_bar,
        **changes,
    }
    if kind == "check valve":
        return CheckValve(kind="check valve", **{"opening_bar": 0.5, **values})
    if kind == "filter":
        return Filter(kind="filter", **values)
    if kind == "hand valve":
        return HandValve(kind="hand valve", **{"rest": "open", "lockable": True, **values})
    return Orifice(kind="orifice", **values)


def spool(
    positions: Mapping[str, tuple[str, ...]], *, signal: bool = False, **changes: Any
) -> DirectionalValve:
    values = {
        "kind": "directional valve",
        "where": HERE,
        "rating_bar": 350.0,
        "positions": positions,
        "rest_position": next(iter(positions)),
        "operated_by": "lever",
        "rated_flow_lpm": 40.0,
        "rated_drop_bar": 4.0,
        "signal": Signal(rated_flow_lpm=2.0, rated_drop_bar=4.0) if signal else None,
    }
    return DirectionalValve(**{**values, **changes})


def cylinder(**changes: Any) -> Cylinder:
    """Bore 100 mm, rod 70 mm: 78.54 and 40.055 cm²."""
    values = {
        "kind": "cylinder",
        "where": HERE,
        "rating_bar": 350.0,
        "bore_mm": 100.0,
        "rod_mm": 70.0,
        "stroke_mm": 500.0,
        "force_efficiency": 1.0,
    }
    return Cylinder(**{**values, **changes})


def hydraulic_motor(**changes: Any) -> HydraulicMotor:
    values = {
        "kind": "hydraulic motor",
        "where": HERE,
        "rating_bar": 350.0,
        "displacement_cm3": 200.0,
        "volumetric_efficiency": 1.0,
        "mechanical_efficiency": 1.0,
    }
    return HydraulicMotor(**{**values, **changes})


def hose(rating_bar: float = 300.0) -> Line:
    return Line(kind="hose", where=HERE, rating_bar=rating_bar)


def gauge_point() -> TestPoint:
    return TestPoint(kind="test point", where=HERE, rating_bar=400.0)


POSITIONS = {
    "neutral": ("LS to T",),
    "out": ("P to A", "B to T", "A to LS"),
    "in": ("P to B", "A to T", "B to LS"),
}


def many_sections(sections: int = 4) -> Machine:
    """A load-sensing unit with that many cylinders, hand valves everywhere and a relief on every cap side."""
    parts: dict[str, Any] = {
        "PU1": load_sensing(),
        "HV1": edge("hand valve", 300.0, 0.1),
        "HV2": edge("hand valve", 150.0, 0.5),
        "BV1": edge("hand valve", 20.0, 50.0, rest="closed"),
        "HV3": edge("hand valve", 5.0, 2.0),
        "CV1": edge("check valve", 100.0, 2.0),
        "RV1": relief(acting="pilot operated", opening_ratio=0.93),
        "FR1": edge("orifice", 100.0, 0.5),
        "OR1": edge("orifice", 0.5, 100.0),
    }
    nets = {
        "tank": "TK1.S TK1.T HV1.A PU1.L FR1.B",
        "suction": "HV1.B PU1.S",
        "outlet": "PU1.P CV1.A BV1.A",
        "pump line": "CV1.B RV1.P HV2.A",
        "pressure": "HV2.B " + " ".join(f"DV{n}.P" for n in range(sections)),
        "return": "RV1.T BV1.B OR1.B FR1.A " + " ".join(f"DV{n}.T" for n in range(sections)),
        "signal": "PU1.X HV3.A",
        "signal head": "HV3.B OR1.A " + " ".join(f"SV{n}.B" for n in range(sections)),
    }
    for n in range(sections):
        parts[f"DV{n}"] = spool(POSITIONS, signal=True, rated_flow_lpm=15.0 + 5.0 * n, rated_drop_bar=15.0)
        parts[f"SV{n}"] = edge("check valve", 5.0, 2.0, opening_bar=0.2)
        parts[f"LV{n}"] = edge("hand valve", 100.0, 0.5)
        parts[f"PR{n}"] = relief()
        weight = 20.0 if n % 2 else 0.0
        parts[f"CY{n}"] = cylinder(
            extending_load_kn=30.0 + 30.0 * n,
            retracting_load_kn=10.0,
            weight_kn=weight,
            force_efficiency=0.95,
        )
        nets[f"a{n}"] = f"DV{n}.A LV{n}.A"
        nets[f"cap{n}"] = f"LV{n}.B CY{n}.A PR{n}.P"
        nets[f"b{n}"] = f"DV{n}.B CY{n}.B"
        nets[f"ls{n}"] = f"DV{n}.LS SV{n}.A"
        nets["return"] += f" PR{n}.T"
    return bench(parts, nets)
