"""A machine whose order isn't from high to low: a relief of 50 bar comes before one of 200 bar.

A fixed pump without losses gives 60 L/min to RV1 (direct acting, 200 bar at 60 L/min, opens at 160 bar) and,
over the throttle OR1 (25 L/min at 100 bar, K = 2.5), to a pilot line that RV2 limits (50 bar at 30 L/min).
With HV1 shut, p₁ = 200·(0.8 + 0.2·q₁/60), q₁ = 60 − q₂, q₂ = 2.5·√(p₁ − p₂), p₂ = 50·(κ₂ + (1 − κ₂)·q₂/30).

For κ₂ = 0.95: q₂ = 28.62 L/min, p₁ = 180.92 bar, p₂ = 49.88 bar. With a = dp₁/dq₁ = 200·0.2/60 = 0.667,
b = dp₂/dq₂ = 50·0.05/30 = 0.083, g = dq₂/d(p₁ − p₂) = 2.5/(2·√131.0) = 0.109 and 1 + g·(a + b) = 1.082:

- RV2 on RV1's reading: a·g·0.998/1.082 = 0.067 bar for a bar; RV1 itself 0.905·(1 − a·g/1.082) = 0.844. That
  is 8.0 %, over 2 %: RV2 is set first.
- RV1 on RV2's reading: b·g·0.905/1.082 = 0.0076; RV2 itself 0.998·(1 − b·g/1.082) = 0.989. That is 0.8 %.

With κ₂ = 0.80, b = 0.333: RV1 on RV2 becomes 0.333·0.109·0.905/1.109 = 0.0297 of 0.958, 3.1 %: each would
have to come before the other, a cycle.
"""

import math
from collections.abc import Callable

import pytest
from variant_bench import (
    assert_good,
    assert_refused,
    edges,
    hand_valve,
    moves,
    refusals,
    said,
    screw,
    state,
    text_of,
)

from sheets.pages.compose.matter import Matter

Computed = Callable[[str], Matter]


def two_reliefs(opening_ratio: float) -> str:
    parts = (
        "  TK1: {kind: reservoir, where: below, volume: 200 L}\n"
        "  M1: {kind: electric motor, where: on top, power: 30 kW, speed: 1500 rpm}\n"
        "  PU1: {kind: fixed pump, where: on M1, driven by: M1, displacement: 40 cm3/rev, rating: 300 bar,\n"
        "    volumetric efficiency: 1, overall efficiency: 0.9}\n"
        "  RV1:\n    kind: relief valve\n    where: manifold\n    rating: 350 bar\n    acting: direct\n"
        "    opening ratio: 0.8\n    closing ratio: 0.75\n    rated flow: 80 L/min\n"
        f"    adjuster: {screw('200 bar', '50 bar', '250 bar')}\n"
        "  TP1: {kind: test point, where: manifold, rating: 400 bar}\n"
        + hand_valve("HV1", "after the manifold", flow="80 L/min")
        + "  OR1: {kind: orifice, where: manifold, rating: 350 bar, rated flow: 25 L/min,\n"
        "    rated drop: 100 bar}\n"
        "  RV2:\n    kind: relief valve\n    where: pilot block\n    rating: 350 bar\n    acting: direct\n"
        f"    opening ratio: {opening_ratio}\n    closing ratio: 0.7\n    rated flow: 60 L/min\n"
        "    reference flow: 30 L/min\n"
        f"    adjuster: {screw('50 bar', '20 bar', '80 bar')}\n"
        "  TP2: {kind: test point, where: pilot block, rating: 400 bar}\n"
        "  DV1: {kind: directional valve, where: stand, rating: 315 bar, tank rating: 25 bar,\n"
        "    operated by: lever,\n"
        "    rest position: centre, rated flow: 60 L/min, rated drop: 4 bar,\n"
        "    positions: {centre: [P to T], push: [P to A, B to T], return: [P to B, A to T]}}\n"
        "  CY1: {kind: cylinder, where: bed, rating: 280 bar, bore: 80 mm, rod: 45 mm, stroke: 500 mm,\n"
        "    extending load: 60 kN, retracting load: 10 kN}\n"
    )
    gauges = "".join(
        f"  {gauge}: {{kind: digital gauge, range: 400 bar, rating: 600 bar, resolution: 0.1 bar,\n"
        f"    error: 0.2 bar,\n"
        f"    fitted at: [{point}]}}\n"
        for gauge, point in (("G1", "TP1"), ("G2", "TP2"))
    )
    nets = (
        "  tank: [TK1.S, TK1.T, PU1.S, RV1.T, RV2.T, DV1.T]\n"
        "  pump line: [PU1.P, RV1.P, TP1.P, HV1.A, OR1.A]\n"
        "  pilot line: [OR1.B, RV2.P, TP2.P]\n"
        "  valve: [HV1.B, DV1.P]\n"
        "  line A: [DV1.A, CY1.A]\n"
        "  line B: [DV1.B, CY1.B]\n"
    )
    return text_of(tag="PU-32", name="Unit with a pilot line", parts=parts, gauges=gauges, nets=nets)


