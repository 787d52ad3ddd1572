"""Replays a procedure on the model from a set of starts, and judges it by its invariants.

The procedure is taken as it is printed: its actions, its readings, its order. How it was found doesn't count.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, replace

from sheets.amounts import Finding, Severity, bar
from sheets.circuit.model import Circuit
from sheets.circuit.plant import AtStop, MoveValve, PlantState
from sheets.circuit.solution import Solution
from sheets.circuit.step import take_steps
from sheets.circuit.verdict import Verdict
from sheets.machine.model import Machine
from sheets.machine.site import Policies
from sheets.procedure.gauges import gauge_port
from sheets.procedure.steps import MUST_REACH, Procedure, Stage, Step, StepKind
from sheets.targets.settings import Targets
from sheets.trial.invariants import CHECKS, Invariant, Moment, Violation, established

READING_DUST_BAR = 0.01
"""A replayed reading may differ from the printed one by this: the path differs, the answer must not."""
_JUDGED_KINDS = frozenset(
    {
        StepKind.START,
        StepKind.HOLD_VALVE,
        StepKind.RUN_TO_STOP,
        StepKind.HOLD_RUNNING,
        StepKind.CLOSE_GRADUALLY,
        StepKind.COME_UP,
        StepKind.LOCK_NUT,
        StepKind.READ_AGAIN,
    }
)
"""Steps that end the work where the reading isn't what they print."""


_ENDED_BY_STOPPING = frozenset({Invariant.DRIVE_CARRIES, Invariant.AT_STOP})
"""What a step itself sees and ends: a load that a reading stops, a cylinder that stops short."""


@dataclass(frozen=True, kw_only=True)
class Start:
    """How the adjusters stand before the job."""

    name: str
    settings_bar: Mapping[str, float]
    as_printed: bool
    """The printed readings were computed from this start."""
    in_service: bool = False
    """The drives run when the job begins, so that lines hold pressure once they stop."""
    loaded: bool = True
    """The work loads of the file act throughout; without them whatever isn't blocked moves."""


@dataclass(frozen=True, kw_only=True)
class Traced:
    """One step as replayed."""

    stage: int
    step: int
    solution: Solution


@dataclass(frozen=True, kw_only=True)
class Run:
    """A replay from one start."""

    start: Start
    trace: tuple[Traced, ...]
    violations: tuple[Violation, ...]
    stopped_at: tuple[int, int] | None
    """Stage and step whose printed reading tells to stop; None for a run that goes to its end."""


@dataclass(frozen=True, kw_only=True)
class Replay:
    """All replays with one verdict. Only an established one lets anything be issued."""

    verdict: Verdict
    runs: tuple[Run, ...]

    @property
    def violations(self) -> tuple[Violation, ...]:
        return tuple(violation for run in self.runs for violation in run.violations)


def starts_of(circuit: Circuit, targets: Targets) -> tuple[Start, ...]:
    """All at target, standing and in service; all backed out; each one alone at the end of its range.

    Nobody knows how screws stand before they are read, nor whether work is left in the machine: so the steps
    must hold from all of these, each with the work loads and without.
    """
    at_target = {site.id: site.highest_bar for site in circuit.adjusters} | targets.settings_bar()
    all_out = {site.id: site.lowest_bar for site in circuit.adjusters}
    starts = [
        Start(name="all at target", settings_bar=at_target, as_printed=True),
        Start(name="in service", settings_bar=at_target, as_printed=True, in_service=True),
        Start(name="all backed out", settings_bar=all_out, as_printed=False),
    ]
    starts += [
        Start(
            name=f"{site.id} at its stop",
            settings_bar={**at_target, site.id: site.highest_bar},
            as_printed=False,
        )
        for site in circuit.adjusters
    ]
    return (*starts, *(replace(start, name=f"{start.name}, no work load", loaded=False) for start in starts))


def replay(
    machine: Machine,
    circuit: Circuit,
    targets: Targets,
    policies: Policies,
    procedure: Procedure,
    *,
    trusted_ports: frozenset[str] = frozenset(),
) -> Replay:
    """Runs the procedure from every start of the set.

    From the printed start every reading must come out as printed. From the others a reading may end the work
    as its step says; else what the steps set must be on target at the end. A procedure without stages is
    refuted: there is nothing to run.
    """
    if not procedure.stages:
        return Replay(verdict=Verdict.REFUTED, runs=())
    runs = _Runner(machine, circuit, policies, trusted_ports, starts_of(circuit, targets)).run(
        procedure, targets
    )
    broken = {violation.invariant for run in runs for violation in run.violations}
    if Invariant.ESTABLISHED in broken:
        verdict = Verdict.NOT_ESTABLISHED
    else:
        verdict = Verdict.REFUTED if broken else Verdict.ESTABLISHED
    return Replay(verdict=verdict, runs=runs)


