"""Variants of the sample whose LS port is not connected, and of its ratings.

Standby 300 psi (to 500 psi), compensator 2800 psi from 600 psi, RV1 3300 psi. The cylinder's cap end has
78.54 cm²: 100 kN / 0.95 ask for 134 bar there.
"""

import math
from collections.abc import Callable

import pytest
from variant_bench import (
    amount,
    answer,
    assert_good,
    assert_refused,
    finding,
    moves,
    refusals,
    refused_adjuster,
    said,
    state,
    without_valve,
)

from sheets.circuit.faults import FaultKind, every_fault, solve_faults
from sheets.circuit.verdict import Verdict
from sheets.errors import InputError
from sheets.machine.site import Policies
from sheets.pages.compose.matter import Matter
from sheets.pipeline.computing import findings_of_job
from sheets.procedure.answers import NotInUse
from sheets.procedure.case import Case
from sheets.procedure.changes import apply
from sheets.procedure.conditions import Condition
from sheets.procedure.faulted import moved_by_fault
from sheets.wording.findings import say_finding

Refused = Callable[..., Matter]

BAR_OF_PSI = 0.0689475729
FED = "      port not connected: fed          # maker's drawing: joined to the outlet inside the control\n"
COMPENSATOR_LOWEST = "      lowest: 600 psi\n"


def port(said: str) -> tuple[str, str]:
    return FED, f"      port not connected: {said}\n"


# b: what holds the LS port


def test_b_drained_port_keeps_the_pump_at_standby(refused: Refused) -> None:
    # 500 psi at the very most, 34.5 bar: 100 kN need 134 bar, 20 kN on the rod end's 53.9 cm² need 39 bar.
    # Load and port can't both be right. The compensator's range begins at 600 psi: no state shows it.
    matter = refused("glaze_press", port("drained"))

    assert_refused(matter)
    assert isinstance(answer(matter, "PU1.compensator"), NotInUse)
    idle = [one for one in matter.targets.findings if one.code == "load_never_moves"]
    assert [(one.subject, one.data["sense"]) for one in idle] == [("CY1", "extending"), ("CY1", "retracting")]
    assert amount(idle[0], "load") == 100.0
    assert "what holds the LS port" in " ".join(say_finding(matter.speaker, idle[0]))


def test_b_drained_port_hides_a_compensator_that_is_in_use(refused: Refused) -> None:
    # From 400 psi up it does govern under a standby of 500 psi, so it is in use; at 2800 psi it never shows.
    matter = refused("glaze_press", port("drained"), (COMPENSATOR_LOWEST, "      lowest: 400 psi\n"))
    lost = refused_adjuster(matter, "PU1.compensator")

    assert lost.failure.condition is Condition.FOLLOWS
    assert lost.failure.data["governs"] == "PU1.load sensing"
    assert amount(lost, "reading") == pytest.approx(500 * BAR_OF_PSI, abs=0.01)
    assert "load-sensing control of PU1 holds 500 psi" in said(matter, "cannot_be_set", "PU1.compensator")


def test_b_fed_port_takes_the_control_out_of_use(glaze_press: Matter) -> None:
    # Outlet pressure on both sides of its spool: no difference, so nothing to hold.
    found = answer(glaze_press, "PU1.load sensing")

    assert_good(glaze_press)
    assert isinstance(found, NotInUse)
    assert found.by_law
    assert glaze_press.procedure.order.sequence == ("RV1", "PU1.compensator")


def test_b_sealed_port_of_which_the_maker_shows_no_bleed(refused: Refused) -> None:
    # Outlet pressure stays in the port; the compensator is read at deadhead, the control gets no step.
    matter = refused("glaze_press", port("sealed\n      sealed without bleed: yes"))

    assert_good(matter)
    assert isinstance(answer(matter, "PU1.load sensing"), NotInUse)
    assert state(matter, "PU1.compensator").reading_bar == pytest.approx(2800 * BAR_OF_PSI, abs=0.01)


