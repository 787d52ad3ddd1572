"""What a stage costs in heat: power into the oil, how fast it warms, and how long one try may last."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from sheets.amounts import Amount, Finding, Severity, kw
from sheets.machine.model import Machine
from sheets.machine.parts import Reservoir
from sheets.machine.site import Policies
from sheets.procedure.steps import Stage, Trace
from sheets.targets.power import longest_time_s, oil_warming_k_per_s

HEAT_KW = 1.0
"""Policy: power over a relief from which oil is spared and warned of."""


@dataclass(frozen=True, kw_only=True)
class Heat:
    """What the hottest moment of a stage does to the oil."""

    power_kw: float
    """Of all drives: while nothing moves, all of it ends as heat in the oil."""
    reservoir: str
    """The one that holds least oil, where there are several: nobody knows how they share the heat."""
    volume_l: float
    warmest_c: float
    """Warmest oil that a try begins with."""
    warming_k_per_s: float
    longest_s: float
    """Longest time of one try."""


def heat_of(machine: Machine, policies: Policies, stages: Sequence[Stage], at: int) -> Heat | None:
    """Heat of a stage, its first moment included; None where no relief turns power to heat."""
    before = [step.trace for stage in stages[:at] for step in stage.steps if step.trace is not None][-1:]
    here = [step.trace for step in stages[at].steps if step.trace is not None]
    power_kw = max((_heating_kw(trace) for trace in (*before, *here)), default=0.0)
    if power_kw <= 0.0:
        return None
    reservoirs = {id_: part for id_, part in machine.parts.items() if isinstance(part, Reservoir)}
    least = min(reservoirs, key=lambda id_: reservoirs[id_].volume_l)
    volume_l = reservoirs[least].volume_l
    _, warmest_c = machine.fluid.setting_window_c(
        lowest_c=policies.lowest_setting_temperature_c, highest_c=policies.highest_setting_temperature_c
    )
    return Heat(
        power_kw=power_kw,
        reservoir=least,
        volume_l=volume_l,
        warmest_c=warmest_c,
        warming_k_per_s=oil_warming_k_per_s(power_kw=power_kw, volume_l=volume_l),
        longest_s=longest_time_s(
            power_kw=power_kw,
            volume_l=volume_l,
            room_k=machine.fluid.limit_temperature_c - warmest_c,
            most_s=policies.longest_try_s,
        ),
    )


def _heating_kw(trace: Trace) -> float:
    """All power of the drives where a relief passes; no less than what the relief itself takes."""
    return max(trace.shaft_kw, trace.relief_kw) if trace.relief_kw >= HEAT_KW else 0.0


def heat_findings(machine: Machine, policies: Policies, stages: Sequence[Stage]) -> Iterator[Finding]:
    """Refuses a job whose hottest stage leaves too little time for a try before the oil is over its limit."""
    heats = [heat_of(machine, policies, stages, at) for at, stage in enumerate(stages) if stage.powered]
    hottest = max((heat for heat in heats if heat is not None), key=lambda heat: heat.power_kw, default=None)
    if hottest is None or hottest.longest_s >= policies.shortest_try_s:
        return
    yield Finding(
        code="oil_heats_too_fast",
        severity=Severity.REFUSED,
        subject=hottest.reservoir,
        data={
            "power": kw(hottest.power_kw),
            "volume": Amount(value=hottest.volume_l, quantity="volume_l"),
            "warmest": Amount(value=hottest.warmest_c, quantity="temperature_c"),
            "seconds": Amount(value=hottest.longest_s, quantity="time_s"),
            "least": Amount(value=policies.shortest_try_s, quantity="time_s"),
            "limit": Amount(value=machine.fluid.limit_temperature_c, quantity="temperature_c"),
        },
    )
