"""Hazards of steps, from what the simulation gave: each stands directly before its step.

No standard maps a pressure or a power to a signal word. The words here are policy, rounded up.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from enum import Enum
from typing import Literal

from sheets.amounts import Amount, bar, kw
from sheets.circuit.model import Circuit
from sheets.circuit.plant import AtStop, MoveValve
from sheets.machine.model import Machine
from sheets.machine.parts import Cylinder, HydraulicMotor
from sheets.machine.site import Policies
from sheets.procedure.answers import TestState
from sheets.procedure.conditions import Condition
from sheets.procedure.heat import HEAT_KW, Heat, heat_of
from sheets.procedure.steps import Procedure, Stage, Step, StepKind

Signal = Literal["DANGER", "WARNING", "CAUTION", "NOTICE"]

INJECTION_BAR = 7.0
"""Policy. A bulletin reports injection through skin down to about this pressure, and serious cases above
100 bar (UK HSE, FOD 4-2014)."""
HARMFUL_V = 60.0
"""Live parts above this are to be discharged after switching off (EN 60204-1, 6.2.4, as reported)."""


class HazardKind(Enum):
    """The value names its sentences."""

    ELECTRICITY = "electricity"
    PANEL = "panel"
    RELIEVING = "relieving"
    SETTLING = "settling"
    START = "start"
    MOVEMENT = "movement"
    RUN = "run"
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
    pressure: Amount | str
    """Highest that the limits let come anywhere; empty where that isn't known."""


def assess(
    machine: Machine,
    circuit: Circuit,
    procedure: Procedure,
    policies: Policies,
    shut_in_bar: Sequence[float] | None,
) -> dict[tuple[int, int], tuple[Hazard, ...]]:
    """Hazards by stage and step number, both from 0; each kind once a stage, at its first step.

    What a step itself sets in motion is warned of at every such step.
    ``shut_in_bar``: highest pressure that may come to each node, in bar; None where that isn't known.
    """
    states = procedure.search.found()
    facts = _Facts(
        machine=machine,
        actuators=circuit.actuators.ids,
        states=states,
        pressure="" if shut_in_bar is None else bar(max(shut_in_bar)),
    )
    found: dict[tuple[int, int], tuple[Hazard, ...]] = {}
    for at, stage in enumerate(procedure.stages):
        warned: set[HazardKind] = set()
        hot = heat_of(machine, policies, procedure.stages, at)
        for place, step in enumerate(stage.steps):
            new = [hazard for hazard in _of_step(facts, stage, step, hot) if hazard.kind not in warned]
            if new:
                found[at, place] = tuple(new)
                warned.update(hazard.kind for hazard in new if hazard.kind is not HazardKind.RUN)
    return found


def _of_step(facts: _Facts, stage: Stage, step: Step, heat: Heat | None) -> tuple[Hazard, ...]:
    machine = facts.machine
    match step.kind:
        case StepKind.ISOLATE | StepKind.RESTORE_SUPPLY:
            supply = machine.energy[step.subject]
            if not supply.isolator.inside_panel:
                return ()
            volts = Amount(value=supply.voltage_v, quantity="voltage_v")
            return (Hazard(kind=HazardKind.PANEL, signal="WARNING", data={"voltage": volts}),)
        case StepKind.VERIFY_DEAD:
            voltage_v = machine.energy[step.subject].voltage_v
            if voltage_v <= HARMFUL_V:
                return ()
            volts = Amount(value=voltage_v, quantity="voltage_v")
            return (Hazard(kind=HazardKind.ELECTRICITY, signal="DANGER", data={"voltage": volts}),)
        case StepKind.OPEN_VENT:
            data: dict[str, Amount | str] = {"pressure": facts.pressure}
            return (Hazard(kind=HazardKind.RELIEVING, signal="WARNING", data=data),)
        case StepKind.WORK_LEVER:
            data = {"pressure": facts.pressure, "moves": _all_moves(facts)}
            return (Hazard(kind=HazardKind.SETTLING, signal="WARNING", data=data),)
        case StepKind.START:
            data = {"drive": step.subject, "moves": _all_moves(facts)}
            starts = Hazard(kind=HazardKind.START, signal="WARNING", data=data)
            return (starts, *_under_pressure(facts, step, heat))
    if not stage.powered or step.trace is None or not step.trace.established:
        return ()
    hazards: list[Hazard] = []
    if step.runs is not None:
        hazards.append(_run(machine, step, step.runs))
    if step.kind in (StepKind.HOLD_VALVE, StepKind.CLOSE_GRADUALLY):
        hazards.extend(_movement(machine, facts.states, stage, step))
    if step.kind in _PRESSURISING:
        hazards.extend(_under_pressure(facts, step, heat))
    return tuple(hazards)


def _all_moves(facts: _Facts) -> str:
    return ", ".join(_moves(facts.machine, id_) for id_ in facts.actuators)


def _under_pressure(facts: _Facts, step: Step, heat: Heat | None) -> tuple[Hazard, ...]:
    """Injection, and hot oil where the stage has it."""
    if step.trace is None or not step.trace.established:
        return ()
    hazards = []
    if max(step.trace.pressures_bar) >= INJECTION_BAR:
        data = {"pressure": facts.pressure}
        hazards.append(Hazard(kind=HazardKind.INJECTION, signal="WARNING", data=data))
    if heat is not None and (step.kind in _PRESSURISING or step.trace.relief_kw >= HEAT_KW):
        hazards.append(_hot_oil(facts, heat))
    return tuple(hazards)


def _hot_oil(facts: _Facts, heat: Heat) -> Hazard:
    """Hot oil, with the most that turns to heat in the stage and how long the oil stands it."""
    limit_c = facts.machine.fluid.limit_temperature_c
    return Hazard(
        kind=HazardKind.HOT_OIL,
        signal="CAUTION",
        data={
            "power": kw(heat.power_kw),
            "limit": Amount(value=limit_c, quantity="temperature_c"),
            "rise": Amount(value=heat.warming_k_per_s, quantity="temperature_rise_k"),
            "seconds": Amount(value=heat.longest_s, quantity="time_s"),
        },
    )


_PRESSURISING = frozenset(
    {
        StepKind.HOLD_VALVE,
        StepKind.RUN_TO_STOP,
        StepKind.HOLD_RUNNING,
        StepKind.RAISE_TO_STOP,
        StepKind.CLOSE_GRADUALLY,
        StepKind.READ,
        StepKind.COME_UP,
        StepKind.TURN_BELOW,
    }
)


def _run(machine: Machine, step: Step, runs: AtStop) -> Hazard:
    """The movement that a step names: what runs, how fast at most, and what keeps people away from it."""
    part = machine.parts[runs.actuator]
    leave = part.may_run_to_stop if isinstance(part, Cylinder) else None
    data: dict[str, Amount | str] = {
        "moves": _moves(machine, runs.actuator),
        "speed": step.data["speed"],
        "guard": leave.guarded_by if leave is not None else "",
    }
    return Hazard(kind=HazardKind.RUN, signal="DANGER", data=data)


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