def test_b_sealed_port_that_nobody_looked_at(refused: Refused) -> None:
    # Leakage alone decides: anywhere from standby to compensator. No setting is made, none is "not in use".
    matter = refused("glaze_press", port("sealed"))

    for adjuster in ("PU1.compensator", "PU1.load sensing", "RV1"):
        lost = refused_adjuster(matter, adjuster)
        assert lost.failure.condition is Condition.ESTABLISHED
        assert lost.failure.data["port"] == "PU1.X"
        text = said(matter, "cannot_be_set", adjuster)
        assert "leakage alone decides" in text
        assert "Join the LS line to the outlet" in text


# g: no test point at the outlet


def test_g_test_point_past_a_hand_valve_serves_with_that_valve_open(refused: Refused) -> None:
    # TP1 gone from the pump manifold: TP2 at the valve stand sees the same pressure while HV1 is open, so the
    # line is shut at HV2 instead.
    matter = refused(
        "glaze_press",
        ("  pump line: [PU1.P, RV1.P, TP1.P, BV1.A, HV1.A]", "  pump line: [PU1.P, RV1.P, BV1.A, HV1.A]"),
        ("  line B: [DV1.B, HV3.A]", "  line B: [DV1.B, HV3.A, TP1.P]"),
    )
    assert_good(matter)
    for adjuster in ("RV1", "PU1.compensator"):
        assert ("HV1", "closed") not in moves(state(matter, adjuster))
        assert state(matter, adjuster).gauge.test_point == "TP2"


# n: a spool that leaks


LIGHT = ("    extending load: 100 kN\n", "    extending load: 10 kN\n")


def creep_m_s(pressure_bar: float) -> float:
    """Speed of the cylinder when every land of the closed spool leaks 2 % of 20 gal/min at 75 psi.

    P to A and A to T, P to B and B to T; A takes 6 · 78.54 L/min for each m/s, B gives 6 · 53.91. The force
    balance is p_A · 78.54 = p_B · 53.91 + 10 kN / 0.95 · 10.
    """
    edge = 0.02 * 20 * 3.785411784 / math.sqrt(75 * BAR_OF_PSI)
    cap, rod = math.pi * 10**2 / 4, math.pi * (10**2 - 5.6**2) / 4

    def surplus_n(speed: float) -> float:
        def side(into: float) -> float:
            low, high = 0.0, pressure_bar
            for _ in range(60):
                middle = (low + high) / 2
                over = edge * (math.sqrt(pressure_bar - middle) - math.sqrt(middle)) - into
                low, high = (middle, high) if over > 0 else (low, middle)
            return low

        return side(6 * cap * speed) * cap - side(-6 * rod * speed) * rod - 10 / 0.95 * 100

    low, high = 0.0, 0.1
    for _ in range(60):
        middle = (low + high) / 2
        low, high = (middle, high) if surplus_n(middle) > 0 else (low, middle)
    return low


def test_n_leaking_spool_creeps_and_a_shut_working_line_bars_it(refused: Refused) -> None:
    # Without HV1 the line is shut at the closed centre alone. At 193 bar both sides of a leaking spool come
    # to half: 96.5 bar · (78.54 − 53.91) cm² = 23.8 kN, over 10 / 0.95 kN: the press slide creeps.
    between = (
        "    name: pressure line valve\n    designation: 1-H1.4\n"
        "    where: after the pump manifold\n    rating: 5000 psi\n"
    )
    matter = refused("glaze_press", LIGHT, without_valve("HV1", between))
    case = Case(matter.machine, matter.circuit, matter.targets, Policies())
    (leak,) = every_fault(matter.machine, matter.circuit, kinds=frozenset({FaultKind.SPOOL_LEAKING}))
    (leaking,) = solve_faults(matter.circuit, case.base, [leak])

    assert leaking.moving == {"CY1"}
    at_bar = leaking.pressure_at("DV1.P")
    assert leaking.speeds["CY1"] == pytest.approx(creep_m_s(at_bar), rel=0.01)
    failure = moved_by_fault(case, case.base)
    assert failure is not None
    assert failure.condition is Condition.BARRED
    assert_good(matter)
    barred = state(matter, "PU1.compensator")
    assert moves(barred) & {("HV2", "closed"), ("HV3", "closed")}
    assert moved_by_fault(case, apply(case.base, barred.changes)) is None


