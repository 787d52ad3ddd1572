"""Variants of the load-sensing sample, each with the answer that its figures ask for.

Figures of the sample: V·n = 71 cm³ · 1475 /min = 104.725 L/min; η_v = 0.95 at 280 bar, so 0.018701 L/min leak
for each bar and 99.489 L/min are its full flow; RV1 opens at 0.95 of its setting, which is read at full flow.
"""

import math
from collections.abc import Callable

import pytest
from variant_bench import (
    all_findings,
    amount,
    answer,
    assert_good,
    assert_refused,
    away,
    edges,
    finding,
    moves,
    orders,
    refusals,
    refused_adjuster,
    said,
    state,
    warnings,
    without_valve,
)

from sheets.pages.compose.matter import Matter
from sheets.pipeline import Described, steps
from sheets.procedure.conditions import Condition
from sheets.procedure.steps import StepKind
from sheets.procedure.task import Task, TaskKind
from sheets.targets.settings import Origin

Refused = Callable[..., Matter]

DISPLACED_LPM = 71 * 1475 / 1000
LEAK = 0.05 * DISPLACED_LPM / 280
FULL_LPM = 0.95 * DISPLACED_LPM
RELIEF_BEND_BAR = 0.05
"""A relief of ours opens over a bend of 0.2 bar: a reading at part of the reference flow lies up to this
off."""

SOLENOIDS = (
    (
        "    operated by: lever\n    rest position: neutral             # springs bring the lever back\n",
        "    operated by: solenoids\n    solenoids: {mix: Y1, reverse: Y2}\n    rest position: neutral\n",
    ),
    (
        "controls:\n  start:\n",
        "  Q8:\n    kind: control supply\n    voltage: 24 V\n    feeds: [DV1]\n    isolator:\n"
        "      plate: Q8 CONTROL\n      kind: circuit breaker\n      where: panel H1\n"
        "      action: turn to OFF\n      lock: breaker clip with padlock\n"
        "    verify: a qualified person tests for absence of voltage at terminals 1 and 2\n\n"
        "controls:\n  start:\n",
    ),
)
STANDBY_GIVEN = (
    "      setting: 27 bar                  # standby: LS at tank, no flow\n"
    "      given by: machine manual, sheet 4\n"
    "      tolerance: 1 bar\n"
)
COMPENSATOR_RANGE = "      highest: 230 bar\n      raises: clockwise\n      where: the upper"
RELIEF_GIVEN = (
    "      setting: 206 bar\n      given by: machine manual, sheet 4\n      tolerance: 4 bar\n"
    "      lowest: 50 bar\n      highest: 230 bar\n"
)
PUMP_CASE = "    rating: 280 bar\n    tank rating: 5 bar                 # case\n"


def hose_rated(rating: str) -> tuple[str, str]:
    head = "    where: from pump to pressure manifold\n    rating: "
    return f"{head}280 bar", f"{head}{rating}"


def solve_for(reading: Callable[[float], float], low_bar: float, high_bar: float) -> float:
    """The pressure that is its own reading, by halving; ``reading`` falls with the pressure."""
    for _ in range(60):
        middle_bar = (low_bar + high_bar) / 2
        if reading(middle_bar) > middle_bar:
            low_bar = middle_bar
        else:
            high_bar = middle_bar
    return low_bar


# a: solenoids instead of a lever


def test_a_solenoid_is_held_where_the_lever_was(refused: Refused, clay_mixer: Matter) -> None:
    # What loads the LS line is another hand on the same spool: same states, same order, same readings.
    matter = refused("clay_mixer", *SOLENOIDS)

    assert_good(matter)
    assert matter.procedure.order.sequence == ("RV1", "PU1.compensator", "PU1.load sensing")
    assert edges(matter) == {("RV1", "PU1.compensator", "NEEDS_AWAY")}
    for adjuster in matter.procedure.order.sequence:
        assert moves(state(matter, adjuster)) == moves(state(clay_mixer, adjuster))
        assert state(matter, adjuster).reading_bar == pytest.approx(state(clay_mixer, adjuster).reading_bar)
    assert "Hold solenoid Y1 of mixer lever valve DV1 on." in orders(matter, "RV1")
    assert "Hold the lever" in orders(clay_mixer, "RV1")


