"""Which gauge shows an adjuster's pressure in a state, and how well."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from sheets.amounts import Amount, Finding, Severity, bar, ratio
from sheets.circuit.model import Circuit
from sheets.machine.model import Machine
from sheets.machine.parts import DialGauge, DigitalGauge
from sheets.machine.site import Policies
from sheets.procedure.conditions import SAME_PRESSURE_BAR, Condition, Failure
from sheets.targets.reading import (
    ReadingWindow,
    accuracy_ratio,
    as_set_bar,
    never_exceed_bar,
    reading_window,
)
from sheets.targets.settings import Origin, Setting

WORKING_SHARE = (0.25, 0.75)
"""Working point of a dial, as a share of its scale."""


@dataclass(frozen=True, kw_only=True)
class GaugeChoice:
    """A gauge at a test point, with what is read on it."""

    gauge: str
    test_point: str
    """Where it is fitted for the job; empty for a gauge that is fixed on a line."""
    window: ReadingWindow
    target_bar: float
    """Reading to come to."""
    never_exceed_bar: float
    error_bar: float
    graduation_bar: float
    accuracy_ratio: float
    findings: tuple[Finding, ...]
    floor_bar: float
    """A reading below it lies outside the order of limits: in a neighbour's window, or under the work."""
    ceiling_bar: float
    """A reading above it does: in a neighbour's window, or past the end of the adjuster's range."""

    @property
    def port(self) -> str:
        """Port at which it reads."""
        return gauge_port(self.gauge, self.test_point)


def gauge_port(gauge: str, test_point: str) -> str:
    """Port at which a gauge reads: the test point's, or its own where it is fixed."""
    return f"{test_point}.P" if test_point else f"{gauge}.P"


def error_bar(gauge: DialGauge | DigitalGauge) -> float:
    """Largest error of a gauge in bar: class times range of a dial, stated error of a digital one."""
    if isinstance(gauge, DialGauge):
        return gauge.range_bar * gauge.accuracy_class / 100.0
    return gauge.error_bar


def graduation_bar(gauge: DialGauge | DigitalGauge) -> float:
    """Smallest division of a dial, resolution of a digital gauge; bar."""
    return gauge.graduation_bar if isinstance(gauge, DialGauge) else gauge.resolution_bar


@dataclass(frozen=True, kw_only=True)
class Worst:
    """Highest pressure that a node comes to in or near a test state, and what leads to it."""

    pressure_bar: float
    cause: Mapping[str, str] = field(default_factory=dict)
    """``slip``: valve, screw or fault; with the valve or part, its position, the adjuster, the fault."""


@dataclass(frozen=True, kw_only=True)
class Readings:
    """What a gauge on a node would show in one test state; all in bar."""

    node: int
    pressures_bar: tuple[float, ...]
    """Of all nodes at the target."""
    target_bar: float
    low_bar: float
    high_bar: float
    """What the setting and its window convert to."""
    worst: tuple[Worst, ...]
    """Of every node, with the screw at its stop, after one slip, with one fault."""
    rating_bar: float
    """Lowest rating that the pressure comes to, in the state and in service."""
    rated_by: str
    """Part that has it."""
    floor_bar: float
    ceiling_bar: float
    """Bounds of a widened window."""


def choose_gauge(
    machine: Machine, circuit: Circuit, policies: Policies, setting: Setting, readings: Readings
) -> GaugeChoice | Failure:
    """The gauge that shows this reading best, in the order of the file where several do.

    A gauge that one slip or one fault would over-range, or whose error is as wide as the window, is refused.
    """
    best: tuple[tuple[int, float], GaugeChoice] | None = None
    nothing = Failure(condition=Condition.SEEN, data={"line": circuit.nodes[readings.node].name})
    failures: list[Failure] = []
    controlled_bar = readings.pressures_bar[readings.node]
    for id_, gauge in machine.gauges.items():
        for test_point in gauge.fitted_at or ("",):
            place = circuit.node_of.get(gauge_port(id_, test_point))
            if place is None or abs(readings.pressures_bar[place] - controlled_bar) > SAME_PRESSURE_BAR:
                continue
            outcome = _judge(id_, gauge, test_point, policies, setting, readings, readings.worst[place])
            if isinstance(outcome, Failure):
                failures.append(outcome)
            else:
                rank = (len(outcome.findings), -min(outcome.accuracy_ratio, policies.accuracy_ratio))
                if best is None or rank < best[0]:
                    best = (rank, outcome)
            break
    return best[1] if best else min(failures, key=_share_over, default=nothing)


