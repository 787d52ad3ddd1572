"""Variants of the sample with a fixed pump, whose relief is the working limit.

V·n = 32 cm³ · 1450 /min = 46.4 L/min; RV1 stands at 180 bar behind nothing, HV2 shuts the line after it.
"""

from collections.abc import Callable
from dataclasses import replace

import pytest
from variant_bench import (
    amount,
    assert_good,
    assert_refused,
    finding,
    hand_valve,
    moves,
    refusals,
    refused_adjuster,
    said,
    state,
    warnings,
)

from sheets.circuit.solver import solve_one
from sheets.errors import InputError
from sheets.machine.site import Policies
from sheets.pages.compose.matter import Matter
from sheets.pipeline import Described
from sheets.procedure.case import Case
from sheets.procedure.conditions import Condition
from sheets.procedure.faulted import moved_by_fault

Refused = Callable[..., Matter]
Replacements = tuple[tuple[str, str], ...]

INLET_VALVE = """\
  TP1:
    kind: test point
    where: pump manifold, top
    rating: 400 bar

  HV3:
    kind: hand valve
    name: relief inlet valve
    where: before RV1
    rating: 315 bar
    rest: {rest}
    lockable: yes
    rated flow: 80 L/min
    rated drop: 0.5 bar
"""
TEST_POINT = "  TP1:\n    kind: test point\n    where: pump manifold, top\n    rating: 400 bar\n"


def valve_before_the_relief(rest: str) -> tuple[tuple[str, str], ...]:
    return (
        (TEST_POINT, INLET_VALVE.format(rest=rest)),
        (
            "  pump line: [PU1.P, RV1.P, TP1.P, HV2.A]",
            "  pump line: [PU1.P, HV3.A, TP1.P, HV2.A]\n  relief inlet: [HV3.B, RV1.P]",
        ),
    )


# f: a relief behind a hand valve


@pytest.mark.parametrize("rest", ["open", "closed"])
def test_f_relief_behind_a_hand_valve_is_refused_either_way(refused: Refused, rest: str) -> None:
    # With HV2 shut for the setting, HV3 shut by one slip leaves the pump nothing but its own leakage,
    # 0.07 · 46.4 / 250 = 0.013 L/min/bar: 46.4 / 0.013 = 3571 bar. The gauge carries 300.
    matter = refused("kiln_pusher", *valve_before_the_relief(rest))
    lost = refused_adjuster(matter, "RV1")

    assert lost.failure.condition is Condition.SEEN
    assert amount(lost, "over") == pytest.approx(46.4 / (0.07 * 46.4 / 250), rel=1e-3)
    assert "with HV3 closed" in said(matter, "cannot_be_set", "RV1")


def test_f_shut_valve_before_the_relief_leaves_the_pump_unlimited_in_service(refused: Refused) -> None:
    matter = refused("kiln_pusher", *valve_before_the_relief("closed"))
    assert finding(matter, "nothing_limits", "PU1")
    assert "no relief is joined to its outlet" in said(matter, "nothing_limits", "PU1")

    opened = refused("kiln_pusher", *valve_before_the_relief("open"))
    assert all(one.code != "nothing_limits" for one in opened.targets.findings)


# g: no gauge on the line


def test_g_no_test_point_at_the_outlet(refused: Refused) -> None:
    # TP1 stands past HV2, which has to be shut: nothing shows the pump line.
    matter = refused(
        "kiln_pusher",
        ("pump line: [PU1.P, RV1.P, TP1.P, HV2.A]", "pump line: [PU1.P, RV1.P, HV2.A]"),
        ("valve: [H1.B, DV1.P]", "valve: [H1.B, DV1.P, TP1.P]"),
    )
    lost = refused_adjuster(matter, "RV1")

    assert lost.failure.condition is Condition.SEEN
    assert lost.failure.data["line"] == "pump line"
    text = said(matter, "cannot_be_set", "RV1")
    assert "no gauge can be fitted on pump line" in text
    assert "test point on that line" in text


# h and s: no hand valve after the relief