# c: the differential is given, the standby isn't


def test_c_standby_follows_from_differential_and_width(refused: Refused) -> None:
    # 24 bar + 5 bar · 60 / 99.489 = 27.015 bar. With ± 1 bar that is 26.015 to 28.015; G2 shows tenths, and
    # a given window is cut inward: 26.1 to 28.0 bar.
    matter = refused(
        "clay_mixer",
        (
            STANDBY_GIVEN,
            "      given by: machine manual, sheet 4\n      width: 5 bar\n      tolerance: 1 bar\n",
        ),
    )
    found = state(matter, "PU1.load sensing")

    assert_good(matter)
    assert (
        warnings(matter) == set()
    )  # the work is looked at with this standby, not with the screw at its stop
    assert matter.targets.settings["PU1.load sensing"].target_bar == pytest.approx(24 + 5 * 60 / FULL_LPM)
    assert found.reading_bar == pytest.approx(27.015, abs=0.005)
    assert (found.gauge.window.low_bar, found.gauge.window.high_bar) == pytest.approx((26.1, 28.0))


NO_WIDTH = (STANDBY_GIVEN, "      given by: machine manual, sheet 4\n      tolerance: 1 bar\n")


def test_c_differential_without_width_needs_its_flow(refused: Refused) -> None:
    # Nobody gave the width, so nobody knows the standby. BV1 passes 20 L/min at 50 bar, 14 at 24 bar: no
    # still way passes 60 L/min.
    matter = refused("clay_mixer", NO_WIDTH)
    lost = refused_adjuster(matter, "PU1.load sensing")

    assert lost.failure.condition is Condition.AT_FLOW
    assert amount(lost, "wanted") == 60.0
    assert abs(amount(lost, "flow")) < 0.1
    assert "standby or the control's width" in said(matter, "cannot_be_set", "PU1.load sensing")


def test_c_differential_is_read_over_a_still_way_to_tank(refused: Refused) -> None:
    # A bleed for 75 L/min at 37.5 bar passes 60 L/min at 37.5 · (60/75)² = 24 bar. Should the spool stick in
    # mix, the pump's 100 L/min come to 37.5 · (100/75)² = 67 bar there. At work the mixer needs 111.7 bar,
    # and would stay; an empty one turns, so its lines are shut.
    matter = refused(
        "clay_mixer",
        NO_WIDTH,
        (
            "    rated flow: 20 L/min\n    rated drop: 50 bar",
            "    rated flow: 75 L/min\n    rated drop: 37.5 bar",
        ),
    )
    found = state(matter, "PU1.load sensing")

    assert_good(matter)
    assert moves(found) == {("BV1", "open"), ("HV1", "closed"), ("HV2", "closed")}
    assert found.reading_bar == pytest.approx(24.0, abs=0.01)
    assert matter.targets.settings["PU1.load sensing"].at_flow_lpm == 60.0


# d: the compensator can't get out of the way


def test_d_compensator_range_that_ends_over_the_relief_but_within_its_width(refused: Refused) -> None:
    # At its stop, 208 bar, the pump holds 206 bar only half way down its width of 4 bar: half of its flow is
    # left for RV1, and the compensator has the larger hand in the reading. RV1 is read at 206 bar at full
    # flow.
    matter = refused("clay_mixer", (COMPENSATOR_RANGE, COMPENSATOR_RANGE.replace("230", "208")))
    lost = refused_adjuster(matter, "RV1")

    assert lost.failure.condition is Condition.FOLLOWS
    assert lost.failure.data["governs"] == "PU1.compensator"
    assert 204.0 < amount(lost, "reading") < 206.0
    text = said(matter, "cannot_be_set", "RV1")
    assert "compensator of PU1 holds" in text
    assert "range must reach past the window" in text


# e: a hose under the relief that the compensator needs


