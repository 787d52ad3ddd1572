"""Two common power units as machine files, plate values made up, for searches in their graphs alone.

In short: one entry a part, its kind and what else decides a way; everything else is filled in.
"""

from __future__ import annotations

from sheets.circuit.build import build_circuit
from sheets.circuit.model import Circuit
from sheets.machine.loading import parse_machine
from sheets.machine.model import Machine

EDGE = {"rating": "315 bar", "rated flow": "60 L/min", "rated drop": "1 bar"}
SCREW = {"lowest": "40 bar", "highest": "200 bar", "raises": "clockwise", "where": "end", "key": "hex 5 mm"}
PUMP = {
    "driven by": "M1",
    "displacement": "32 cm3/rev",
    "volumetric efficiency": "0.93",
    "overall efficiency": "0.88",
    "rating": "250 bar",
}
KINDS: dict[str, dict[str, object]] = {
    "reservoir": {"volume": "100 L"},
    "electric motor": {"power": "15 kW", "speed": "1450 rpm"},
    "fixed pump": PUMP,
    "variable pump": {**PUMP, "compensator": {"setting": "160 bar", "given by": "plate", **SCREW}},
    "relief valve": {
        "rating": "315 bar",
        "acting": "pilot operated",
        "rated flow": "100 L/min",
        "adjuster": {"setting": "190 bar", "given by": "plate", **SCREW},
    },
    "check valve": {**EDGE, "opening": "0.5 bar"},
    "hand valve": {**EDGE, "lockable": "yes", "rest": "open"},
    "filter": EDGE,
    "orifice": EDGE,
    "directional valve": {**EDGE, "operated by": "solenoids", "rest position": "centre"},
    "cylinder": {"rating": "250 bar", "bore": "80 mm", "rod": "45 mm", "stroke": "600 mm"},
    "test point": {"rating": "400 bar"},
}
HEAD = """format: 1
tag: T-01
name: Power unit
plant: Testing ground
area: Bench
document: D-01
dated: 2026-01-31
fluid: {kind: mineral oil, grade: ISO VG 46, limit temperature: 65 °C}
gauges: {}
absent: []
controls:
  start: [{name: start, where: panel}]
  stop: [{name: stop, where: panel}]
  emergency stop: []
energy:
  Q1:
    kind: electrical supply
    voltage: 400 V
    feeds: [M1]
    isolator: {plate: Q1, kind: main switch, where: panel, action: turn to OFF, lock: padlock}
    verify: a qualified person tests
"""
CONTROL_SUPPLY = """\
  Q2:
    kind: control supply
    voltage: 24 V
    feeds: [DV1]
    isolator: {plate: Q2, kind: circuit breaker, where: panel, action: turn to OFF, lock: clip}
    verify: a qualified person tests
"""


def unit(parts: dict[str, dict[str, object]], nets: dict[str, str]) -> tuple[Machine, Circuit]:
    """A machine of these parts and nets, by way of the text of a machine file."""
    merged = {id_: {**KINDS[str(given["kind"])], **given} for id_, given in parts.items()}
    lines = [
        HEAD + CONTROL_SUPPLY if any("solenoids" in part for part in merged.values()) else HEAD,
        "parts:",
    ]
    for id_, part in merged.items():
        lines.append(f"  {id_}:\n    where: manifold")
        lines += [f"    {key}: {_flow(value)}" for key, value in part.items()]
    lines.append("nets:")
    lines += [f"  {name}: [{', '.join(ports.split())}]" for name, ports in nets.items()]
    machine = parse_machine(("\n".join(lines) + "\n").encode(), "unit.yaml")
    return machine, build_circuit(machine)


def _flow(value: object) -> str:
    if isinstance(value, dict):
        return "{" + ", ".join(f"{key}: {_flow(inner)}" for key, inner in value.items()) + "}"
    return str(value)


SOLENOIDS = {"out": "Y1", "back": "Y2"}
SHIFTED = {"out": "[P to A, B to T]", "back": "[P to B, A to T]"}


def tandem_unit(*, by_lever: bool = False) -> tuple[Machine, Circuit]:
    """Fixed pump, relief valve, check valve and isolating valve, tandem-centre valve, cylinder."""
    moved_by: dict[str, object] = {"operated by": "lever"} if by_lever else {"solenoids": SOLENOIDS}
    return unit(
        {
            "TK1": {"kind": "reservoir"},
            "M1": {"kind": "electric motor"},
            "HV1": {"kind": "hand valve", "rating": "16 bar"},
            "PU1": {"kind": "fixed pump"},
            "TP1": {"kind": "test point"},
            "RV1": {"kind": "relief valve"},
            "CV1": {"kind": "check valve"},
            "HV2": {"kind": "hand valve"},
            "DV1": {
                "kind": "directional valve",
                "positions": {"centre": "[P to T]", **SHIFTED},
                **moved_by,
            },
            "TP2": {"kind": "test point"},
            "TP3": {"kind": "test point"},
            "CY1": {"kind": "cylinder"},
            "FR1": {"kind": "filter"},
        },
        {
            "TANK": "TK1.S TK1.T TK1.L HV1.A RV1.T FR1.B",
            "SUC": "HV1.B PU1.S",
            "PMP": "PU1.P TP1.P RV1.P CV1.A",
            "PH": "CV1.B HV2.A",
            "PV": "HV2.B DV1.P",
            "TL": "DV1.T FR1.A",
            "WA": "DV1.A TP2.P CY1.A",
            "WB": "DV1.B TP3.P CY1.B",
        },
    )


def blocked_centre_unit() -> tuple[Machine, Circuit]:
    """Compensated pump, header with a bleed valve, blocked centre, load-holding checks at the cylinder.

    Load-holding checks are pilot operated; without pressure in the other line they pass inward only, which is
    all that counts for a search at rest. So plain check valves stand for them.
    """
    return unit(
        {
            "TK1": {"kind": "reservoir"},
            "M1": {"kind": "electric motor"},
            "HV1": {"kind": "hand valve", "rating": "16 bar"},
            "PU1": {"kind": "variable pump"},
            "HV3": {"kind": "hand valve", "rating": "16 bar"},
            "TP1": {"kind": "test point"},
            "RV1": {"kind": "relief valve"},
            "CV1": {"kind": "check valve"},
            "FP1": {"kind": "filter"},
            "HV2": {"kind": "hand valve"},
            "TP2": {"kind": "test point"},
            "NV1": {"kind": "hand valve", "rest": "closed"},
            "DV1": {
                "kind": "directional valve",
                "positions": {"centre": "[]", **SHIFTED},
                "solenoids": SOLENOIDS,
            },
            "PO1": {"kind": "check valve"},
            "PO2": {"kind": "check valve"},
            "TP3": {"kind": "test point"},
            "TP4": {"kind": "test point"},
            "CY1": {"kind": "cylinder"},
            "HX1": {"kind": "orifice"},
        },
        {
            "TANK": "TK1.S TK1.T TK1.L HV1.A RV1.T HX1.B HV3.B NV1.B",
            "SUC": "HV1.B PU1.S",
            "CASE": "PU1.L HV3.A",
            "PMP": "PU1.P TP1.P RV1.P CV1.A",
            "PF": "CV1.B FP1.A",
            "PH": "FP1.B HV2.A",
            "HDR": "HV2.B TP2.P NV1.A DV1.P",
            "TL": "DV1.T HX1.A",
            "AV": "DV1.A PO1.A",
            "BV": "DV1.B PO2.A",
            "WA": "PO1.B TP3.P CY1.A",
            "WB": "PO2.B TP4.P CY1.B",
        },
    )
