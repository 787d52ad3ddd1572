"""Rules between settings on one line, by hand and at their edges."""

import pytest

from sheets.amounts import Finding, Severity
from sheets.targets.power import longest_time_s, oil_warming_k_per_s
from sheets.targets.rules import (
    compensator_needed_bar,
    relief_capacity,
    relief_needed_bar,
    relief_over_compensator,
    working_relief,
)


def test_compensator_carries_work_and_reserve() -> None:
    assert compensator_needed_bar(demand_bar=160.0, reserve=0.05) == pytest.approx(168.0)


def test_relief_closes_again_above_the_compensators_window() -> None:
    # ρ · bottom ≥ top + gap: 0.92 · 201.09 = 185.
    assert relief_needed_bar(compensator_top_bar=180.0, gap_bar=5.0, closing_ratio=0.92) == pytest.approx(
        201.087, abs=1e-3
    )
    # A trade article's figures: 2250 psi, a reset band of 10 %, some gap: 2600 psi.
    without_gap = relief_needed_bar(compensator_top_bar=2250.0, gap_bar=0.0, closing_ratio=0.9)
    assert without_gap == pytest.approx(2500.0)


def over(setting: float, *, policy: bool = False, bottom: float | None = None) -> tuple[Finding, ...]:
    findings, _ = relief_over_compensator(
        relief="RV1",
        setting_bar=setting,
        window_bottom_bar=setting - 4.0 if bottom is None else bottom,
        opening_ratio=0.95,
        opening_is_policy=policy,
        closing_ratio=0.92,
        compensator="PU1.compensator",
        compensator_bar=176.0,
        compensator_top_bar=180.0,
        gap_bar=5.0,
    )
    return findings


@pytest.mark.parametrize("setting", [170.0, 178.0, 180.0])
def test_relief_not_above_the_compensators_window_is_refused(setting: float) -> None:
    (finding,) = over(setting)
    assert (finding.code, finding.severity) == ("relief_under_compensator", Severity.REFUSED)
    # Also where its opening ratio is policy only: its setting isn't.
    (finding,) = over(setting, policy=True)
    assert finding.severity is Severity.REFUSED


@pytest.mark.parametrize("setting", [180.1, 185.0, 176.0 / 0.95 - 0.01])
def test_relief_that_opens_at_deadhead(setting: float) -> None:
    (finding,) = over(setting)
    assert (finding.code, finding.severity) == ("relief_passes_at_deadhead", Severity.REFUSED)
    (finding,) = over(setting, policy=True)  # a policy figure warns
    assert (finding.code, finding.severity) == ("relief_passes_at_deadhead", Severity.WARNING)


def test_relief_that_may_stay_open_warns() -> None:
    (finding,) = over(200.0)  # 0.92 · 196 = 180.3, under 185
    assert (finding.code, finding.severity) == ("relief_may_stay_open", Severity.WARNING)
    assert over(206.0) == ()  # 0.92 · 202 = 185.84
    assert over(206.0, bottom=185.0 / 0.92) == ()  # just enough
    assert over(206.0, bottom=185.0 / 0.92 - 0.01) != ()


def working(bottom: float) -> tuple[str, ...]:
    findings, derivation = working_relief(
        relief="RV1", window_bottom_bar=bottom, opening_ratio=0.93, demand_bar=128.8, reserve=0.05
    )
    assert derivation.result.value == pytest.approx(145.42, abs=0.01)  # 128.8 · 1.05 / 0.93
    return tuple(f"{finding.code} {finding.severity.value}" for finding in findings)


def test_relief_that_is_the_working_limit() -> None:
    assert working(128.8) == ("limit_under_work refused",)
    assert working(120.0) == ("limit_under_work refused",)
    assert working(129.0) == ("limit_close_to_work warning",)
    assert working(145.4) == ("limit_close_to_work warning",)
    assert working(145.5) == ()


def test_relief_passes_every_flow_that_reaches_it() -> None:
    assert relief_capacity(relief="RV1", rated_flow_lpm=99.5, reaching_flow_lpm=99.49) == ()
    assert relief_capacity(relief="RV1", rated_flow_lpm=100.0, reaching_flow_lpm=100.0) == ()
    (finding,) = relief_capacity(relief="RV1", rated_flow_lpm=90.0, reaching_flow_lpm=99.49)
    assert (finding.code, finding.severity, finding.subject) == ("relief_too_small", Severity.REFUSED, "RV1")


def test_oil_warms_by_what_the_relief_takes() -> None:
    # 34.6 kW into 250 L: 250 · 0.87 kg · 1.88 kJ/(kg·K) = 409 kJ/K, so 0.085 K/s, 5 K a minute.
    assert oil_warming_k_per_s(power_kw=34.6, volume_l=250.0) == pytest.approx(0.0846, abs=1e-4)


@pytest.mark.parametrize(
    ("volume_l", "room_k", "seconds"),
    [
        (250.0, 10.0, 60.0),  # 408.9 kJ/K · 10 K / 34.6 kW = 118 s: the policy is shorter
        (100.0, 10.0, 45.0),  # 163.6 · 10 / 34.6 = 47.3 s, down to 5 s
        (30.0, 1.0, 1.0),  # 49.1 · 1 / 34.6 = 1.4 s, down to 1 s
        (30.0, 0.0, 0.0),
        (30.0, -5.0, 0.0),
    ],
)
def test_longest_time_is_what_the_oil_takes_up(volume_l: float, room_k: float, seconds: float) -> None:
    assert longest_time_s(power_kw=34.6, volume_l=volume_l, room_k=room_k, most_s=60.0) == seconds