def test_e_computed_relief_over_a_hose_is_refused_with_numbers(refused: Refused) -> None:
    # (180 + 5) / 0.92 = 201.1 bar for the window's bottom, / 0.98 = 205.2 bar, top 209.3 bar; the hose
    # carries 200 bar. The closing ratio stands on the plate: nothing gives way.
    matter = refused(
        "clay_mixer", (RELIEF_GIVEN, "      lowest: 50 bar\n      highest: 230 bar\n"), hose_rated("200 bar")
    )
    setting = matter.targets.settings["RV1"]

    assert_refused(matter)
    assert setting.origin is Origin.COMPUTED
    assert setting.target_bar == pytest.approx(185 / 0.92 / 0.98)
    over = finding(matter, "setting_over_rating", "RV1")
    assert over.data["rated_part"] == "H1"
    assert amount(over, "rating") == 200.0
    assert amount(over, "top") == pytest.approx(185 / 0.92 / 0.98 * 1.02)
    assert "H1 must carry 209 bar" in said(matter, "setting_over_rating", "RV1")


def test_e_computed_relief_comes_down_where_its_closing_ratio_is_policy(refused: Refused) -> None:
    # Policy closes at 0.90: (180 + 5) / 0.90 / 0.98 = 209.8 bar, top 214 bar, over the hose's 210 bar. Half a
    # window below the rating leaves 210 / 1.04 = 201.9 bar, not under 176 + 15 = 191 or 1.1 · 176 = 193.6
    # bar. Its bottom, 197.9 bar, isn't the 205.6 bar that closing asks for: a warning.
    matter = refused(
        "clay_mixer",
        (RELIEF_GIVEN, "      lowest: 50 bar\n      highest: 208 bar\n"),
        ("    closing ratio: 0.92\n", ""),
        hose_rated("210 bar"),
    )

    assert_good(matter)
    assert matter.targets.settings["RV1"].target_bar == pytest.approx(210 / 1.04)
    assert warnings(matter) == {("relief_may_stay_open", "RV1")}
    assert amount(finding(matter, "relief_may_stay_open", "RV1"), "needed") == pytest.approx(185 / 0.9)
    assert state(matter, "RV1").gauge.target_bar == 202.0  # up to a division of G1


def test_e_no_room_left_over_the_compensator(refused: Refused) -> None:
    # 195 / 1.04 = 187.5 bar is under 1.1 · 176 = 193.6 bar, whose window reaches 197.5 bar: over the hose.
    matter = refused(
        "clay_mixer",
        (RELIEF_GIVEN, "      lowest: 50 bar\n      highest: 208 bar\n"),
        ("    closing ratio: 0.92\n", ""),
        hose_rated("195 bar"),
    )
    assert_refused(matter)
    assert matter.targets.settings["RV1"].target_bar == pytest.approx(1.1 * 176)
    assert amount(finding(matter, "setting_over_rating", "RV1"), "top") == pytest.approx(1.1 * 176 * 1.02)


# i: a motor that is too small at full flow


def test_i_motor_too_small_at_full_flow(refused: Refused) -> None:
    # 206.14 bar · 100.87 L/min / 600 / 0.88 = 39.4 kW.
    matter = refused("clay_mixer", ("power: 45 kW", "power: 38 kW"))
    lost = refused_adjuster(matter, "RV1")

    assert lost.failure.condition is Condition.POWERED
    assert amount(lost, "asked") == pytest.approx(206.14 * 100.87 / 600 / 0.88, abs=0.05)
    assert amount(lost, "carries") == 38.0
    assert "displacement stop" in said(matter, "cannot_be_set", "RV1")


STOP_LPM = 60 * 1475 / 1000
WITH_STOP = (PUMP_CASE, f"{PUMP_CASE}    displacement stop: 60 cm3/rev\n")


def at_stop(reference_lpm: float) -> float:
    """p = S·(κ + (1 − κ)·q/q_ref) with q = 88.5 − 0.018701·p."""
    return solve_for(
        lambda p: 206 * (0.95 + 0.05 * (STOP_LPM - LEAK * p) / reference_lpm), low_bar=150, high_bar=250
    )