def test_h_open_centre_without_a_hand_valve(refused: Refused, without_hand_valve: Replacements) -> None:
    # At rest the spool passes all of the pump's 46.4 L/min: 4 · (46.4/60)² = 2.4 bar and a little, RV1 is
    # never loaded. With the lever held the carriage runs.
    matter = refused("kiln_pusher", *without_hand_valve)
    lost = refused_adjuster(matter, "RV1")

    assert lost.failure.condition is Condition.STILL
    assert lost.failure.data["part"] == "CY1"
    assert "Add a lockable hand valve between the directional valve and CY1" in said(
        matter, "cannot_be_set", "RV1"
    )
    at_rest = solve_one(matter.circuit, Case(matter.machine, matter.circuit, matter.targets, Policies()).base)
    assert 2.4 < at_rest.pressure_at("RV1.P") < 3.0


def test_s_cylinder_at_its_stop_would_load_the_relief_but_the_file_gives_no_leave(
    refused: Refused, without_hand_valve: Replacements
) -> None:
    # Run out and held there, the cylinder shuts the line: RV1 reads 180.3 bar as with HV2 shut. Nobody says
    # that it may be, so the answer is what to add: a valve, or that leave.
    matter = refused("kiln_pusher", *without_hand_valve)
    base = Case(matter.machine, matter.circuit, matter.targets, Policies()).base
    held = replace(base.moved("DV1", "push"), travel={**base.travel, "CY1": "far stop"})
    there = solve_one(matter.circuit, held)

    assert there.moving == set()
    assert there.pressure_at("RV1.P") == pytest.approx(180.3, abs=0.1)
    assert moves(refused_adjuster(matter, "RV1")) == {("DV1", "push")}
    assert "say so in the file: may run to stop" in said(matter, "cannot_be_set", "RV1")


# k: a coarse gauge


def test_k_gauge_too_coarse(refused: Refused) -> None:
    # Twice the half window of 3.6 bar round 180.3 bar holds 180 alone on divisions of 10 bar.
    matter = refused("kiln_pusher", ("graduation: 2 bar", "graduation: 10 bar"))
    assert amount(refused_adjuster(matter, "RV1"), "graduation") == 10.0


# l: a gauge that one slip over-ranges


def test_l_gauge_that_the_screw_at_its_stop_over_ranges_is_named_with_it(refused: Refused) -> None:
    matter = refused(
        "kiln_pusher", ("range: 250 bar\n    rating: 300 bar", "range: 205 bar\n    rating: 205 bar")
    )
    assert "with RV1 at its stop; it carries 205 bar" in said(matter, "cannot_be_set", "RV1")


# q: another fluid


GLYCOL = "  kind: water-glycol\n  grade: HFC 46\n"
MINERAL = "  kind: mineral oil\n  grade: ISO VG 46\n"


def test_q_water_glycol_needs_its_own_temperature_window(changed: Callable[..., Described]) -> None:
    with pytest.raises(InputError) as caught:
        changed("kiln_pusher", (MINERAL, GLYCOL))
    told = [problem.what for problem in caught.value.problems]
    assert len(told) == 2
    assert all("the policy window is for mineral oil" in line for line in told)


def test_q_water_glycol_with_its_own_window_is_set_like_any_other(refused: Refused) -> None:
    window = "  lowest setting temperature: 35 °C\n  highest setting temperature: 45 °C\n"
    matter = refused("kiln_pusher", (MINERAL, GLYCOL + window))

    assert_good(matter)
    assert moves(state(matter, "RV1")) == {("HV2", "closed")}
    assert "35 °C" in str([matter.speaker.stage(stage, {}) for stage in matter.procedure.stages])


def test_nothing_stands_against_the_sample_itself(kiln_pusher: Matter) -> None:
    assert_good(kiln_pusher)
    with pytest.raises(AssertionError):
        assert_refused(kiln_pusher)


# x: what a reader with bad intent found


