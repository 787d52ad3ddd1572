"""Skews plate values that nobody measured, and looks whether order or test states change.

Flows at a drop, leakage and control widths stand on plates and are seldom measured. The answer must not hang
on a tenth of them; where it does, that value is to be measured before the sheet is trusted.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass
from functools import partial

from sheets.amounts import Amount, Finding, Severity
from sheets.circuit.build import build_circuit
from sheets.circuit.plant import MoveValve
from sheets.machine.model import Machine
from sheets.machine.parts import (
    DirectionalValve,
    FlowPath,
    HydraulicMotor,
    LoadSensingControl,
    Part,
    Pump,
    VariablePump,
)
from sheets.machine.site import Policies
from sheets.procedure.answers import NotFound, NotInUse, TestState
from sheets.procedure.at_stop import held_at
from sheets.procedure.case import Case
from sheets.procedure.order import derive_order
from sheets.procedure.search import WORK_LIMIT, find_test_states
from sheets.procedure.work import Work
from sheets.targets.compute import compute_targets

SKEW = 0.10
"""Policy: a plate value that nobody measured may be out by this."""

Answers = tuple[tuple[str, ...], tuple[tuple[str, object], ...]]


@dataclass(frozen=True, kw_only=True)
class Unmeasured:
    """One plate value with the part that it stands on."""

    part: str
    field: str
    skewed: Callable[[Part, float], Part]
    """The part with that value times one plus a share."""


def unmeasured(machine: Machine) -> tuple[Unmeasured, ...]:
    """Every plate value that is skewed: flows at a drop, leakage, control widths."""
    return tuple(value for id_, part in machine.parts.items() for value in _of_part(id_, part))


def _of_part(id_: str, part: Part) -> Iterator[Unmeasured]:
    if isinstance(part, FlowPath | DirectionalValve):
        yield Unmeasured(part=id_, field="rated flow", skewed=partial(_times, "rated_flow_lpm"))
    if isinstance(part, Pump) or (isinstance(part, HydraulicMotor) and part.leakage_at_rating_lpm is None):
        yield Unmeasured(part=id_, field="volumetric efficiency", skewed=_leakage)
    if isinstance(part, HydraulicMotor) and part.leakage_at_rating_lpm is not None:
        leaks = partial(_times, "leakage_at_rating_lpm")
        yield Unmeasured(part=id_, field="leakage at its rating", skewed=leaks)
    if isinstance(part, VariablePump):
        yield Unmeasured(part=id_, field="width of its controls", skewed=_widths)


def _times(field: str, part: Part, share: float) -> Part:
    return part.model_copy(update={field: getattr(part, field) * (1.0 + share)})


def _leakage(part: Part, share: float) -> Part:
    if not isinstance(part, Pump | HydraulicMotor):
        return part
    leaks = (1.0 - part.volumetric_efficiency) * (1.0 + share)
    return part.model_copy(update={"volumetric_efficiency": 1.0 - leaks})


def _widths(part: Part, share: float) -> Part:
    if not isinstance(part, VariablePump):
        return part
    compensator, load_sensing = part.compensator, part.load_sensing
    if compensator.width_bar is not None:
        wider_bar = compensator.width_bar * (1.0 + share)
        compensator = compensator.model_copy(update={"width_bar": wider_bar})
    if load_sensing is not None:
        load_sensing = load_sensing.model_copy(update=_signal_width(load_sensing, share))
    return part.model_copy(update={"compensator": compensator, "load_sensing": load_sensing})


def _signal_width(control: LoadSensingControl, share: float) -> dict[str, float]:
    """What makes the width of a load-sensing control another one.

    Where standby and differential give it, the differential lies that much further below the standby.
    """
    if control.width_bar is not None:
        return {"width_bar": control.width_bar * (1.0 + share)}
    if control.setting_bar is not None and control.differential_bar is not None:
        below_bar = (control.setting_bar - control.differential_bar) * (1.0 + share)
        return {"differential_bar": max(control.setting_bar - below_bar, 0.0)}
    return {}


def skew_findings(machine: Machine, policies: Policies, work: Work | None = None) -> tuple[Finding, ...]:
    """Values that change the order or a state when they are a tenth higher or lower; none is the good answer.

    All values of one kind are skewed together first; only where that changes something, each alone. All
    searches share ``work``; where it is spent, that not every value was looked at is a finding, too.
    """
    work = work or Work(WORK_LIMIT)
    sound = _answers(machine, policies, work)
    findings: list[Finding] = []
    kinds: dict[str, list[Unmeasured]] = {}
    for value in unmeasured(machine):
        kinds.setdefault(value.field, []).append(value)
    for share in (-SKEW, SKEW):
        for values in kinds.values():
            if work.spent or _answers(_with(machine, values, share), policies, work) == sound:
                continue
            alone = [
                value for value in values if _answers(_with(machine, [value], share), policies, work) != sound
            ]
            if work.spent:
                continue  # what differs then may only be what wasn't found any more
            findings += [
                Finding(
                    code="measure_first",
                    severity=Severity.WARNING,
                    subject=value.part,
                    data={"field": value.field, "share": Amount(value=share, quantity="ratio")},
                )
                for value in (alone or values)
            ]
    if work.spent:
        findings.append(
            Finding(
                code="skew_not_finished",
                severity=Severity.NOT_ESTABLISHED,
                subject=machine.tag,
                data={"limit": Amount(value=float(work.most), quantity="count")},
            )
        )
    return tuple(findings)


def _with(machine: Machine, values: list[Unmeasured], share: float) -> Machine:
    parts = dict(machine.parts)
    for value in values:
        parts[value.part] = value.skewed(parts[value.part], share)
    return machine.model_copy(update={"parts": parts})


def _answers(machine: Machine, policies: Policies, work: Work) -> Answers:
    """Order, and for each adjuster its state or what it is instead. How far 'ahead' stands doesn't count."""
    circuit = build_circuit(
        machine,
        opening_ratio_direct=policies.direct_opening_ratio,
        opening_ratio_pilot=policies.pilot_opening_ratio,
        control_width_bar=policies.compensator_width_bar,
    )
    case = Case(machine, circuit, compute_targets(machine, circuit, policies), policies)
    search = find_test_states(case, work)
    order = derive_order(search.found(), case.targets)
    return order.sequence, tuple((id_, _shape(answer)) for id_, answer in search.answers.items())


def _shape(answer: TestState | NotInUse | NotFound) -> object:
    if not isinstance(answer, TestState):
        return type(answer).__name__
    moves = frozenset(
        (change.valve, change.position) for change in answer.changes if isinstance(change, MoveValve)
    )
    return moves, frozenset(answer.raised), held_at(answer.changes)
