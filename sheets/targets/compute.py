"""Targets of a whole machine: every adjuster's setting, checked against its neighbours and the ratings."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from itertools import pairwise

from sheets.amounts import Derivation, Finding, Severity, bar, lpm, ratio
from sheets.circuit.load_sensing import standby_of
from sheets.circuit.model import AdjusterSite, Circuit
from sheets.circuit.reach import joined_at_rest, weakest_loaded
from sheets.machine.model import Machine
from sheets.machine.parts import FixedPump, LoadSensingControl, ReliefValve, VariablePump
from sheets.machine.screws import Screw, screws_of
from sheets.machine.site import Policies
from sheets.targets.capacity import capacity_findings
from sheets.targets.coming_up import with_room_below
from sheets.targets.demand import Demand, loads_not_given, undescribed_loads, work_of
from sheets.targets.guarding import reliefs_cut_off
from sheets.targets.intensified import intensified_lines
from sheets.targets.rules import (
    compensator_needed_bar,
    relief_capacity,
    relief_needed_bar,
    relief_over_compensator,
    working_relief,
)
from sheets.targets.settings import Origin, Setting, Targets, window_of

_LEAST_GAP_BAR, _LEAST_GAP_RATIO = 15.0, 1.10
"""Policy: a relief that the ratings press down stands this far over a compensator at the least."""


@dataclass(frozen=True, kw_only=True)
class _Line:
    """What stands on one pump's pressure line."""

    pump: str
    limit: str | None
    """The pump's own compensator, where it has one."""
    difference: str | None
    """The pump's own load-sensing control, where it has one."""
    reliefs: tuple[str, ...]
    outlet_node: int


def compute_targets(machine: Machine, circuit: Circuit, policies: Policies) -> Targets:
    """Setting, window, derivation and findings of every adjuster.

    Refusals travel as findings, so that all of them are seen at once; nothing is guessed: an adjuster whose
    value neither a maker nor a rule gives has no setting.
    """
    screws = screws_of(machine)
    sites = {site.id: site for site in circuit.adjusters}
    lines = _pressure_lines(machine, circuit)
    findings: list[Finding] = []
    settings: dict[str, Setting] = {}
    differences = {
        line.difference: _difference(machine, sites[line.difference], screws, policies)
        for line in lines
        if line.difference is not None
    }
    trial_bar, limits = _trial(screws, differences)
    work = work_of(machine, circuit, trial_bar, limits)
    demands = work.demands
    findings += work.findings
    findings += undescribed_loads(machine)

    for line in lines:
        if line.limit is None and not line.reliefs:
            findings.append(Finding(code="nothing_limits", severity=Severity.REFUSED, subject=line.pump))
        findings += reliefs_cut_off(
            machine, circuit, pump=line.pump, reliefs=line.reliefs, controlled=line.limit is not None
        )
        if line.difference is not None:
            _settle(settings, findings, differences[line.difference])
        if line.limit is not None:
            _settle(settings, findings, _compensator(line, screws, demands, policies))
        for relief in line.reliefs:
            if relief not in settings:
                _settle(
                    settings,
                    findings,
                    _relief(relief, line, machine, circuit, screws, settings, demands, policies),
                )
    for id_ in screws:
        if id_ not in settings and not any(finding.subject == id_ for finding in findings):
            _settle(settings, findings, _given(id_, screws, policies))
    for id_, setting in list(settings.items()):
        checked = _within_rating(setting, sites[id_], machine, circuit, settings)
        reached, against = with_room_below(setting)
        settings[id_] = replace(reached, findings=(*setting.findings, *checked, *against))
        findings += (*checked, *against)
    findings.extend(capacity_findings(machine, circuit, settings))
    findings.extend(intensified_lines(machine, circuit, settings))
    working = [id_ for line in lines for id_ in ((line.limit,) if line.limit else line.reliefs)]
    by_work = any(settings[id_].origin is Origin.COMPUTED for id_ in working if id_ in settings)
    findings.extend(loads_not_given(machine, needed=by_work))
    ordered = {id_: settings[id_] for id_ in screws if id_ in settings}
    return Targets(settings=_apart(ordered, lines), findings=tuple(findings))


def _settle(settings: dict[str, Setting], findings: list[Finding], outcome: Setting | Finding) -> None:
    if isinstance(outcome, Setting):
        settings[outcome.adjuster] = outcome
        findings.extend(outcome.findings)
    else:
        findings.append(outcome)