def by_hand(opening_ratio: float) -> tuple[float, float, float, float]:
    """p₁, p₂ in bar, and the share of RV2 in RV1's reading and of RV1 in RV2's."""
    low, high = 0.0, 60.0
    for _ in range(80):
        q2 = (low + high) / 2
        p1 = 200 * (0.8 + 0.2 * (60 - q2) / 60)
        p2 = 50 * (opening_ratio + (1 - opening_ratio) * q2 / 30)
        low, high = (q2, high) if 2.5 * math.sqrt(p1 - p2) > q2 else (low, q2)
    a, b, g = 40 / 60, 50 * (1 - opening_ratio) / 30, 2.5 / (2 * math.sqrt(p1 - p2))
    own1, own2 = 0.8 + 0.2 * (60 - q2) / 60, opening_ratio + (1 - opening_ratio) * q2 / 30
    both = 1 + g * (a + b)
    on_first = a * g * own2 / both / (own1 * (1 - a * g / both))
    on_second = b * g * own1 / both / (own2 * (1 - b * g / both))
    return p1, p2, on_first, on_second


def test_hand_figures() -> None:
    assert by_hand(0.95) == pytest.approx((180.92, 49.88, 0.080, 0.0077), rel=0.01)
    assert by_hand(0.80)[3] == pytest.approx(0.031, rel=0.02)


def test_r_low_relief_comes_before_the_high_one(computed: Computed) -> None:
    matter = computed(two_reliefs(0.95))
    p1_bar, p2_bar, _, _ = by_hand(0.95)

    assert_good(matter)
    assert edges(matter) == {("RV2", "RV1", "SHIFTS")}
    assert matter.procedure.order.sequence == ("RV2", "RV1")
    assert matter.procedure.order.ties == ()
    assert moves(state(matter, "RV1")) == moves(state(matter, "RV2")) == {("HV1", "closed")}
    assert state(matter, "RV1").reading_bar == pytest.approx(p1_bar, abs=0.08)  # bends of 0.2 bar
    assert state(matter, "RV2").reading_bar == pytest.approx(p2_bar, abs=0.08)


def test_r_relief_behind_a_throttle_is_no_limit_of_the_pump_line(computed: Computed) -> None:
    # The work needs 60 / 0.95 / 50.27 cm² = 126 bar and more: RV2 at 50 bar isn't under it, it is elsewhere.
    assert refusals(computed(two_reliefs(0.95))) == set()


def test_r_each_shifting_the_other_is_a_cycle(computed: Computed) -> None:
    matter = computed(two_reliefs(0.80))

    assert_refused(matter)
    assert edges(matter) == {("RV2", "RV1", "SHIFTS"), ("RV1", "RV2", "SHIFTS")}
    assert matter.procedure.order.sequence == ()
    assert "Each of RV1, RV2" in said(matter, "order_cycle", "RV1")
