"""Steps and stages: what is done, why, and what is read, before any word is chosen."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from enum import Enum

from sheets.amounts import Amount, Finding
from sheets.circuit.plant import AtStop, PlantAction
from sheets.circuit.verdict import Verdict
from sheets.energy.trapped import Trapped
from sheets.procedure.answers import Search
from sheets.procedure.conditions import Failure
from sheets.procedure.order import Order
from sheets.procedure.task import Task


class StepKind(Enum):
    """One instruction; the value names its sentence."""

    TELL_BEFORE = "tell_before"
    TELL_AFTER = "tell_after"
    PRESS_STOP = "press_stop"
    ISOLATE = "isolate"
    BLOCK = "block"
    OPEN_VENT = "open_vent"
    WORK_LEVER = "work_lever"
    ATTEMPT_START = "attempt_start"
    FIT_GAUGE = "fit_gauge"
    VERIFY_ZERO = "verify_zero"
    VERIFY_DEAD = "verify_dead"
    SET_VALVE = "set_valve"
    CHECK_VALVE = "check_valve"
    CLEAR_TOOLS = "clear_tools"
    CLEAR_PEOPLE = "clear_people"
    REMOVE_LOCKS = "remove_locks"
    RESTORE_SUPPLY = "restore_supply"
    START = "start"
    WARM_OIL = "warm_oil"
    CLOSE_GRADUALLY = "close_gradually"
    OPEN_AGAIN = "open_again"
    HOLD_VALVE = "hold_valve"
    GUARD_RUN = "guard_run"
    RUN_TO_STOP = "run_to_stop"
    HOLD_RUNNING = "hold_running"
    RAISE_TO_STOP = "raise_to_stop"
    LET_GO = "let_go"
    READ = "read"
    READ_AGAIN = "read_again"
    NOT_REACHED = "not_reached"
    LEAVE_ALONE = "leave_alone"
    BACK_OUT = "back_out"
    RUN_IN = "run_in"
    RUN_AHEAD = "run_ahead"
    TURN_BELOW = "turn_below"
    COME_UP = "come_up"
    LOCK_NUT = "lock_nut"
    REMOVE_GAUGE = "remove_gauge"
    INSPECT = "inspect"
    LOOK_WHERE = "look_where"
    UNBLOCK = "unblock"
    WATCH = "watch"


MUST_REACH = frozenset({StepKind.RUN_TO_STOP, StepKind.RAISE_TO_STOP})
"""Steps that end only when the cylinder that they run stands at its stop; short of it the work ends."""


class StageKind(Enum):
    """Kinds of stage, in the order in which they first appear."""

    ISOLATE = "isolate"
    DEADHEAD = "deadhead"
    AS_FOUND = "as_found"
    SET = "set"
    CHECK = "check"
    LOCK_AGAIN = "lock_again"
    RETURN = "return"


@dataclass(frozen=True, kw_only=True)
class Reading:
    """What a gauge shows after a step, as simulated, with what is accepted."""

    adjuster: str
    """Adjuster that governs it."""
    gauge: str
    test_point: str
    expected_bar: float
    low_bar: float
    high_bar: float
    never_exceed_bar: float
    band_low_bar: float
    """Below this, or past the next, a setting as found has a cause that comes before any adjusting."""
    stop_above_bar: float
    """Past this something is wrong, long before a rating is reached: the work stops there."""
    graduation_bar: float


@dataclass(frozen=True, kw_only=True)
class Band:
    """A gauge that tells something beside the governing one: it stays within a band."""

    gauge: str
    low_bar: float
    high_bar: float
    graduation_bar: float


@dataclass(frozen=True, kw_only=True)
class Trace:
    """What the simulation gave for a step."""

    established: bool
    moving: frozenset[str]
    pressures_bar: tuple[float, ...]
    drive_kw: float
    """Largest load of a drive."""
    shaft_kw: float
    """Load of all drives together."""
    relief_kw: float
    """Power that turns to heat over reliefs."""


@dataclass(frozen=True, kw_only=True)
class Step:
    """One instruction."""

    kind: StepKind
    subject: str
    """Part, adjuster, gauge, supply or control that it is about; empty where it is about people."""
    data: Mapping[str, Amount | str] = field(default_factory=dict)
    reason: Failure | None = None
    """What fails if it is left out."""
    actions: tuple[PlantAction, ...] = ()
    """What it does to the plant, in order."""
    runs: AtStop | None = None
    """The one movement that it names: this cylinder runs to this stop, or stops short of it."""
    reading: Reading | None = None
    bands: tuple[Band, ...] = ()
    trace: Trace | None = None
    """Only for steps that act on the plant."""


@dataclass(frozen=True, kw_only=True)
class Stage:
    """Steps that belong together under one state of power."""

    kind: StageKind
    powered: bool
    adjuster: str
    """Adjuster that is set; empty for the others."""
    steps: tuple[Step, ...]


@dataclass(frozen=True, kw_only=True)
class Procedure:
    """The job for one machine, found and ordered, every step simulated."""

    task: Task
    verdict: Verdict
    stages: tuple[Stage, ...]
    search: Search
    order: Order
    trapped: Trapped
    findings: tuple[Finding, ...]
    """Refusals and warnings of search, order and simulation."""