def _pressure_lines(machine: Machine, circuit: Circuit) -> tuple[_Line, ...]:
    lines = []
    for id_, part in machine.parts.items():
        if not isinstance(part, FixedPump | VariablePump):
            continue
        outlet = circuit.node_of[f"{id_}.P"]
        joined = joined_at_rest(machine, circuit, outlet)
        reliefs = tuple(
            other
            for other, candidate in machine.parts.items()
            if isinstance(candidate, ReliefValve) and circuit.node_of.get(f"{other}.P") in joined
        )
        variable = isinstance(part, VariablePump)
        senses = isinstance(part, VariablePump) and part.load_sensing is not None
        lines.append(
            _Line(
                pump=id_,
                limit=f"{id_}.compensator" if variable else None,
                difference=f"{id_}.load sensing" if senses else None,
                reliefs=reliefs,
                outlet_node=outlet,
            )
        )
    return tuple(lines)


def _trial(
    screws: Mapping[str, Screw], differences: Mapping[str, Setting | Finding]
) -> tuple[dict[str, float], frozenset[str]]:
    """Settings in which the work is looked at, and the limits among them, which stand at their ends."""
    limits = frozenset(id_ for id_ in screws if id_ not in differences)
    trial_bar = {id_: screw.adjuster.highest_bar for id_, screw in screws.items()}
    trial_bar |= {id_: known.target_bar for id_, known in differences.items() if isinstance(known, Setting)}
    return trial_bar, limits


def _missing(adjuster: str) -> Finding:
    return Finding(code="value_not_given", severity=Severity.REFUSED, subject=adjuster)


def _given(adjuster: str, screws: Mapping[str, Screw], policies: Policies) -> Setting | Finding:
    """A setting that only a maker or an owner can give."""
    screw = screws[adjuster].adjuster
    if screw.setting_bar is None:
        return _missing(adjuster)
    return _setting(adjuster, screws, screw.setting_bar, Origin.GIVEN, policies)


def _difference(
    machine: Machine, site: AdjusterSite, screws: Mapping[str, Screw], policies: Policies
) -> Setting | Finding:
    """The standby of a load-sensing control: given, or found from a differential at a flow.

    Without the control's width the standby isn't known: then the differential is read at its own flow.
    Raises InputError where the differential can't be true of this pump.
    """
    screw = screws[site.id].adjuster
    standby_bar = standby_of(machine, site.part, width_bar=site.width_bar)
    if standby_bar is None or standby_bar == screw.setting_bar or not isinstance(screw, LoadSensingControl):
        return _given(site.id, screws, policies)
    differential_bar, flow_lpm = screw.differential_bar, screw.differential_flow_lpm
    if differential_bar is None or flow_lpm is None:
        return _missing(site.id)
    on_plate = screw.width_bar is not None
    derivation = Derivation(
        result_name="standby",
        formula="differential + width × flow / full flow",
        inputs=(
            ("differential", bar(differential_bar), screw.given_by or "given"),
            ("width", bar(site.width_bar), "plate" if on_plate else "policy"),
            ("flow", lpm(flow_lpm), "given with the differential"),
            ("full flow", lpm(site.width_flow_lpm), "plate"),
        ),
        result=bar(standby_bar),
    )
    setting = _setting(site.id, screws, standby_bar, Origin.GIVEN, policies, derivations=(derivation,))
    return setting if on_plate else replace(setting, at_flow_lpm=flow_lpm)


def _setting(
    adjuster: str,
    screws: Mapping[str, Screw],
    target_bar: float,
    origin: Origin,
    policies: Policies,
    *,
    derivations: tuple[Derivation, ...] = (),
    findings: tuple[Finding, ...] = (),
    floor_bar: float = 0.0,
) -> Setting:
    part, screw = screws[adjuster].part, screws[adjuster].adjuster
    if isinstance(screw, LoadSensingControl):
        share, least_bar = 0.0, policies.standby_window_bar
    else:
        share, least_bar = policies.window_ratio, policies.window_minimum_bar
    low_bar, high_bar, window_origin, derivation = window_of(
        target_bar=target_bar, tolerance_bar=screw.tolerance_bar, share=share, least_bar=least_bar
    )
    return Setting(
        adjuster=adjuster,
        part=part,
        target_bar=target_bar,
        origin=origin,
        given_by=screw.given_by,
        low_bar=low_bar,
        high_bar=high_bar,
        window_origin=window_origin,
        floor_bar=floor_bar,
        ceiling_bar=screw.highest_bar,
        derivations=(*derivations, derivation),
        findings=findings,
        screw=screw,
    )


def _worst(demands: tuple[Demand, ...], pump: str) -> Demand | None:
    return next((demand for demand in demands if demand.pump == pump), None)


