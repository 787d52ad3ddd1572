"""What must hold at the start and after every step of a run, as data."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from enum import Enum

from sheets.amounts import Amount, bar, kw
from sheets.circuit.drive_load import drive_loads
from sheets.circuit.model import TANK, Circuit
from sheets.circuit.plant import AtStop, Stop, Travel
from sheets.circuit.solution import Solution
from sheets.machine.model import Machine
from sheets.machine.parts import Cylinder, ElectricMotor
from sheets.machine.site import Policies
from sheets.procedure.gauges import gauge_port
from sheets.procedure.steps import MUST_REACH, Step, StepKind

_DUST_BAR = 1e-6


class Invariant(Enum):
    """What a violation is about; the value names its sentence."""

    ESTABLISHED = "run_not_established"
    WITHIN_RATING = "run_over_rating"
    STILL = "run_moves"
    FILLED = "run_void"
    DRIVE_CARRIES = "run_drive_over"
    NOT_OPENED_UNDER_PRESSURE = "run_opened_under_pressure"
    ZERO = "run_not_zero"
    LOCKED = "run_runs_while_locked"
    GAUGE_WITHIN = "run_gauge_over"
    GAUGE_FITTED = "run_gauge_not_fitted"
    READS_RIGHT = "run_reads_wrong"
    ON_TARGET = "run_off_target"
    AS_IN_SERVICE = "run_left_shifted"
    GAUGES_OFF = "run_gauge_left"
    AT_STOP = "run_not_at_stop"


@dataclass(frozen=True, kw_only=True)
class Violation:
    """One invariant that doesn't hold after one step."""

    invariant: Invariant
    stage: int
    step: int
    """Number within the stage, from 0; −1 for the start state."""
    subject: str
    data: Mapping[str, Amount | str] = field(default_factory=dict)


@dataclass(frozen=True, kw_only=True)
class Moment:
    """The plant right after a step, with all that an invariant may ask about."""

    machine: Machine
    circuit: Circuit
    policies: Policies
    step: Step | None
    """None for the start state."""
    powered: bool
    """The stage that the step belongs to."""
    trusted_ports: frozenset[str]
    solution: Solution
    fitted: Mapping[str, str]
    """Gauge to the test point at which it is fitted at present."""
    running: frozenset[str]
    moved: frozenset[str]
    """Actuators that moved on the way."""
    travel: Mapping[str, Travel]
    """Where each actuator stands now."""
    guarded: str = ""
    """Cylinder whose guard was looked at since a valve was last moved for anything else."""
    held: AtStop | None = None
    """Cylinder that is held at its stop, or on its way there, since a step ran it."""


Check = Callable[[Moment], tuple[str, dict[str, Amount | str]] | None]


def established(moment: Moment) -> tuple[str, dict[str, Amount | str]] | None:
    if moment.solution.established and not moment.solution.loose_ports - moment.trusted_ports:
        return None
    return moment.step.subject if moment.step else "", {}


def within_rating(moment: Moment) -> tuple[str, dict[str, Amount | str]] | None:
    for node, pressure_bar in zip(moment.circuit.nodes, moment.solution.pressures_bar, strict=True):
        if pressure_bar > node.rating_bar + _DUST_BAR:
            return node.rated_by, {
                "line": node.name,
                "pressure": bar(pressure_bar),
                "rating": bar(node.rating_bar),
            }
    return None


def still(moment: Moment) -> tuple[str, dict[str, Amount | str]] | None:
    """Nothing moves with a drive on but what the step itself names, the way that the machine file allows.

    A lever that is worked to relieve a line may let a cylinder settle.
    """
    strays = moment.moved - _named(moment)
    if not moment.running or not strays:
        return None
    return min(strays), {}


def _named(moment: Moment) -> frozenset[str]:
    """The cylinder that a step runs to its stop: with the file's leave, its guard looked at, and that way."""
    runs = moment.step.runs if moment.step is not None else None
    if runs is None or moment.guarded != runs.actuator:
        return frozenset()
    part = moment.machine.parts[runs.actuator]
    leave = part.may_run_to_stop if isinstance(part, Cylinder) else None
    allowed: Stop | None = None
    if leave is not None:
        allowed = "far stop" if leave.stop == "extended" else "near stop"
    right_way = moment.travel[runs.actuator] in ("between", allowed)
    return frozenset({runs.actuator}) if allowed == runs.stop and right_way else frozenset()


