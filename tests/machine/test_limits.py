"""Limits of pumps and actuators, and a differential in place of a standby, as a user writes them."""

import pytest

from sheets.errors import InputError, Problem
from sheets.machine.loading import parse_machine
from sheets.machine.parts import Cylinder, VariablePump

PUMP = """    kind: variable pump
    displacement stop: 6 cm3/rev
    torque limit: 15 lbf ft
    compensator:
      lowest: 20 bar
      highest: 200 bar
      raises: clockwise
      where: upper screw
      key: hex 5 mm
    load sensing:
      given by: drawing 7
      differential: 18 bar
      differential flow: 8 L/min
      width: 4 bar
      port not connected: sealed
      sealed without bleed: yes
      lowest: 10 bar
      highest: 40 bar
      raises: clockwise
      where: lower screw
      key: hex 4 mm
"""


@pytest.fixture
def text(small_text: str) -> str:
    with_pump = small_text.replace("    kind: fixed pump\n", PUMP).replace("DV1.T]", "DV1.T, PU1.L]")
    return with_pump.replace("    rod: 36 mm\n", "    rod: 36 mm\n    structure force limit: 60 kN\n")


def one_problem(text: str) -> Problem:
    with pytest.raises(InputError) as caught:
        parse_machine(text.encode(), "small.yaml")
    (problem,) = caught.value.problems
    return problem


def test_limits_arrive_in_base_units(text: str) -> None:
    machine = parse_machine(text.encode(), "small.yaml")
    pump, cylinder = machine.parts["PU1"], machine.parts["CY1"]

    assert isinstance(pump, VariablePump)
    assert isinstance(cylinder, Cylinder)
    assert pump.displacement_stop_cm3 == 6.0
    # 15 × 0.3048 m × 4.4482216152605 N
    assert pump.torque_limit_nm == pytest.approx(20.337269, rel=1e-7)
    assert cylinder.structure_force_limit_kn == 60.0
    assert pump.load_sensing is not None
    assert pump.load_sensing.setting_bar is None
    assert (pump.load_sensing.differential_bar, pump.load_sensing.width_bar) == (18.0, 4.0)
    assert pump.load_sensing.sealed_without_bleed is True


@pytest.mark.parametrize(
    ("good", "bad", "place"),
    [
        ("stop: 6 cm3/rev", "stop: 9 cm3/rev", "PU1, displacement stop"),
        ("limit: 15 lbf ft", "limit: 2 N m", "PU1, torque limit"),
        ("limit: 60 kN", "limit: 0 kN", "CY1, structure force limit"),
        ("sealed\n", "drained\n", "PU1, load sensing, sealed without bleed"),
        (
            "      given by: drawing 7\n      differential",
            "      differential",
            "PU1, load sensing, given by",
        ),
    ],
)
def test_limit_that_cannot_be_true(text: str, good: str, bad: str, place: str) -> None:
    assert text.count(good) == 1

    assert one_problem(text.replace(good, bad)).where.endswith(place)


def test_differential_without_a_width_is_read_and_its_source_with_it(text: str) -> None:
    pump = parse_machine(text.replace("      width: 4 bar\n", "").encode(), "small.yaml").parts["PU1"]

    assert isinstance(pump, VariablePump)
    assert pump.load_sensing is not None
    assert pump.load_sensing.given_by == "drawing 7"
