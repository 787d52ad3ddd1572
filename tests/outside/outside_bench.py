"""Published figures with their sources, and small machines that are read from text, as a user writes them."""

from __future__ import annotations

from dataclasses import dataclass
from textwrap import dedent, indent
from typing import Literal

from sheets.circuit.build import build_circuit
from sheets.circuit.model import Circuit
from sheets.circuit.plant import PlantState
from sheets.circuit.solution import Solution
from sheets.circuit.solver import solve_one
from sheets.machine.loading import parse_machine
from sheets.machine.model import Machine
from sheets.machine.site import Policies
from sheets.quantities import parse
from sheets.targets.compute import compute_targets
from sheets.targets.settings import Targets

Evidence = Literal["seen", "reported", "from memory", "common practice"]
"""Seen: in a copy of the named document. Reported: in a page that quotes it. Common practice: no source."""


@dataclass(frozen=True, kw_only=True)
class Published:
    """One published figure: its digits as printed, who printed them, and how near ours must come."""

    printed: str
    """Number and unit, with the digits of the source."""
    source: str
    evidence: Evidence
    within: float
    """Relative: half of the last printed digit, or more where the comment beside it says why."""

    def in_base(self, unit: str) -> float:
        """In a base unit of the project."""
        return parse(self.printed, unit=unit)

    def in_metres(self) -> float:
        """A printed length, or the length of a speed a second, in metres."""
        return parse(self.printed.removesuffix("/s"), unit="mm") / 1000.0

    def agrees(self, value: float, unit: str) -> bool:
        """Whether a value in a base unit comes as near as it must."""
        return abs(value / self.in_base(unit) - 1.0) <= self.within

    def agrees_in_metres(self, value: float) -> bool:
        """Whether a length in m, or a speed in m/s, comes as near as it must."""
        return abs(value / self.in_metres() - 1.0) <= self.within


_TEXT = """\
format: 1
tag: T-01
name: Bench
plant: Testing ground
area: Bench
document: D-01
dated: 2026-01-31
fluid:
  kind: mineral oil
  grade: ISO VG 46
  limit temperature: 65 °C
parts:
  TK1: {{kind: reservoir, where: below, volume: 100 L}}
  M1: {{kind: electric motor, where: on top, power: 100 hp, speed: {speed}}}
{parts}
gauges: {{}}
nets:
{nets}
energy:
  Q1:
    kind: electrical supply
    voltage: 400 V
    feeds: [M1]
    isolator:
      plate: Q1
      kind: main switch
      where: panel
      action: turn to OFF
      lock: padlock through the handle
    verify: a qualified person tests for absence of voltage
controls: {{start: [{{name: start, where: bench}}], stop: [{{name: stop, where: bench}}], emergency stop: []}}
absent: []
"""


def machine_of(parts: str, nets: str, *, speed: str = "1200 rpm") -> Machine:
    """A machine of these parts and nets, read by the reader of machine files; TK1 and M1 are there."""
    text = _TEXT.format(
        speed=speed, parts=indent(dedent(parts).strip(), "  "), nets=indent(dedent(nets).strip(), "  ")
    )
    return parse_machine(text.encode(), "bench.yaml")


def fixed_pump(displacement: str, **changes: str) -> str:
    """Text of PU1, without losses unless changed; 3.85 in3/rev give 20 gal/min at 1200 rpm."""
    plate = {
        "kind": "fixed pump",
        "where": "on M1",
        "rating": "3000 bar",
        "driven by": "M1",
        "displacement": displacement,
        "volumetric efficiency": "1",
        "overall efficiency": "1",
        **changes,
    }
    return "PU1: {" + ", ".join(f"{key}: {value}" for key, value in plate.items()) + "}"


def screw(highest: str = "3000 bar", **changes: str) -> str:
    """Text of an adjuster."""
    plate = {
        "lowest": "1 psi",
        "highest": highest,
        "raises": "clockwise",
        "where": "end",
        "key": "hex 5 mm",
        **changes,
    }
    return "{" + ", ".join(f"{key}: {value}" for key, value in plate.items()) + "}"


def running(
    circuit: Circuit, *, positions: dict[str, str] | None = None, **settings_bar: float
) -> PlantState:
    """All drives on; settings by adjuster, with an underscore for the blank and __ for the point."""
    named = {name.replace("__", ".").replace("_", " "): value for name, value in settings_bar.items()}
    state = circuit.rest_state(named)
    for drive in circuit.drives:
        state = state.driven(drive, on=True)
    for valve, position in (positions or {}).items():
        state = state.moved(valve, position)
    return state


def solved(circuit: Circuit, state: PlantState) -> Solution:
    """An established solution."""
    solution = solve_one(circuit, state)
    assert solution.established
    return solution


def circuit_of(parts: str, nets: str, *, speed: str = "1200 rpm") -> Circuit:
    """The circuit of ``machine_of``."""
    return build_circuit(machine_of(parts, nets, speed=speed))


def targets_of(machine: Machine) -> Targets:
    """Targets of a machine under the project's own policies."""
    return compute_targets(machine, build_circuit(machine), Policies())