class _Runner:
    """All starts on their way together, so that each step is one batch for the solver."""

    def __init__(
        self,
        machine: Machine,
        circuit: Circuit,
        policies: Policies,
        trusted_ports: frozenset[str],
        starts: tuple[Start, ...],
    ) -> None:
        self.machine, self.circuit, self.policies = machine, circuit, policies
        self.trusted_ports, self.starts = trusted_ports, starts
        standing = [_standing(circuit, start) for start in starts]
        outcomes = take_steps(circuit, [(state, None) for state in standing], runs=())
        self.states = [outcome.state for outcome in outcomes]
        self.solutions = [outcome.solution for outcome in outcomes]
        self.fitted: dict[str, str] = {}
        self.guarded = ""
        self.held: AtStop | None = None
        self.traces: list[list[Traced]] = [[] for _ in starts]
        self.violations: list[list[Violation]] = [[] for _ in starts]
        self.stopped_at: list[tuple[int, int] | None] = [None] * len(starts)

    def run(self, procedure: Procedure, targets: Targets) -> tuple[Run, ...]:
        for index in range(len(self.starts)):
            self._hold(index, None, frozenset(), False, 0, -1)
        for at, stage in enumerate(procedure.stages):
            for place, step in enumerate(stage.steps):
                self._step(stage, step, at, place)
        for index, state in enumerate(self.states):
            if self.stopped_at[index] is None:
                self.violations[index].extend(_off_target(procedure, targets, state))
                self.violations[index].extend(self._left_behind(procedure, state))
        return tuple(
            Run(start=start, trace=tuple(trace), violations=tuple(violations), stopped_at=stopped)
            for start, trace, violations, stopped in zip(
                self.starts, self.traces, self.violations, self.stopped_at, strict=True
            )
        )

    def _step(self, stage: Stage, step: Step, at: int, place: int) -> None:
        moved: list[frozenset[str]] = [frozenset()] * len(self.starts)
        may_run = () if step.runs is None else (step.runs.actuator,)
        if step.runs is not None:
            self.held = step.runs
        elif any(isinstance(action, MoveValve) for action in step.actions):
            self.guarded, self.held = "", None
        if step.kind is StepKind.GUARD_RUN:
            self.guarded = step.subject
        for action in step.actions:
            outcomes = take_steps(self.circuit, [(state, action) for state in self.states], runs=may_run)
            self.states = [outcome.state for outcome in outcomes]
            self.solutions = [outcome.solution for outcome in outcomes]
            moved = [before | outcome.moved for before, outcome in zip(moved, outcomes, strict=True)]
        if step.kind is StepKind.FIT_GAUGE:
            self.fitted[step.subject] = str(step.data["test_point"])
        for index, start in enumerate(self.starts):
            if self.stopped_at[index] is not None:
                continue
            stops = not start.as_printed and (
                self._tells_to_stop(step, self.solutions[index]) or self._stops_short(step, index)
            )
            self._hold(index, step, moved[index], stage.powered, at, place, stopping=stops)
            if stops:
                self.stopped_at[index] = (at, place)
            elif self.solutions[index].established:
                self.violations[index].extend(self._misread(step, self.solutions[index], start, at, place))
        if step.kind is StepKind.REMOVE_GAUGE:
            self.fitted.pop(step.subject, None)

    def _tells_to_stop(self, step: Step, solution: Solution) -> bool:
        """Whether the printed reading of a step ends the work: the plant isn't as it was printed for."""
        reading = step.reading
        if reading is None or not solution.established:
            return False
        seen_bar = solution.pressure_at(gauge_port(reading.gauge, reading.test_point))
        outside = not reading.low_bar - READING_DUST_BAR <= seen_bar <= reading.high_bar + READING_DUST_BAR
        return (outside and step.kind in _JUDGED_KINDS) or seen_bar > reading.stop_above_bar

    def _stops_short(self, step: Step, index: int) -> bool:
        """Whether a cylinder that must reach its stop stands short of it: the step says to end the work."""
        runs = step.runs
        return (
            runs is not None
            and step.kind in MUST_REACH
            and self.states[index].travel[runs.actuator] != runs.stop
        )

    def _hold(
        self,
        index: int,
        step: Step | None,
        moved: frozenset[str],
        powered: bool,
        at: int,
        place: int,
        *,
        stopping: bool = False,
    ) -> None:
        """Holds every invariant on one plant as it stands, but for what the step itself sees and ends."""
        solution = self.solutions[index]
        moment = Moment(
            machine=self.machine,
            circuit=self.circuit,
            policies=self.policies,
            step=step,
            powered=powered,
            trusted_ports=self.trusted_ports,
            solution=solution,
            fitted=dict(self.fitted),
            running=self.states[index].running,
            moved=moved | solution.moving,
            travel=self.states[index].travel,
            guarded=self.guarded,
            held=self.held,
        )
        self.traces[index].append(Traced(stage=at, step=place, solution=solution))
        checks = CHECKS if established(moment) is None else {Invariant.ESTABLISHED: established}
        for invariant, check in checks.items():
            broken = check(moment)
            if broken is not None and not (stopping and invariant in _ENDED_BY_STOPPING):
                subject, data = broken
                self.violations[index].append(
                    Violation(invariant=invariant, stage=at, step=place, subject=subject, data=data)
                )

    def _misread(
        self, step: Step, solution: Solution, start: Start, stage: int, place: int
    ) -> Iterator[Violation]:
        """From the printed start each reading comes out as printed."""
        reading = step.reading
        if reading is None or not start.as_printed:
            return
        seen_bar = solution.pressure_at(gauge_port(reading.gauge, reading.test_point))
        outside = not reading.low_bar - READING_DUST_BAR <= seen_bar <= reading.high_bar + READING_DUST_BAR
        if outside or abs(seen_bar - reading.expected_bar) > READING_DUST_BAR:
            yield Violation(
                invariant=Invariant.READS_RIGHT,
                stage=stage,
                step=place,
                subject=reading.gauge,
                data={
                    "reading": bar(seen_bar),
                    "low": bar(reading.low_bar),
                    "high": bar(reading.high_bar),
                    "start": start.name,
                },
            )

    def _left_behind(self, procedure: Procedure, state: PlantState) -> Iterator[Violation]:
        """At the end every valve stands as in service, and what was fitted is off."""
        at, place = len(procedure.stages) - 1, len(procedure.stages[-1].steps) - 1
        for valve, positions in self.circuit.positions.items():
            if state.positions[valve] != positions[0]:
                yield Violation(
                    invariant=Invariant.AS_IN_SERVICE,
                    stage=at,
                    step=place,
                    subject=valve,
                    data={"position": state.positions[valve], "rest": positions[0]},
                )
        for gauge, test_point in self.fitted.items():
            yield Violation(
                invariant=Invariant.GAUGES_OFF,
                stage=at,
                step=place,
                subject=gauge,
                data={"test_point": test_point},
            )


