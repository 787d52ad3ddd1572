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
from sheets.circuit.plant import MoveValve
from sheets.machine.model import Machine
from sheets.machine.parts import Cylinder, HydraulicMotor
from sheets.machine.site import Policies
from sheets.procedure.answers import TestState
from sheets.procedure.conditions import Condition
from sheets.procedure.steps import Procedure, Stage, Step, StepKind

Signal = Literal["DANGER", "WARNING", "CAUTION", "NOTICE"]

INJECTION_BAR = 7.0
"""Policy. A bulletin reports injection through skin down to about this pressure, and serious cases above
100 bar (UK HSE, FOD 4-2014)."""
HARMFUL_V = 60.0
"""Live parts above this are to be discharged after switching off (EN 60204-1, 6.2.4, as reported)."""
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


@dataclass(frozen=True, kw_only=True)
class _Facts:
    """What the hazards of every step are judged by."""

    machine: Machine
    actuators: tuple[str, ...]
    states: Mapping[str, TestState]
    highest_bar: float
    """Top of the highest window: what may still be shut in after the drive stops."""
    never_exceed_bar: float
    longest_try_s: float


def assess(
    machine: Machine, circuit: Circuit, procedure: Procedure, policies: Policies
) -> dict[tuple[int, int], tuple[Hazard, ...]]:
    """Hazards by stage and step number, both from 0; each kind once a stage, at its first step."""
    states = procedure.search.found()
    facts = _Facts(
        machine=machine,
        actuators=circuit.actuators.ids,
        states=states,
        highest_bar=max((state.gauge.window.high_bar for state in states.values()), default=0.0),
        never_exceed_bar=min((state.gauge.never_exceed_bar for state in states.values()), default=0.0),
        longest_try_s=policies.longest_try_s,
    )
    found: dict[tuple[int, int], tuple[Hazard, ...]] = {}
    for at, stage in enumerate(procedure.stages):
        warned: set[HazardKind] = set()
        for place, step in enumerate(stage.steps):
            new = [hazard for hazard in _of_step(facts, stage, step) if hazard.kind not in warned]
            if new:
                found[at, place] = tuple(new)
                warned.update(hazard.kind for hazard in new)
    return found


def _of_step(facts: _Facts, stage: Stage, step: Step) -> tuple[Hazard, ...]:
    machine = facts.machine
    match step.kind:
        case StepKind.VERIFY_DEAD:
            voltage_v = machine.energy[step.subject].voltage_v
            if voltage_v <= HARMFUL_V:
                return ()
            volts = Amount(value=voltage_v, quantity="voltage_v")
            return (Hazard(kind=HazardKind.ELECTRICITY, signal="DANGER", data={"voltage": volts}),)
        case StepKind.OPEN_VENT | StepKind.WORK_LEVER:
            data = {"pressure": bar(facts.highest_bar)}
            return (Hazard(kind=HazardKind.RELIEVING, signal="WARNING", data=data),)
        case StepKind.START:
            moves = ", ".join(_moves(machine, id_) for id_ in facts.actuators)
            return (
                Hazard(kind=HazardKind.START, signal="WARNING", data={"drive": step.subject, "moves": moves}),
            )
    if not stage.powered or step.trace is None or not step.trace.established:
        return ()
    hazards: list[Hazard] = []
    if step.kind in (StepKind.HOLD_VALVE, StepKind.CLOSE_GRADUALLY):
        hazards.extend(_movement(machine, facts.states, stage, step))
    if step.kind in _PRESSURISING:
        if max(step.trace.pressures_bar) >= INJECTION_BAR:
            data = {"pressure": bar(facts.never_exceed_bar)}
            hazards.append(Hazard(kind=HazardKind.INJECTION, signal="WARNING", data=data))
        if step.trace.relief_kw >= HEAT_KW:
            hazards.append(_heat(facts, stage))
    return tuple(hazards)


def _heat(facts: _Facts, stage: Stage) -> Hazard:
    """Hot oil, with the most that turns to heat in the stage."""
    heat_kw = max(step.trace.relief_kw for step in stage.steps if step.trace is not None)
    limit_c = facts.machine.fluid.limit_temperature_c
    return Hazard(
        kind=HazardKind.HOT_OIL,
        signal="CAUTION",
        data={
            "power": kw(heat_kw),
            "limit": Amount(value=limit_c, quantity="temperature_c"),
            "seconds": Amount(value=facts.longest_try_s, quantity="time_s"),
        },
    )


_PRESSURISING = frozenset(
    {StepKind.HOLD_VALVE, StepKind.CLOSE_GRADUALLY, StepKind.READ, StepKind.COME_UP, StepKind.TURN_BELOW}
)


def _moves(machine: Machine, actuator: str) -> str:
    """What people would see move, in the words of the machine file."""
    part = machine.parts[actuator]
    return f"{part.moves} ({actuator})" if isinstance(part, Cylinder | HydraulicMotor) else actuator


def _movement(machine: Machine, states: Mapping[str, TestState], stage: Stage, step: Step) -> list[Hazard]:
    """What moves, and how fast, where a valve that keeps it still isn't where it should be."""
    shifted = [
        state
        for state in states.values()
        if any(isinstance(one, MoveValve) and one.valve == step.subject for one in state.changes)
    ]
    own = [state for state in shifted if state.adjuster == stage.adjuster]
    for state in (own or shifted)[:1]:
        for change, failure in state.reasons:
            if (
                isinstance(change, MoveValve)
                and change.valve != step.subject
                and failure.condition is Condition.STILL
            ):
                data = {
                    "moves": _moves(machine, str(failure.data["part"])),
                    "speed": failure.data["speed"],
                    "valve": change.valve,
                    "position": change.position,
                }
                return [Hazard(kind=HazardKind.MOVEMENT, signal="WARNING", data=data)]
    return []
