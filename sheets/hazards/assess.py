"""Hazards of steps, from what the simulation gave: each stands directly before its step.

No standard maps a pressure or a power to a signal word. The words here are policy, rounded up.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from enum import Enum
from typing import Literal

from sheets.amounts import Amount, bar, kw
from sheets.circuit.model import Circuit
from sheets.machine.model import Machine
from sheets.procedure.conditions import Condition
from sheets.procedure.search import TestState
from sheets.procedure.steps import Procedure, Stage, Step, StepKind

Signal = Literal["DANGER", "WARNING", "CAUTION", "NOTICE"]

INJECTION_BAR = 7.0
"""Policy. A health authority's bulletin reports injection through skin down to about this pressure, and serious
cases above 100 bar (UK HSE, FOD 4-2014)."""
HEAT_KW = 1.0
"""Policy: power over a relief from which hot oil is warned of."""


class HazardKind(Enum):
    """The value names its sentences."""

    ELECTRICITY = "electricity"
    RELIEVING = "relieving"
    START = "start"
    MOVEMENT = "movement"
    INJECTION = "injection"
    HOT_OIL = "hot_oil"


@dataclass(frozen=True, kw_only=True)
class Hazard:
    """One hazard before one step."""

    kind: HazardKind
    signal: Signal
    data: Mapping[str, Amount | str]


def assess(machine: Machine, circuit: Circuit, procedure: Procedure) -> dict[tuple[int, int], tuple[Hazard, ...]]:
    """Hazards by stage and step number (both from 0). Each kind is warned of once a stage, at its first step."""
    found: dict[tuple[int, int], tuple[Hazard, ...]] = {}
    states = procedure.search.found()
    highest_bar = max((state.gauge.window.high_bar for state in states.values()), default=0.0)
    never_bar = min((state.gauge.never_exceed_bar for state in states.values()), default=0.0)
    for at, stage in enumerate(procedure.stages):
        warned: set[HazardKind] = set()
        for place, step in enumerate(stage.steps):
            new = [
                hazard
                for hazard in _of_step(machine, circuit, states, stage, step, highest_bar, never_bar)
                if hazard.kind not in warned
            ]
            if new:
                found[at, place] = tuple(new)
                warned.update(hazard.kind for hazard in new)
    return found


def _of_step(
    machine: Machine,
    circuit: Circuit,
    states: Mapping[str, TestState],
    stage: Stage,
    step: Step,
    highest_bar: float,
    never_bar: float,
) -> tuple[Hazard, ...]:
    if step.kind is StepKind.VERIFY_DEAD:
        volts = Amount(value=machine.energy[step.subject].voltage_v, quantity="voltage_v")
        return (Hazard(kind=HazardKind.ELECTRICITY, signal="DANGER", data={"voltage": volts}),)
    if step.kind in (StepKind.OPEN_VENT, StepKind.WORK_LEVER):
        return (
            Hazard(kind=HazardKind.RELIEVING, signal="WARNING", data={"pressure": bar(highest_bar)}),
        )
    if step.kind is StepKind.START:
        return (
            Hazard(
                kind=HazardKind.START,
                signal="WARNING",
                data={"drive": step.subject, "moves": _moves(machine, circuit)},
            ),
        )
    if not stage.powered or step.trace is None or not step.trace.established:
        return ()
    hazards: list[Hazard] = []
    if step.kind in (StepKind.HOLD_VALVE, StepKind.CLOSE_GRADUALLY):
        hazards.extend(_movement(machine, states, stage, step))
    pressure_bar = max(step.trace.pressures_bar)
    if pressure_bar >= INJECTION_BAR and step.kind in _PRESSURISING:
        hazards.append(
            Hazard(kind=HazardKind.INJECTION, signal="WARNING", data={"pressure": bar(never_bar)})
        )
    heat_kw = max(other.trace.relief_kw for other in stage.steps if other.trace is not None)
    if step.trace.relief_kw >= HEAT_KW and step.kind in _PRESSURISING:
        limit_c = Amount(value=machine.fluid.limit_temperature_c, quantity="temperature_c")
        hazards.append(
            Hazard(
                kind=HazardKind.HOT_OIL,
                signal="CAUTION",
                data={"power": kw(heat_kw), "limit": limit_c},
            )
        )
    return tuple(hazards)


_PRESSURISING = frozenset(
    {StepKind.HOLD_VALVE, StepKind.CLOSE_GRADUALLY, StepKind.READ, StepKind.COME_UP, StepKind.TURN_BELOW}
)


def _moves(machine: Machine, circuit: Circuit) -> str:
    """What people would see move, in the words of the machine file."""
    return ", ".join(
        f"{machine.parts[id_].moves} ({id_})"  # type: ignore[union-attr]  # every actuator has it
        for id_ in circuit.actuators.ids
    )


def _movement(
    machine: Machine, states: Mapping[str, TestState], stage: Stage, step: Step
) -> list[Hazard]:
    """What moves, and how fast, where a valve that keeps it still isn't where it should be."""
    state = states.get(stage.adjuster) or next(
        (
            candidate
            for candidate in states.values()
            if any(getattr(change, "valve", "") == step.subject for change in candidate.changes)
        ),
        None,
    )
    if state is None:
        return []
    for change, failure in state.reasons:
        valve = getattr(change, "valve", "")
        if failure.condition is Condition.STILL and valve != step.subject:
            part = str(failure.data["part"])
            return [
                Hazard(
                    kind=HazardKind.MOVEMENT,
                    signal="WARNING",
                    data={
                        "moves": f"{machine.parts[part].moves} ({part})",  # type: ignore[union-attr]  # an actuator
                        "speed": failure.data["speed"],
                        "valve": valve,
                        "position": str(getattr(change, "position", "")),
                    },
                )
            ]
    return []