def _standing(circuit: Circuit, start: Start) -> PlantState:
    """The plant before the job: valves at rest, settings of the start, drives as it says."""
    state = replace(circuit.rest_state(start.settings_bar), loaded=start.loaded)
    for drive in circuit.drives if start.in_service else ():
        state = state.driven(drive, on=True)
    return state


def _off_target(procedure: Procedure, targets: Targets, state: PlantState) -> Iterator[Violation]:
    """At the end every adjuster that the task sets stands at its target; reading alone sets none."""
    for adjuster in sorted({stage.adjuster for stage in procedure.stages if stage.adjuster}):
        target_bar = targets.settings[adjuster].target_bar
        if abs(state.settings_bar[adjuster] - target_bar) > READING_DUST_BAR:
            yield Violation(
                invariant=Invariant.ON_TARGET,
                stage=len(procedure.stages) - 1,
                step=len(procedure.stages[-1].steps) - 1,
                subject=adjuster,
                data={"setting": bar(state.settings_bar[adjuster]), "target": bar(target_bar)},
            )


def findings_of(result: Replay) -> tuple[Finding, ...]:
    """Violations as findings, each kind once for a subject."""
    found: dict[tuple[Invariant, str], Finding] = {}
    for violation in result.violations:
        unknown = violation.invariant is Invariant.ESTABLISHED
        found.setdefault(
            (violation.invariant, violation.subject),
            Finding(
                code=violation.invariant.value,
                severity=Severity.NOT_ESTABLISHED if unknown else Severity.REFUSED,
                subject=violation.subject,
                data=violation.data,
            ),
        )
    return tuple(found.values())