def test_n_leaking_spool_does_not_lift_a_heavy_load(refused: Refused) -> None:
    # 23.8 kN against 100 / 0.95 kN: it stays, and only a spool that hangs is left to bar.
    matter = refused("glaze_press")
    case = Case(matter.machine, matter.circuit, matter.targets, Policies())
    (leak,) = every_fault(matter.machine, matter.circuit, kinds=frozenset({FaultKind.SPOOL_LEAKING}))
    (leaking,) = solve_faults(matter.circuit, case.base, [leak])
    assert leaking.moving == set()


# p: the structure is weaker than the setting


def test_p_force_that_the_structure_stands_lies_under_the_compensator(refused: Refused) -> None:
    # 140 kN / 78.54 cm² = 178.3 bar = 2585 psi at the cap end; the windows reach 2860 and 3360 psi.
    matter = refused(
        "glaze_press",
        ("    extending load: 100 kN\n", "    extending load: 100 kN\n    structure force limit: 140 kN\n"),
    )
    assert_refused(matter)
    assert refusals(matter) == {
        ("setting_over_rating", "PU1.compensator"),
        ("setting_over_rating", "RV1"),
    }
    one = finding(matter, "setting_over_rating", "PU1.compensator")
    assert amount(one, "rating") == pytest.approx(140 / (math.pi * 10**2 / 4) * 100)
    text = said(matter, "setting_over_rating", "PU1.compensator")
    assert "the structure at CY1 carries 2585 psi" in text


def test_p_rating_of_the_cylinder_itself_is_not_called_the_structure(refused: Refused) -> None:
    matter = refused(
        "glaze_press",
        ("    rating: 4000 psi                   # the lowest rating\n", "    rating: 2500 psi\n"),
    )
    text = said(matter, "setting_over_rating", "PU1.compensator")
    assert "CY1 carries 2500 psi" in text
    assert "structure" not in text


# w: a check valve between the pump and everything else

CHECK = (
    "  CV1: {kind: check valve, where: pump outlet, rating: 5000 psi, opening: 2 psi,\n"
    "    rated flow: 60 gal/min, rated drop: 8 psi}\n"
)
PUMP_LINE = "  pump line: [PU1.P, RV1.P, TP1.P, BV1.A, HV1.A]\n"
BEHIND = "[CV1.B, RV1.P, TP1.P, BV1.A, HV1.A]\n"


def test_w_line_behind_a_check_valve_keeps_what_the_relief_left(refused: Refused) -> None:
    # With HV1 shut nothing but RV1 lets oil out behind CV1, and RV1 shuts at 0.95 · 3300 = 3135 psi: there G1
    # stays, however far the compensator comes down to its 2800 psi (less what its own flow takes: none).
    matter = refused(
        "glaze_press",
        ("  TP1:\n", CHECK + "  TP1:\n"),
        (PUMP_LINE, f"  pump: [PU1.P, CV1.A]\n  pump line: {BEHIND}"),
    )
    assert matter.procedure.verdict is Verdict.REFUTED
    one = finding(matter, "line_keeps_pressure", "PU1.compensator")
    assert amount(one, "kept") == pytest.approx(3135 * BAR_OF_PSI, abs=0.1)
    assert "from the step before" in said(matter, "line_keeps_pressure", "PU1.compensator")
    assert "run_reads_wrong" not in {found.code for found in findings_of_job(matter)}


def test_w_a_gauge_before_the_check_valve_sees_the_compensator(refused: Refused) -> None:
    matter = refused(
        "glaze_press",
        ("  TP1:\n", CHECK + "  TP9: {kind: test point, where: pump, rating: 6000 psi}\n  TP1:\n"),
        (PUMP_LINE, f"  pump: [PU1.P, TP9.P, CV1.A]\n  pump line: {BEHIND}"),
        ("    fitted at: [TP1, TP2]\n", "    fitted at: [TP9]\n"),
    )
    assert_good(matter)


def test_x_case_drain_of_a_pump_is_never_plugged(refused: Refused) -> None:
    # What the pump leaks inside, 5 L/min and more, has no other way out than through the shaft's seal.
    with pytest.raises(InputError, match="the case bursts"):
        refused(
            "glaze_press",
            ("    kind: variable pump\n", "    kind: variable pump\n    plugged: [L]\n"),
            ("PU1.L, ", ""),
        )
