"""What the work asks of the pump: from states in which every load that the file names really moves.

The bank here has two sections whose neutral drains the load signal of both, so that one lever alone gets half
of its own pressure as signal: with equal edges from A to LS and from the other section's LS to T, LS = A/2.
"""

from __future__ import annotations

from collections.abc import Callable

import pytest

from sheets.machine.screws import screws_of
from sheets.pipeline import Described, targets
from sheets.targets.demand import Work, work_of
from sheets.targets.settings import Origin

Changed = Callable[..., Described]

SECTION = """  DV2:
    kind: directional valve
    where: operator's platform
    rating: 250 bar
    tank rating: 25 bar
    operated by: lever
    rest position: neutral
    positions:
      neutral: [LS to T]
      forward: [P to A, B to T, A to LS]
    rated flow: 20 L/min
    rated drop: 24 bar
    signal:
      rated flow: 2 L/min
      rated drop: 5 bar

  HM2:
    kind: hydraulic motor
    where: feeder gearbox
    rating: 250 bar
    tank rating: 5 bar
    displacement: 160 cm3/rev
    volumetric efficiency: 0.99
    mechanical efficiency: 0.9
    load torque: 91.67 N m
    moves: feeder shaft

  FR1:
"""
GIVEN = "      given by: machine manual, sheet 4\n      tolerance: 4 bar\n"


def bank(changed: Changed, torque_nm: int) -> Described:
    """The mixer with a second section on its load signal, and neither limit given."""
    return changed(
        "clay_mixer",
        (f"      setting: 176 bar\n{GIVEN}", ""),
        (f"      setting: 206 bar\n{GIVEN}", ""),
        ("load torque: 640 N m", f"load torque: {torque_nm} N m"),
        ("  FR1:\n", SECTION),
        ("DV1.P]", "DV1.P, DV2.P]"),
        ("[DV1.LS,", "[DV1.LS, DV2.LS,"),
        ("[DV1.T,", "[DV1.T, DV2.T,"),
        ("HM1.L]", "HM1.L, HM2.L]"),
        (
            "  motor B: [H3.B, HM1.B]\n",
            "  motor B: [H3.B, HM1.B]\n  feeder A: [DV2.A, HM2.A]\n  feeder B: [DV2.B, HM2.B]\n",
        ),
    )


def work(described: Described) -> Work:
    """The demand with both limits at the end of their range and the standby at its target."""
    trial_bar = {id_: screw.adjuster.highest_bar for id_, screw in screws_of(described.machine).items()}
    return work_of(
        described.machine,
        described.circuit,
        trial_bar | {"PU1.load sensing": 27.0},
        frozenset({"PU1.compensator", "RV1"}),
    )


def test_a_load_that_stalls_alone_counts_where_it_moves(changed: Changed) -> None:
    # HM1: 480 N m / 0.9 · 20π / 400 = 83.8 bar; HM2: 91.67 / 0.9 · 20π / 160 = 40 bar. DV1 alone:
    # p = p/2 + 27 at the stall, 54 bar: it stands. Both: A = (p + load)/2, so LS = p/2 + 30.9, and the pump
    # holds p − LS = 27 − 3·q/60 with q = 60·√((p − 83.8)/48) + 20·√((p − 40)/48): p = 109.1 bar. Signals and
    # what HM1 leaks take up to 5 L/min more over DV1, which is up to 2 bar.
    found = work(bank(changed, 480))
    assert found.findings == ()
    (worst, *_) = [demand for demand in found.demands if demand.actuator == "HM1"]
    assert worst.pump_pressure_bar == pytest.approx(109.1 + 1.0, abs=1.5)
    assert {valve for valve, _ in worst.shifted} == {"DV1", "DV2"}
    assert not worst.held_back
    assert found.demands[0].pump_pressure_bar == worst.pump_pressure_bar

    setting = targets(bank(changed, 480)).settings["PU1.compensator"]
    assert setting.origin is Origin.COMPUTED
    assert setting.low_bar == pytest.approx(1.05 * worst.pump_pressure_bar)
    ((_, _, source), _) = setting.derivations[0].inputs
    assert source in {
        f"solver, HM{n} with DV1 at {way} and DV2 at forward" for n in (1, 2) for way in ("mix", "reverse")
    }


def test_a_load_that_only_creeps_alone_counts_where_it_moves(changed: Changed) -> None:
    # HM1: 290 N m is 50.6 bar: under the 54 bar of DV1 alone, where the margin that is left,
    # (27 − 50.6/2)/1.5 = 1.1 bar an edge, gives it 13 of the 55 L/min that it gets with both.
    # With both: LS = p/2 + 22.7, hence p = 91.9 bar, and up to 2 bar more as above.
    found = work(bank(changed, 290))
    alone = [one for one in found.demands if one.actuator == "HM1" and len(one.shifted) == 1]
    assert alone, "it creeps"
    assert max(one.pump_pressure_bar for one in alone) < 54.0
    assert found.demands[0].pump_pressure_bar == pytest.approx(91.9 + 1.0, abs=1.5)


def test_a_load_that_nothing_moves_is_refused(changed: Changed) -> None:
    # Both, HM1 standing: LS = (p + A2)/2 with A2 = (p + 40)/2, and p − LS ≤ 27: p ≤ 148 bar. 900 N m: 157.
    found = targets(bank(changed, 900))
    (finding,) = [one for one in found.refusals if one.code == "load_never_moves"]
    assert finding.subject == "HM1"


def test_a_weight_is_a_load_the_other_way(changed: Changed) -> None:
    # 100 mm bore: 78.5 cm² at 3800 psi, 262 bar, push 206 kN · 0.95; 100 and 120 kN stand.
    light, heavy = (
        changed("glaze_press", ("    retracting load: 20 kN\n", f"    weight: {weight} kN\n"))
        for weight in (20, 120)
    )
    assert "load_never_moves" not in {one.code for one in targets(light).refusals}
    (finding,) = [one for one in targets(heavy).refusals if one.code == "load_never_moves"]
    assert (finding.subject, finding.data["sense"]) == ("CY1", "extending")
    load = finding.data["load"]
    assert not isinstance(load, str)
    assert load.value == pytest.approx(220.0)


def test_one_valve_at_a_time_is_enough_where_nothing_drains_it(changed: Changed) -> None:
    found = work(changed("clay_mixer"))
    assert found.findings == ()
    assert {demand.shifted for demand in found.demands} == {(("DV1", "mix"),), (("DV1", "reverse"),)}