def _share_over(failure: Failure) -> float:
    """How far a gauge is over-ranged, as a share of what it carries; one that fails otherwise is nearer."""
    over, most = failure.data.get("over"), failure.data.get("most")
    return over.value / most.value if isinstance(over, Amount) and isinstance(most, Amount) else 0.0


def _judge(
    id_: str,
    gauge: DialGauge | DigitalGauge,
    test_point: str,
    policies: Policies,
    setting: Setting,
    readings: Readings,
    worst: Worst,
) -> GaugeChoice | Failure:
    error, graduation = error_bar(gauge), graduation_bar(gauge)
    data: dict[str, Amount | str] = {"gauge": id_, "test_point": test_point}
    if readings.high_bar > min(gauge.range_bar, gauge.rating_bar):
        most_bar = min(gauge.range_bar, gauge.rating_bar)
        over = {"over": bar(readings.high_bar), "most": bar(most_bar)}
        return Failure(condition=Condition.SEEN, data={**data, **over})
    if worst.pressure_bar > gauge.rating_bar:
        over = {"over": bar(worst.pressure_bar), "most": bar(gauge.rating_bar)}
        return Failure(condition=Condition.SEEN, data={**data, **over, **worst.cause})
    never = never_exceed_bar(
        rating_bar=min(readings.rating_bar, gauge.rating_bar),
        gauge_error_bar=error,
        graduation_bar=graduation,
        range_bar=gauge.range_bar,
    )
    target_bar, low_bar, high_bar = (
        as_set_bar(reading_bar=reading, setting_bar=level, graduation_bar=graduation)
        for reading, level in (
            (readings.target_bar, setting.target_bar),
            (readings.low_bar, setting.low_bar),
            (readings.high_bar, setting.high_bar),
        )
    )
    window = reading_window(
        low_bar=low_bar,
        high_bar=high_bar,
        graduation_bar=graduation,
        widen=setting.window_origin is Origin.POLICY,
        floor_bar=readings.floor_bar,
        ceiling_bar=min(readings.ceiling_bar, never - graduation),
    )
    if window.too_coarse:
        return Failure(condition=Condition.SEEN, data={**data, "graduation": bar(graduation)})
    if never < window.high_bar + graduation - 1e-9:
        return Failure(
            condition=Condition.SEEN,
            data={
                **data,
                "never_exceed": bar(never),
                "top": bar(window.high_bar),
                "part": readings.rated_by if readings.rating_bar <= gauge.rating_bar else id_,
                "rating": bar(min(readings.rating_bar, gauge.rating_bar)),
            },
        )
    achieved = accuracy_ratio(half_window_bar=window.half_width_bar, gauge_error_bar=error)
    if achieved < 1.0:
        return Failure(condition=Condition.SEEN, data={**data, "accuracy_ratio": ratio(achieved)})
    findings: list[Finding] = []
    if achieved < policies.accuracy_ratio:
        findings.append(
            Finding(
                code="gauge_accuracy",
                severity=Severity.WARNING,
                subject=setting.adjuster,
                data={**data, "accuracy_ratio": ratio(achieved), "wanted": ratio(policies.accuracy_ratio)},
            )
        )
    share = target_bar / gauge.range_bar
    if isinstance(gauge, DialGauge) and not WORKING_SHARE[0] <= share <= WORKING_SHARE[1]:
        findings.append(
            Finding(
                code="gauge_working_point",
                severity=Severity.WARNING,
                subject=setting.adjuster,
                data={**data, "share": ratio(share)},
            )
        )
    return GaugeChoice(
        gauge=id_,
        test_point=test_point,
        window=window,
        target_bar=_on_graduation(target_bar, graduation, setting.origin),
        never_exceed_bar=never,
        error_bar=error,
        graduation_bar=graduation,
        accuracy_ratio=achieved,
        findings=tuple(findings),
        floor_bar=readings.floor_bar,
        ceiling_bar=readings.ceiling_bar,
    )


def _on_graduation(reading_bar: float, graduation: float, origin: Origin) -> float:
    """A computed target stands on a graduation, rounded up; a given one as it was given.

    Up is the direction of every inequality that computes a target so far: each has a lowest value.
    """
    if origin is Origin.GIVEN:
        return reading_bar
    return -(-(reading_bar - 1e-6) // graduation) * graduation