def test_x_relief_into_the_line_before_the_return_filter_is_an_ordinary_unit(refused: Refused) -> None:
    # 43 L/min through a filter for 100 L/min at 0.5 bar leave 0.09 bar in the return line: on the rod's
    # 15.9 cm² that is 14 N, and no seal lets go at that. A spool that leaks moves nothing.
    matter = refused(
        "kiln_pusher",
        (
            "  tank: [TK1.S, TK1.T, TK1.L, HV1.A, RV1.T, FR1.B]\n",
            "  tank: [TK1.S, TK1.T, TK1.L, HV1.A, FR1.B]\n",
        ),
        ("  return: [DV1.T, FR1.A]\n", "  return: [DV1.T, RV1.T, FR1.A]\n"),
    )
    assert_good(matter)


def test_x_throttle_behind_the_rod_side_lets_it_pass_its_rating(refused: Refused) -> None:
    # All of RV1's window, 183.6 bar, on 50.27 cm² against 34.36 cm² (80/45): 0.5 bar kept by the seals leaves
    # 268 bar where next to nothing flows out; CY1 carries 250.
    throttle = (
        "  FC1: {kind: flow control, where: line B, rating: 400 bar, rated flow: 1 L/min, "
        "rated drop: 100 bar}\n"
    )
    matter = refused(
        "kiln_pusher",
        ("  FR1:\n", f"{throttle}  FR1:\n"),
        ("  line B: [DV1.B, TP3.P, CY1.B]", "  line B: [DV1.B, FC1.B]\n  rod: [FC1.A, TP3.P, CY1.B]"),
    )
    one = finding(matter, "line_intensified", "rod")
    assert amount(one, "pressure") == pytest.approx(268.0, abs=3.0)
    assert (amount(one, "rating"), one.data["part"]) == (250.0, "CY1")


def test_x_loads_that_the_file_does_not_say(refused: Refused) -> None:
    # With the setting given nothing hangs on them but a check that isn't made; computed from them, it would
    # be 12 bar of losses.
    unsaid = [("    extending load: 60 kN\n", ""), ("    retracting load: 15 kN\n", "")]
    given = refused("kiln_pusher", *unsaid)
    assert ("load_not_given", "CY1") in warnings(given)
    assert refusals(given) == set()
    computed = refused(
        "kiln_pusher", *unsaid, ("      setting: 180 bar\n      given by: machine manual, sheet 2\n", "")
    )
    assert ("load_not_given", "CY1") in refusals(computed)


def test_x_motor_of_a_fan_hangs_on_no_pressure(refused: Refused) -> None:
    fan = (
        "  M2: {kind: electric motor, where: oil cooler, power: 0.75 kW, speed: 1400 rpm, "
        "service factor: 1.0, coasts for: 3 s}\n"
    )
    matter = refused(
        "kiln_pusher", ("  HV1:\n", f"{fan}  HV1:\n"), ("    feeds: [M1]\n", "    feeds: [M1, M2]\n")
    )
    assert_good(matter)
    assert not any(step.subject == "M2" for stage in matter.procedure.stages for step in stage.steps)


def test_x_lever_the_other_way_bursts_a_rod_side_that_is_shut(refused: Refused) -> None:
    # Held in return with line B shut RV1 can be read. In push the rod side would come to
    # (180.3 − 0.5) · 50.27/34.36 = 263 bar, one movement of a hand away; CY1 carries 250.
    matter = refused(
        "kiln_pusher",
        ("  FR1:\n", hand_valve("HV6", "line B", flow="80 L/min") + "  FR1:\n"),
        ("  line B: [DV1.B, TP3.P, CY1.B]", "  line B: [DV1.B, HV6.A]\n  rod: [HV6.B, TP3.P, CY1.B]"),
    )
    case = Case(matter.machine, matter.circuit, matter.targets, Policies())
    failure = moved_by_fault(case, case.base.moved("HV6", "closed").moved("DV1", "return"))
    assert failure is not None
    assert failure.condition is Condition.WITHIN
    assert (failure.data["part"], failure.data["position"]) == ("CY1", "push")
    assert float(failure.data["pressure"].value) == pytest.approx(263.0, abs=1.0)  # type: ignore[union-attr]