def _compensator(
    line: _Line,
    screws: Mapping[str, Screw],
    demands: tuple[Demand, ...],
    policies: Policies,
) -> Setting | Finding:
    adjuster = str(line.limit)
    screw = screws[adjuster].adjuster
    worst = _worst(demands, line.pump)
    derivations: tuple[Derivation, ...] = ()
    needed_bar: float | None = None
    if worst is not None and not worst.held_back:
        needed_bar = compensator_needed_bar(
            demand_bar=worst.pump_pressure_bar, reserve=policies.reserve_ratio
        )
        derivations = (
            Derivation(
                result_name="lowest setting for the work",
                formula="pump pressure at the heaviest move × (1 + reserve)",
                inputs=(
                    (
                        "pump pressure",
                        bar(worst.pump_pressure_bar),
                        f"solver, {worst.actuator} with {worst.by}",
                    ),
                    ("reserve", ratio(policies.reserve_ratio), "policy"),
                ),
                result=bar(needed_bar),
            ),
        )
    if screw.setting_bar is None:
        if needed_bar is None:
            return _missing(adjuster)
        # The window's bottom must still carry the work, so the target stands half a window above it.
        target_bar = max(needed_bar / (1.0 - policies.window_ratio), needed_bar + policies.window_minimum_bar)
        return _setting(
            adjuster,
            screws,
            target_bar,
            Origin.COMPUTED,
            policies,
            derivations=derivations,
            floor_bar=needed_bar,
        )
    setting = _setting(adjuster, screws, screw.setting_bar, Origin.GIVEN, policies, derivations=derivations)
    if worst is None or needed_bar is None:
        return setting
    data = {
        "bottom": bar(setting.low_bar),
        "demand": bar(worst.pump_pressure_bar),
        "needed": bar(needed_bar),
    }
    if setting.low_bar <= worst.pump_pressure_bar:
        finding = Finding(code="limit_under_work", severity=Severity.REFUSED, subject=adjuster, data=data)
    elif setting.low_bar < needed_bar - 1e-9:
        finding = Finding(code="limit_close_to_work", severity=Severity.WARNING, subject=adjuster, data=data)
    else:
        return setting
    return replace(setting, findings=(*setting.findings, finding))


def _relief(
    relief: str,
    line: _Line,
    machine: Machine,
    circuit: Circuit,
    screws: Mapping[str, Screw],
    settings: Mapping[str, Setting],
    demands: tuple[Demand, ...],
    policies: Policies,
) -> Setting | Finding:
    part = machine.parts[relief]
    if not isinstance(part, ReliefValve):
        raise TypeError(f"{relief} is not a relief valve")
    screw = screws[relief].adjuster
    direct = part.acting == "direct"
    opening, opening_is_policy = _ratio(
        part.opening_ratio, policies.direct_opening_ratio if direct else policies.pilot_opening_ratio
    )
    closing, closing_is_policy = _ratio(
        part.closing_ratio, policies.direct_closing_ratio if direct else policies.pilot_closing_ratio
    )
    capacity = relief_capacity(
        relief=relief, rated_flow_lpm=part.rated_flow_lpm, reaching_flow_lpm=circuit.reference_flow_lpm
    )
    below = settings.get(line.limit) if line.limit else None
    if line.limit is not None and below is None:
        return _missing(relief) if screw.setting_bar is None else _given(relief, screws, policies)
    worst = _worst(demands, line.pump)
    if below is None:
        return _working_relief(relief, screws, worst, opening, capacity, policies)

    if screw.setting_bar is None:
        bottom_bar = relief_needed_bar(
            compensator_top_bar=below.high_bar, gap_bar=policies.gap_bar, closing_ratio=closing
        )
        target_bar = max(bottom_bar / (1.0 - policies.window_ratio), bottom_bar + policies.window_minimum_bar)
        if closing_is_policy:
            given_bar = {id_: one.adjuster.setting_bar for id_, one in screws.items()}
            weakest = weakest_loaded(
                machine,
                circuit,
                circuit.node_of[f"{relief}.P"],
                set_bar=target_bar,
                reliefs_bar={id_: value for id_, value in given_bar.items() if value is not None},
            )
            target_bar = _under_rating(target_bar, weakest.rating_bar, below.target_bar, policies)
        origin = Origin.COMPUTED
    else:
        target_bar, origin = screw.setting_bar, Origin.GIVEN
    setting = _setting(relief, screws, target_bar, origin, policies)
    findings, derivation = relief_over_compensator(
        relief=relief,
        setting_bar=target_bar,
        window_bottom_bar=setting.low_bar,
        opening_ratio=opening,
        opening_is_policy=opening_is_policy,
        closing_ratio=closing,
        compensator=below.adjuster,
        compensator_bar=below.target_bar,
        compensator_top_bar=below.high_bar,
        gap_bar=policies.gap_bar,
    )
    return replace(
        setting,
        findings=(*setting.findings, *capacity, *findings),
        derivations=(derivation, *setting.derivations),
        floor_bar=below.high_bar,
    )


