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
    moves,
    refused_adjuster,
    said,
    state,
)

from sheets.circuit.solver import solve_one
from sheets.errors import InputError
from sheets.machine.site import Policies
from sheets.pages.compose.matter import Matter
from sheets.pipeline import Described
from sheets.procedure.case import Case
from sheets.procedure.conditions import Condition

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
