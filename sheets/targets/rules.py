"""Rules between settings on one pressure line: what must lie below what, and by how much."""

from __future__ import annotations

from sheets.amounts import Amount, Derivation, Finding, Severity, bar, lpm, ratio


def compensator_needed_bar(*, demand_bar: float, reserve: float) -> float:
    """Lowest compensator setting that carries the work.

    ``demand_bar``: pump pressure in bar while the heaviest move runs, margin and losses included;
    ``reserve`` as a share. Returns bar. Valid where the demand was found with the pump not held back.
    Source: policy reserve.
    """
    return demand_bar * (1.0 + reserve)


def relief_needed_bar(*, compensator_top_bar: float, gap_bar: float, closing_ratio: float) -> float:
    """Lowest bottom of the relief's window that lets it close again over a compensated line.

    ``compensator_top_bar``: top of the compensator's window in bar; ``gap_bar`` in bar;
    ``closing_ratio``: ρ, closing pressure over setting. Returns bar: ρ·bottom ≥ top + gap. Source: trade
    article on relief heating (2250 psi and a reset band of 10 % ask for 2600 psi), gap by policy.
    """
    return (compensator_top_bar + gap_bar) / closing_ratio


def relief_over_compensator(
    *,
    relief: str,
    setting_bar: float,
    window_bottom_bar: float,
    opening_ratio: float,
    opening_is_policy: bool,
    closing_ratio: float,
    compensator: str,
    compensator_bar: float,
    compensator_top_bar: float,
    gap_bar: float,
) -> tuple[tuple[Finding, ...], Derivation]:
    """What is wrong with a given relief setting over a compensator, and the derivation of what is needed.

    ``setting_bar`` and ``window_bottom_bar``: the relief's setting and the lower end of its window in
    bar; ``opening_ratio`` and ``closing_ratio``: the pressures at which it opens and closes again over
    its setting; ``opening_is_policy``: no plate gives the former. ``compensator_bar`` and
    ``compensator_top_bar``: the compensator's setting and the upper end of its window in bar;
    ``gap_bar``: wanted between the two, in bar.

    Refused if the relief opens at or below the deadhead pressure (warned where its opening ratio is policy),
    and if it isn't above the compensator's window; warned if it may stay open once opened.
    """
    findings: list[Finding] = []
    data: dict[str, Amount | str] = {
        "setting": bar(setting_bar),
        "other": compensator,
        "other_setting": bar(compensator_bar),
        "other_top": bar(compensator_top_bar),
    }
    opens_bar = opening_ratio * setting_bar
    if setting_bar <= compensator_top_bar:
        findings.append(
            Finding(code="relief_under_compensator", severity=Severity.REFUSED, subject=relief, data=data)
        )
    elif opens_bar <= compensator_bar:
        findings.append(
            Finding(
                code="relief_passes_at_deadhead",
                severity=Severity.WARNING if opening_is_policy else Severity.REFUSED,
                subject=relief,
                data={**data, "opens": bar(opens_bar), "opening_ratio": ratio(opening_ratio)},
            )
        )
    needed_bar = relief_needed_bar(
        compensator_top_bar=compensator_top_bar, gap_bar=gap_bar, closing_ratio=closing_ratio
    )
    if not findings and window_bottom_bar < needed_bar - 1e-9:
        findings.append(
            Finding(
                code="relief_may_stay_open",
                severity=Severity.WARNING,
                subject=relief,
                data={**data, "bottom": bar(window_bottom_bar), "needed": bar(needed_bar)},
            )
        )
    derivation = Derivation(
        result_name="lowest bottom of the window",
        formula="(top of the compensator's window + gap) / closing ratio",
        inputs=(
            ("top", bar(compensator_top_bar), f"{compensator}, window"),
            ("gap", bar(gap_bar), "policy"),
            ("closing ratio", ratio(closing_ratio), "plate or policy"),
        ),
        result=bar(needed_bar),
    )
    return tuple(findings), derivation


def working_relief(
    *, relief: str, window_bottom_bar: float, opening_ratio: float, demand_bar: float, reserve: float
) -> tuple[tuple[Finding, ...], Derivation]:
    """What is wrong with a given setting of a relief that is itself the working limit.

    ``window_bottom_bar``: lower end of its window in bar; ``opening_ratio``: opening pressure over setting;
    ``demand_bar``: pressure in bar that the heaviest move needs; ``reserve`` over it, as a share. Refused if
    the bottom isn't above the work pressure; warned if it opens before work pressure and reserve are reached.
    """
    needed_bar = demand_bar * (1.0 + reserve) / opening_ratio
    findings: tuple[Finding, ...] = ()
    data = {"bottom": bar(window_bottom_bar), "demand": bar(demand_bar), "needed": bar(needed_bar)}
    if window_bottom_bar <= demand_bar:
        findings = (Finding(code="limit_under_work", severity=Severity.REFUSED, subject=relief, data=data),)
    elif window_bottom_bar < needed_bar:
        findings = (
            Finding(code="limit_close_to_work", severity=Severity.WARNING, subject=relief, data=data),
        )
    derivation = Derivation(
        result_name="lowest bottom of the window",
        formula="work pressure × (1 + reserve) / opening ratio",
        inputs=(
            ("work pressure", bar(demand_bar), "solver, heaviest move"),
            ("reserve", ratio(reserve), "policy"),
            ("opening ratio", ratio(opening_ratio), "plate or policy"),
        ),
        result=bar(needed_bar),
    )
    return findings, derivation


def relief_capacity(*, relief: str, rated_flow_lpm: float, reaching_flow_lpm: float) -> tuple[Finding, ...]:
    """Refuses a relief that can't pass every flow that can reach it.

    ``rated_flow_lpm``: from its plate, in L/min; ``reaching_flow_lpm``: sum of the flows that can reach
    it, in L/min.
    """
    if rated_flow_lpm >= reaching_flow_lpm:
        return ()
    return (
        Finding(
            code="relief_too_small",
            severity=Severity.REFUSED,
            subject=relief,
            data={"rated": lpm(rated_flow_lpm), "reaching": lpm(reaching_flow_lpm)},
        ),
    )