def test_i_displacement_stop_lets_the_motor_carry_it(refused: Refused) -> None:
    # The stop leaves 60 cm³ · 1475 /min = 88.5 L/min; RV1's reference flow is then 88.5 − 0.018701 · 280 =
    # 83.26 L/min. RV1 passes 84.64 L/min at 206.17 bar: 33.0 kW of 38 kW.
    matter = refused("clay_mixer", ("power: 45 kW", "power: 38 kW"), WITH_STOP)
    found = state(matter, "RV1")
    expected_bar = at_stop(STOP_LPM - LEAK * 280)

    assert_good(matter)
    assert expected_bar == pytest.approx(206.17, abs=0.01)
    assert found.reading_bar == pytest.approx(expected_bar, abs=RELIEF_BEND_BAR)
    assert found.flow_lpm == pytest.approx(STOP_LPM - LEAK * expected_bar, abs=0.02)
    assert expected_bar * found.flow_lpm / 600 / 0.88 == pytest.approx(33.05, abs=0.05)


def test_i_reading_is_converted_where_the_plate_names_the_reference_flow(refused: Refused) -> None:
    # Read at 120 L/min on its plate, RV1 shows 206 · (0.95 + 0.05 · 84.7 / 120) = 202.97 bar at the stop's
    # flow.
    matter = refused(
        "clay_mixer",
        ("power: 45 kW", "power: 38 kW"),
        WITH_STOP,
        ("    rated flow: 200 L/min\n", "    rated flow: 200 L/min\n    reference flow: 120 L/min\n"),
    )
    found = state(matter, "RV1")

    assert_good(matter)
    assert at_stop(120.0) == pytest.approx(202.97, abs=0.01)
    assert found.reading_bar == pytest.approx(at_stop(120.0), abs=RELIEF_BEND_BAR)
    assert matter.targets.settings["RV1"].target_bar == 206.0


# j: a torque limit


def test_j_torque_limit_lowers_the_reading_at_the_relief(refused: Refused) -> None:
    # 160 N·m · 20π · 1475 / 1000 = 14,828 bar·L/min. p = 206 · (0.95 + 0.05 · q/99.489) with
    # q = 14,828/p − 0.018701·p: 202.87 bar at 69.3 L/min, 26.6 kW. Then 30 kW carry it, though full flow
    # would ask for 39.4 kW.
    matter = refused(
        "clay_mixer", ("power: 45 kW", "power: 30 kW"), (PUMP_CASE, f"{PUMP_CASE}    torque limit: 160 N m\n")
    )
    power = 20 * math.pi * 160 * 1475 / 1000
    expected_bar = solve_for(
        lambda p: 206 * (0.95 + 0.05 * (power / p - LEAK * p) / FULL_LPM), low_bar=150, high_bar=250
    )
    found = state(matter, "RV1")

    assert_good(matter)
    assert expected_bar == pytest.approx(202.87, abs=0.01)
    assert found.reading_bar == pytest.approx(expected_bar, abs=RELIEF_BEND_BAR)
    assert found.flow_lpm == pytest.approx(power / expected_bar - LEAK * expected_bar, abs=0.1)
    # Target and window convert together: 202 … 210 bar at the same flow, inward to divisions of 2 bar.
    assert (found.gauge.window.low_bar, found.gauge.window.high_bar) == (200.0, 206.0)
    assert "then by the smallest steps to 203 bar" in orders(matter, "RV1")
    assert matter.targets.settings["RV1"].target_bar == 206.0


# k, l: gauges


def test_k_gauge_too_coarse_for_a_standby(refused: Refused) -> None:
    # 26 to 28 bar is given and is never widened: two divisions of 2 bar lie in it, three are needed.
    matter = refused("clay_mixer", ("    resolution: 0.1 bar\n", "    resolution: 2 bar\n"))
    lost = refused_adjuster(matter, "PU1.load sensing")

    assert lost.failure.condition is Condition.SEEN
    assert amount(lost, "graduation") == 2.0
    assert "too coarse" in said(matter, "cannot_be_set", "PU1.load sensing")


def test_l_gauge_that_one_fault_over_ranges_is_named_with_it(refused: Refused) -> None:
    # A 60 bar gauge for the standby: with the pump's control stuck, RV1 holds 206 bar on the same line.
    matter = refused(
        "clay_mixer",
        ("    fitted at: [TP1, TP2]", "    fitted at: [TP4, TP5]"),
        ("    range: 400 bar\n    rating: 600 bar\n", "    range: 60 bar\n    rating: 60 bar\n"),
    )
    lost = refused_adjuster(matter, "PU1.load sensing")

    assert lost.failure.condition is Condition.SEEN
    assert amount(lost, "most") == 60.0
    assert amount(lost, "over") == pytest.approx(206.14, abs=0.05)
    text = said(matter, "cannot_be_set", "PU1.load sensing")
    assert "G2 would see 206 bar if PU1 fails (control stuck at full stroke); it carries 60 bar" in text