def at_stop(moment: Moment) -> tuple[str, dict[str, Amount | str]] | None:
    """While a cylinder is held against its stop nothing counts as read before it stands there."""
    held, step = moment.held, moment.step
    if held is None or step is None or moment.travel[held.actuator] == held.stop:
        return None
    if step.kind in MUST_REACH or (step.reading is not None and step.runs is None):
        return held.actuator, {"step": step.kind.value}
    return None


def filled(moment: Moment) -> tuple[str, dict[str, Amount | str]] | None:
    if not moment.solution.voids:
        return None
    return moment.circuit.nodes[min(moment.solution.voids)].name, {}


def drive_carries(moment: Moment) -> tuple[str, dict[str, Amount | str]] | None:
    for drive, load in drive_loads(moment.circuit, moment.solution).items():
        motor = moment.machine.parts[drive]
        if isinstance(motor, ElectricMotor) and load.shaft_kw > motor.power_kw * motor.service_factor:
            return drive, {"asked": kw(load.shaft_kw), "carries": kw(motor.power_kw * motor.service_factor)}
    return None


def not_opened_under_pressure(moment: Moment) -> tuple[str, dict[str, Amount | str]] | None:
    """Gauges come on and off only where the line stands at zero."""
    step = moment.step
    if step is None or step.kind not in (StepKind.FIT_GAUGE, StepKind.REMOVE_GAUGE):
        return None
    return _pressure_at(moment, str(step.data["test_point"]))


def zero(moment: Moment) -> tuple[str, dict[str, Amount | str]] | None:
    step = moment.step
    if step is None or step.kind is not StepKind.VERIFY_ZERO:
        return None
    return _pressure_at(moment, str(step.data["test_point"]))


def _pressure_at(moment: Moment, test_point: str) -> tuple[str, dict[str, Amount | str]] | None:
    pressure_bar = moment.solution.pressure_at(f"{test_point}.P")
    if pressure_bar <= moment.policies.zero_limit_bar:
        return None
    return test_point, {"pressure": bar(pressure_bar)}


def locked(moment: Moment) -> tuple[str, dict[str, Amount | str]] | None:
    """No drive runs in a locked stage once it is stopped."""
    step = moment.step
    if moment.powered or step is None or step.kind is StepKind.TELL_BEFORE or not moment.running:
        return None
    return min(moment.running), {}


def gauge_within(moment: Moment) -> tuple[str, dict[str, Amount | str]] | None:
    for id_, gauge in moment.machine.gauges.items():
        node = moment.circuit.node_of.get(gauge_port(id_, moment.fitted.get(id_, "")), TANK)
        pressure_bar = moment.solution.pressures_bar[node]
        if pressure_bar > gauge.rating_bar + _DUST_BAR:
            return id_, {"pressure": bar(pressure_bar), "rating": bar(gauge.rating_bar)}
    return None


def gauge_fitted(moment: Moment) -> tuple[str, dict[str, Amount | str]] | None:
    """What is read for the job was fitted before; a gauge that is fixed on a line always shows."""
    step = moment.step
    if step is None:
        return None
    reads = {} if step.reading is None else {step.reading.gauge: step.reading.test_point}
    reads |= {band.gauge: moment.fitted.get(band.gauge, "") for band in step.bands}
    if step.kind is StepKind.VERIFY_ZERO:
        reads[step.subject] = str(step.data["test_point"])
    for gauge, test_point in reads.items():
        fixed = not moment.machine.gauges[gauge].fitted_at
        if not fixed and (not test_point or moment.fitted.get(gauge) != test_point):
            return gauge, {"test_point": test_point}
    return None


CHECKS: Mapping[Invariant, Check] = {
    Invariant.WITHIN_RATING: within_rating,
    Invariant.STILL: still,
    Invariant.FILLED: filled,
    Invariant.DRIVE_CARRIES: drive_carries,
    Invariant.NOT_OPENED_UNDER_PRESSURE: not_opened_under_pressure,
    Invariant.ZERO: zero,
    Invariant.LOCKED: locked,
    Invariant.GAUGE_WITHIN: gauge_within,
    Invariant.GAUGE_FITTED: gauge_fitted,
    Invariant.AT_STOP: at_stop,
}
"""Held on the start state and after every step, once its pressures are established."""
