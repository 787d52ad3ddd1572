"""A plant that a procedure is tried on while it is written: each step acts, and its readings are noted."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import replace

from sheets.amounts import Amount, Finding, Severity, bar
from sheets.circuit.drive_load import drive_loads, hydraulic_power
from sheets.circuit.model import Circuit
from sheets.circuit.plant import AtStop, PlantAction, PlantState
from sheets.circuit.solution import Solution
from sheets.circuit.solver import solve_one
from sheets.circuit.step import Outcome, take_step
from sheets.machine.model import Machine
from sheets.procedure.conditions import OWN_SHARE, Failure, over_rating
from sheets.procedure.gauges import GaugeChoice, graduation_bar
from sheets.procedure.steps import MUST_REACH, Band, Reading, Step, StepKind, Trace

AS_FOUND_SHARE = 0.10
"""Policy: a setting that is out by more than this has a cause to be found before it is adjusted."""
AS_FOUND_LEAST_BAR = 3.0
OLD_PRESSURE_BAR = 0.05
"""Above what the line shows without a past, it is pressure that was shut in before."""
_DUST = 1e-6
"""Of a graduation: a band that ends on one doesn't take the next."""


class Rig:
    """Holds the plant state while steps are written. The only mutable thing in this stage."""

    def __init__(self, machine: Machine, circuit: Circuit, state: PlantState) -> None:
        self.machine = machine
        self.circuit = circuit
        self.state = state
        self.steps: list[Step] = []
        self.findings: list[Finding] = []
        self.gauge: GaugeChoice | None = None
        """Gauge that the steps read at present."""
        self.unknown: set[str] = set()
        """Adjusters of which nobody knows how they stand until they are set."""
        self.backed_out: set[str] = set()
        """Adjusters that stand anywhere below their range until they come up to their target."""
        self.fitted: dict[str, str] = {}
        """Gauge to the test point at which it is fitted."""
        self.locks: set[str] = set()
        """Hand valves that hang on a lock of this job."""

    def take_steps(self) -> tuple[Step, ...]:
        """The steps since the last call."""
        steps, self.steps = tuple(self.steps), []
        return steps

    def turned(self, valve: str, *, lock: bool = False) -> dict[str, Amount | str]:
        """What a step that turns a hand valve says of its lock: taken off before, put on after."""
        off = valve in self.locks
        self.locks.discard(valve)
        if lock:
            self.locks.add(valve)
        return {"unlock": "yes" if off else "", "lock": "yes" if lock else ""}

    def say(self, kind: StepKind, subject: str = "", **data: Amount | str) -> None:
        """A step that doesn't act on the plant."""
        self.steps.append(Step(kind=kind, subject=subject, data=data))

    def do(
        self,
        kind: StepKind,
        subject: str,
        *actions: PlantAction,
        reason: Failure | None = None,
        window_of: str = "",
        data: Mapping[str, Amount | str] | None = None,
        runs: AtStop | None = None,
    ) -> None:
        """A step that acts on the plant; its readings are those after the last action.

        ``window_of`` names the adjuster whose window the reading must lie in; without it the reading is a
        band around what is expected. ``runs`` is the one movement that the step names.
        """
        for action in actions:
            self._act(kind, subject, action, runs)
        if runs is not None and kind in MUST_REACH and self.state.travel[runs.actuator] != runs.stop:
            self._find("step_stops_short", Severity.REFUSED, runs.actuator, {"step": kind.value})
        solution = self.look()
        if window_of or kind is StepKind.TURN_BELOW:
            self._refuse_old_pressure(solution, window_of or subject)
        self.steps.append(
            Step(
                kind=kind,
                subject=subject,
                data=data or {},
                reason=reason,
                actions=actions,
                runs=runs,
                reading=self._reading(solution, window_of),
                bands=self._bands(solution),
                trace=self._trace(solution),
            )
        )

    def _act(self, kind: StepKind, subject: str, action: PlantAction, runs: AtStop | None) -> None:
        before = self.state
        may_run = frozenset() if runs is None else frozenset({runs.actuator})
        result = take_step(self.circuit, before, action, runs=may_run)
        self.state = result.state
        strays = result.moved - may_run
        if runs is not None and self.state.travel[runs.actuator] not in ("between", runs.stop):
            strays |= may_run
        if result.outcome is Outcome.NOT_ESTABLISHED:
            self._find("step_not_established", Severity.NOT_ESTABLISHED, subject, {"step": kind.value})
        elif (strays or result.outcome is Outcome.CYCLING) and self.state.running:
            self._find("step_moves", Severity.REFUSED, subject, {"step": kind.value})
        for solution in result.passes:
            over = over_rating(solution) if solution.established else None
            if over is not None:
                self._find("step_over_rating", Severity.REFUSED, str(over.data["part"]), dict(over.data))

    def _refuse_old_pressure(self, solution: Solution, adjuster: str) -> None:
        """A gauge on a line that keeps what stood there before shows nothing of a setting that is lower."""
        if self.gauge is None or not self.state.running or not solution.established:
            return
        node = self.circuit.node_of[self.gauge.port]
        empty = replace(self.state, pressures_bar=(0.0,) * len(self.state.pressures_bar))
        follows = solve_one(self.circuit, empty)
        kept_bar, held_bar = solution.pressures_bar[node], follows.pressures_bar[node]
        seen_bar = max(OLD_PRESSURE_BAR, self.gauge.graduation_bar / 2.0)
        told = any((one.code, one.subject) == ("line_keeps_pressure", adjuster) for one in self.findings)
        if follows.established and kept_bar > held_bar + seen_bar and not told:
            data: dict[str, Amount | str] = {
                "gauge": self.gauge.gauge,
                "kept": bar(kept_bar),
                "held": bar(held_bar),
            }
            self._find("line_keeps_pressure", Severity.REFUSED, adjuster, data)

    def look(self) -> Solution:
        """The plant as it stands, solved with effects."""
        return solve_one(self.circuit, self.state, effects=True)

    def _trace(self, solution: Solution) -> Trace:
        loads = drive_loads(self.circuit, solution).values() if solution.established else ()
        return Trace(
            established=solution.established,
            moving=solution.moving,
            pressures_bar=solution.pressures_bar,
            drive_kw=max((load.shaft_kw for load in loads), default=0.0),
            shaft_kw=sum(load.shaft_kw for load in loads),
            relief_kw=sum(
                hydraulic_power(
                    pressure_bar=solution.pressures_bar[site.controlled_node],
                    flow_lpm=solution.flows_lpm[site.part],
                )
                for site in self.circuit.adjusters
                if site.reference_flow_lpm > 0.0
            ),
        )

    def relief_kw(self) -> float:
        """Power that turns to heat over reliefs at present."""
        return self._trace(self.look()).relief_kw

    def _find(self, code: str, severity: Severity, subject: str, data: Mapping[str, Amount | str]) -> None:
        finding = Finding(code=code, severity=severity, subject=subject, data=data)
        if finding not in self.findings:
            self.findings.append(finding)

    def _reading(self, solution: Solution, window_of: str) -> Reading | None:
        choice = self.gauge
        if choice is None or not self.state.running or not solution.established:
            return None
        node = self.circuit.node_of[choice.port]
        expected_bar = solution.pressures_bar[node]
        governs = window_of or _governor(solution, node)
        low_bar, high_bar = self._band(expected_bar, choice.graduation_bar)
        if governs in self.unknown and governs not in self.backed_out:
            high_bar = max(high_bar, self._at_stop(solution, governs, node, choice.graduation_bar))
        band_low_bar, beyond_bar = low_bar, high_bar
        if window_of:
            low_bar, high_bar = choice.window.low_bar, choice.window.high_bar
        return Reading(
            adjuster=governs,
            gauge=choice.gauge,
            test_point=choice.test_point,
            expected_bar=expected_bar,
            low_bar=low_bar,
            high_bar=high_bar,
            never_exceed_bar=choice.never_exceed_bar,
            band_low_bar=band_low_bar,
            stop_above_bar=min(beyond_bar, choice.never_exceed_bar),
            graduation_bar=choice.graduation_bar,
        )

    def _bands(self, solution: Solution) -> tuple[Band, ...]:
        """Other fitted gauges, where they stand on another line than the governing one."""
        if self.gauge is None or not self.state.running or not solution.established:
            return ()
        here = self.circuit.node_of[self.gauge.port]
        bands = []
        for id_, test_point in self.fitted.items():
            node = self.circuit.node_of[f"{test_point}.P"]
            if node != here:
                graduation = graduation_bar(self.machine.gauges[id_])
                low_bar, high_bar = self._band(solution.pressures_bar[node], graduation)
                bands.append(Band(gauge=id_, low_bar=low_bar, high_bar=high_bar, graduation_bar=graduation))
        return tuple(bands)

    def governor(self) -> str:
        """Adjuster that the gauge's pressure follows at present; empty where none does."""
        if self.gauge is None:
            return ""
        return _governor(self.look(), self.circuit.node_of[self.gauge.port])

    def _at_stop(self, solution: Solution, adjuster: str, node: int, graduation: float) -> float:
        """What a node may show, up to a graduation, if an unknown adjuster stands at the end of its range."""
        site = next(site for site in self.circuit.adjusters if site.id == adjuster)
        more_bar = site.highest_bar - self.state.settings_bar[adjuster]
        highest_bar = solution.pressures_bar[node] + solution.effects[adjuster][node] * more_bar
        return math.ceil(highest_bar / graduation - 1e-6) * graduation

    def _band(self, expected_bar: float, graduation: float) -> tuple[float, float]:
        """What a reading may be before a setting is made: out by the policy share, outward to graduations.

        With an adjuster backed out, anything from zero up is right: its lowest setting isn't a known figure.
        """
        low_bar, high_bar = as_found_band(expected_bar=expected_bar, graduation_bar=graduation)
        return (0.0 if self.backed_out else low_bar), high_bar


def as_found_band(*, expected_bar: float, graduation_bar: float) -> tuple[float, float]:
    """Readings outside which a setting as found has a cause that is looked for before anyone adjusts.

    Both in bar, outward to graduations. Policy: a share of what is expected, or a least figure.
    """
    half_bar = max(AS_FOUND_SHARE * expected_bar, AS_FOUND_LEAST_BAR)
    low_bar = math.floor((expected_bar - half_bar) / graduation_bar + _DUST) * graduation_bar
    high_bar = math.ceil((expected_bar + half_bar) / graduation_bar - _DUST) * graduation_bar
    return max(0.0, low_bar), high_bar


def _governor(solution: Solution, node: int) -> str:
    """Adjuster that the pressure at a node follows; empty where none does."""
    strongest = max(solution.effects, key=lambda id_: solution.effects[id_][node], default="")
    return strongest if strongest and solution.effects[strongest][node] >= OWN_SHARE else ""