# m: a direction that nobody knows


def test_m_unknown_direction_isnt_moved_out_of_the_way(refused: Refused) -> None:
    matter = refused(
        "clay_mixer",
        (
            "      raises: clockwise\n      where: the upper",
            "      raises: not known\n      where: the upper",
        ),
    )
    lost = refused_adjuster(matter, "RV1")

    assert lost.failure.data["governs"] == "PU1.compensator"
    assert amount(lost, "reading") == pytest.approx(176.0, abs=0.01)
    assert "Find out which way raises it" in said(matter, "cannot_be_set", "RV1")
    assert state(matter, "PU1.compensator").raised == ()


UNKNOWN_RELIEF = (
    "      raises: clockwise\n      where: the hexagon",
    "      raises: not known\n      where: the hexagon",
)


def test_m_unknown_direction_of_the_one_that_is_set_shows_under_the_gauge(refused: Refused) -> None:
    # RV1 stays where it is with the drive off: at its stop, 230 bar, nothing would pass 250 bar.
    matter = refused("clay_mixer", UNKNOWN_RELIEF)
    (stage,) = (stage for stage in matter.procedure.stages if stage.adjuster == "RV1")

    assert_good(matter)
    assert not any(step.kind is StepKind.BACK_OUT for step in stage.steps)
    assert StepKind.TURN_BELOW in [step.kind for step in stage.steps]
    assert "prove it with an eighth of a turn" in orders(matter, "RV1")


def test_m_commissioning_asks_for_the_direction_of_a_limit(changed: Callable[..., Described]) -> None:
    # A limit that nobody knows is backed out before the first start; blindly it could be turned in.
    matter = steps(changed("clay_mixer", UNKNOWN_RELIEF), Task(kind=TaskKind.COMMISSION))

    assert ("direction_not_known", "RV1") in refusals(matter)
    assert "which way raises it isn't known" in said(matter, "direction_not_known", "RV1")


# n: a spool that may stick


def test_n_one_open_working_line_lets_a_stuck_spool_turn_the_motor(refused: Refused) -> None:
    # Standby needs the lever at rest. Should it hang in mix, line A drives and line B drains: HV2 is an open
    # throttle here, HV1 alone still bars. RV1 and compensator hold the lever, so it can't hang elsewhere.
    between = "    designation: 1-H3.3\n    where: line B, at the operator's platform\n    rating: 315 bar\n"
    only_one = refused("clay_mixer", without_valve("HV2", between))

    assert "HV1" in {valve for valve, _ in moves(state(only_one, "RV1"))}
    lost = answer(only_one, "PU1.load sensing")
    assert lost.near_misses[0].failure.condition is Condition.BARRED
    assert lost.near_misses[0].failure.data["part"] == "HM1"
    assert lost.near_misses[0].failure.data["valve"] == "DV1"
    assert "lockable hand valve" in said(only_one, "cannot_be_set", "PU1.load sensing")


# o: a relief smaller than the pump


def test_o_relief_too_small_for_the_pump(refused: Refused) -> None:
    # 0.95 · 104.725 = 99.5 L/min come with the control stuck at full stroke.
    matter = refused("clay_mixer", ("rated flow: 200 L/min", "rated flow: 90 L/min"))

    assert_refused(matter)
    assert refusals(matter) == {("relief_too_small", "RV1")}
    one = finding(matter, "relief_too_small", "RV1")
    assert (amount(one, "rated"), amount(one, "reaching")) == pytest.approx((90.0, FULL_LPM))


def test_nothing_else_is_found_in_the_sample_itself(clay_mixer: Matter) -> None:
    assert all_findings(clay_mixer) == ()
    assert away(state(clay_mixer, "RV1")) == {"PU1.compensator": 230.0}