def _under_rating(target_bar: float, rating_bar: float, compensator_bar: float, policies: Policies) -> float:
    """A computed relief where the ratings leave no room for it, its closing ratio being policy only.

    It comes down until half a window lies between its window and the rating, but never under common practice
    over the compensator; what it gives up in closing is then warned of by the rule that asked for it.
    """
    half_bar = max(policies.window_ratio * target_bar, policies.window_minimum_bar)
    if target_bar + half_bar <= rating_bar:
        return target_bar
    roomy_bar = min(
        rating_bar / (1.0 + 2.0 * policies.window_ratio), rating_bar - 2.0 * policies.window_minimum_bar
    )
    least_bar = max(compensator_bar + _LEAST_GAP_BAR, _LEAST_GAP_RATIO * compensator_bar)
    return min(target_bar, max(least_bar, roomy_bar))


def _working_relief(
    relief: str,
    screws: Mapping[str, Screw],
    worst: Demand | None,
    opening: float,
    capacity: tuple[Finding, ...],
    policies: Policies,
) -> Setting | Finding:
    screw = screws[relief].adjuster
    known = worst is not None and not worst.held_back
    if screw.setting_bar is None:
        if worst is None or not known:
            return _missing(relief)
        bottom_bar = worst.pump_pressure_bar * (1.0 + policies.reserve_ratio) / opening
        target_bar = max(bottom_bar / (1.0 - policies.window_ratio), bottom_bar + policies.window_minimum_bar)
        setting = _setting(relief, screws, target_bar, Origin.COMPUTED, policies, findings=capacity)
    else:
        setting = _setting(relief, screws, screw.setting_bar, Origin.GIVEN, policies, findings=capacity)
    if worst is None or not known:
        return setting
    findings, derivation = working_relief(
        relief=relief,
        window_bottom_bar=setting.low_bar,
        opening_ratio=opening,
        demand_bar=worst.pump_pressure_bar,
        reserve=policies.reserve_ratio,
    )
    return replace(
        setting,
        findings=(*setting.findings, *findings),
        derivations=(derivation, *setting.derivations),
        floor_bar=worst.pump_pressure_bar,
    )


def _ratio(plate: float | None, policy: float) -> tuple[float, bool]:
    return (policy, True) if plate is None else (plate, False)


def _within_rating(
    setting: Setting,
    site: AdjusterSite,
    machine: Machine,
    circuit: Circuit,
    settings: Mapping[str, Setting],
) -> tuple[Finding, ...]:
    """A setting must lie under every rating that its pressure comes to, window and all."""
    node = weakest_loaded(
        machine,
        circuit,
        site.controlled_node,
        set_bar=setting.target_bar,
        reliefs_bar={id_: other.target_bar for id_, other in settings.items()},
    )
    if setting.high_bar <= node.rating_bar:
        return ()
    return (
        Finding(
            code="setting_over_rating",
            severity=Severity.REFUSED,
            subject=setting.adjuster,
            data={
                "setting": bar(setting.target_bar),
                "top": bar(setting.high_bar),
                "rating": bar(node.rating_bar),
                "rated_part": node.rated_by,
            },
        ),
    )


def _apart(settings: Mapping[str, Setting], lines: tuple[_Line, ...]) -> dict[str, Setting]:
    """Cuts windows from policy so that neighbours on a line never meet; a given window stays as given."""
    cut = dict(settings)
    for line in lines:
        ladder = sorted(
            (cut[id_] for id_ in (line.difference, line.limit, *line.reliefs) if id_ in cut),
            key=lambda setting: setting.target_bar,
        )
        for lower, upper in pairwise(ladder):
            middle_bar = (lower.target_bar + upper.target_bar) / 2.0
            below, above = cut[lower.adjuster], cut[upper.adjuster]
            if below.window_origin is Origin.POLICY and below.high_bar >= above.low_bar:
                below = replace(below, high_bar=min(below.high_bar, middle_bar))
            if above.window_origin is Origin.POLICY and above.low_bar <= below.high_bar:
                above = replace(above, low_bar=max(above.low_bar, middle_bar))
            cut[lower.adjuster] = replace(below, ceiling_bar=min(below.ceiling_bar, above.low_bar))
            cut[upper.adjuster] = replace(above, floor_bar=max(above.floor_bar, below.high_bar))
    return cut
