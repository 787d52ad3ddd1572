"""What a good machine file becomes, and several problems at once."""

import time
from collections.abc import Callable
from datetime import date

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from sheets.errors import InputError, Problem
from sheets.machine.isolating import refusal
from sheets.machine.loading import MOST_PROBLEMS, parse_machine
from sheets.machine.model import Machine
from sheets.machine.parts import Adjuster, DirectionalValve, FixedPump, ReliefValve, VariablePump

VARIABLE_PUMP = """    kind: variable pump
    compensator:
      lowest: 20 bar
      highest: 200 bar
      raises: clockwise
      where: upper screw
      key: hex 5 mm
    load sensing:
      setting: 20 bar
      given by: drawing 7
      lowest: 10 bar
      highest: 40 bar
      raises: clockwise
      where: lower screw
      key: hex 4 mm
"""


def problems_in(text: str) -> tuple[Problem, ...]:
    with pytest.raises(InputError) as caught:
        parse_machine(text.encode(), "small.yaml")
    return caught.value.problems


@pytest.fixture
def load_sensing_text(small_text: str) -> str:
    text = small_text.replace("    kind: fixed pump\n", VARIABLE_PUMP)
    return text.replace("DV1.T]", "DV1.T, PU1.L]")


def test_values_arrive_in_base_units(small_text: str) -> None:
    machine = parse_machine(small_text.encode(), "small.yaml")
    pump, relief, valve = machine.parts["PU1"], machine.parts["RV1"], machine.parts["DV1"]

    assert machine.dated == date(2026, 1, 31)
    assert isinstance(pump, FixedPump)
    assert (pump.volumetric_efficiency, pump.displacement_cm3, pump.driven_by) == (0.93, 8.0, "M1")
    assert isinstance(relief, ReliefValve)
    # 3000 × 6894.757293168361 Pa; 10 × 3.785411784 L
    assert relief.rating_bar == pytest.approx(206.84271879505083, rel=1e-14)
    assert relief.rated_flow_lpm == pytest.approx(37.85411784, rel=1e-14)
    assert relief.adjusters()["adjuster"].setting_bar == 150.0
    assert isinstance(valve, DirectionalValve)
    assert valve.paths("push") == (("P", "A"), ("B", "T"))
    assert valve.ports == ("P", "T", "A", "B")
    assert machine.parts["CY1"].model_dump()["bore_mm"] == 63.5
    assert machine.units.pressure == ("bar",)


def test_all_problems_at_once_in_the_order_of_lines(small_text: str) -> None:
    text = small_text.replace("voltage: 24 V", "voltage: 24 bar")
    text = text.replace("volume: 60 L", "volumen: 60 L").replace("kind: hand valve", "kind: tap")
    text = text.replace("DV1.B, CY1.B", "DV1.B, CY1.B, XX9.A").replace(
        "    rest: closed", "    rest: closed\n    rest: open"
    )

    found = problems_in(text)

    assert [problem.where.removeprefix("small.yaml, ") for problem in found] == [
        "line 17, TK1, volumen",
        "line 46, HV1, kind",
        "line 50, HV1, rest",
        "line 96, nets, line B, item 3",
        "line 111, Q2, voltage",
    ]


ESCAPE = '"\\e[31m"'


@pytest.mark.parametrize(
    ("good", "bad"),
    [
        ("absent: [accumulator]", f"absent: {ESCAPE}"),
        ("kind: test point", f"kind: {ESCAPE}"),
        ("acting: direct", f"acting: {ESCAPE}"),
        ("volume: 60 L", f"volume: {ESCAPE}"),
        ("volume: 60 L", f"{ESCAPE}: 60 L"),
        ("kind: main switch", f"kind: {ESCAPE}"),
        ("  TP1:", f"  {ESCAPE}:"),
        ("  line A: [DV1.A, CY1.A]", f"  {ESCAPE}: [DV1.A, CY1.A, DV1.B]"),
        ("fitted at: [TP1]", f"fitted at: [{ESCAPE}]"),
        ("centre: [P to T]", f"centre: [{ESCAPE}]"),
    ],
)
def test_no_control_character_reaches_the_screen(small_text: str, good: str, bad: str) -> None:
    for problem in problems_in(small_text.replace(good, bad, 1)):
        assert (problem.where + problem.what + problem.fix).isprintable()


def test_a_flood_of_problems_is_cut(small_text: str) -> None:
    flood = "".join(f"x{number}: 1\n" for number in range(3 * MOST_PROBLEMS))

    found = problems_in(small_text + flood)

    assert len(found) == MOST_PROBLEMS + 1
    assert f"{2 * MOST_PROBLEMS} more" in found[-1].what


@pytest.mark.parametrize(
    ("good", "bad", "where"),
    [
        # a reference that can't be read: its net isn't short, and its port isn't called loose
        ("DV1.B, CY1.B", "DV1.B, CY1-B", "line 95, nets, line B, item 2"),
        # a part whose identifier can't be used: no net could name its ports
        ("  TP1:", "  ../HV2: {kind: test point, where: a, rating: 1 bar}\n  TP1:", "line 72, ../HV2"),
        # the only part of its kind, or the only entry of its section, can't be read
        ("volume: 60 L", "volume: 60 bar", "line 17, TK1, volume"),
        ("power: 5.5 kW", "power: 5.5 kN", "line 21, M1, power"),
        ("rating: 400 bar", "rating: 400 L", "line 75, TP1, rating"),
    ],
)
def test_what_cannot_be_read_brings_no_false_problem(
    small_text: str, good: str, bad: str, where: str
) -> None:
    (problem,) = problems_in(small_text.replace(good, bad, 1))

    assert problem.where == f"small.yaml, {where}"


def test_the_only_supply_cannot_be_read(small_text: str) -> None:
    begin, end = small_text.index("  Q2:"), small_text.index("controls:")
    text = (small_text[:begin] + small_text[end:]).replace("operated by: solenoids", "operated by: lever")
    text = text.replace("    solenoids: {push: Y1}\n", "")
    parse_machine(text.encode(), "small.yaml")

    (problem,) = problems_in(text.replace("voltage: 400 V", "voltage: 400 kW"))

    assert problem.where == "small.yaml, line 98, Q1, voltage"


def test_ports_with_a_plug_need_no_net(small_text: str) -> None:
    text = small_text.replace("  line B: [DV1.B, CY1.B]\n", "")
    for part in ("DV1", "CY1"):
        text = text.replace(f"  {part}:\n", f"  {part}:\n    plugged: [B]\n")

    assert parse_machine(text.encode(), "small.yaml").parts["CY1"].plugged == ("B",)


def test_no_reservoir(small_text: str) -> None:
    text = small_text.replace("  TK1:\n    kind: reservoir\n    where: below\n    volume: 60 L\n", "")
    text = (
        text.replace("TK1.T, ", "").replace("TK1.S, PU1.S", "HV1.B, PU1.S").replace("RV1.T, HV1.B", "RV1.T")
    )

    (problem,) = problems_in(text)

    assert problem.where == "small.yaml, line 13, parts"
    assert "no reservoir" in problem.what


@pytest.mark.parametrize("stated", ["drained", "fed", "sealed"])
def test_load_sensing_port_not_connected(load_sensing_text: str, stated: str) -> None:
    (problem,) = problems_in(load_sensing_text)
    assert problem.where == "small.yaml, line 31, PU1, load sensing, port not connected"
    assert "Port X" in problem.what

    said = load_sensing_text.replace("hex 4 mm", f"hex 4 mm\n      port not connected: {stated}")
    pump = parse_machine(said.encode(), "small.yaml").parts["PU1"]
    assert isinstance(pump, VariablePump)
    assert list(pump.adjusters()) == ["compensator", "load sensing"]
    assert pump.ports == ("S", "P", "L", "X")

    (problem,) = problems_in(said.replace("DV1.B, CY1.B", "DV1.B, CY1.B, PU1.X"))
    assert problem.where == "small.yaml, line 39, PU1, load sensing, port not connected"
    assert "stands in a net" in problem.what


@pytest.mark.parametrize(
    ("lines", "place"),
    [
        ("differential: 15 bar", "differential flow"),
        ("differential flow: 40 L/min", "differential"),
        ("differential: 20 bar\n      differential flow: 40 L/min", "differential"),
    ],
)
def test_differential_that_contradicts(load_sensing_text: str, lines: str, place: str) -> None:
    text = load_sensing_text.replace("hex 4 mm", f"hex 4 mm\n      port not connected: fed\n      {lines}")

    (problem,) = problems_in(text)

    assert problem.where.endswith(f"PU1, load sensing, {place}")


def test_signal_without_a_path(small_text: str) -> None:
    text = small_text.replace(
        "solenoids: {push: Y1}", "solenoids: {push: Y1}\n    signal: {rated flow: 2 L/min, rated drop: 5 bar}"
    ).replace("DV1.B, CY1.B", "DV1.B, CY1.B, DV1.LS")

    (problem,) = problems_in(text)

    assert problem.where == "small.yaml, line 63, DV1, signal"


@pytest.mark.parametrize(
    "kind",
    [
        "push button",
        "selector switch",
        "emergency stop",
        "E-stop",
        "contactor",
        "safe torque off",
        "STO",
        "controller output",
        "solenoid",
        "solenoid valve",
        "check valve",
        "spring-centred spool",
        "directional valve",
    ],
)
def test_control_devices_isolate_nothing(small_text: str, kind: str) -> None:
    (problem,) = problems_in(small_text.replace("kind: main switch", f"kind: {kind}"))

    assert problem.where == "small.yaml, line 103, Q1, isolator, kind"
    assert "isn't an energy isolating device" in problem.what
    assert "main switch" in problem.fix


def test_a_kind_nobody_knows_is_refused_without_a_reason(small_text: str) -> None:
    assert refusal("main swich") is None

    (problem,) = problems_in(small_text.replace("kind: main switch", "kind: main swich"))

    assert "'main swich' isn't known" in problem.what
    assert "Did you mean main switch?" in problem.fix


def test_a_hand_valve_isolates_no_electricity(small_text: str) -> None:
    (problem,) = problems_in(small_text.replace("kind: main switch", "kind: hand valve"))

    assert problem.where == "small.yaml, line 103, Q1, isolator, kind"


def test_values_made_in_the_program_are_held_to_the_same_rules() -> None:
    good = {"lowest_bar": 20.0, "highest_bar": 200.0, "raises": "clockwise", "where": "a", "key": "b"}

    assert Adjuster(**good).setting_bar is None
    for wrong in ({"lowest_bar": 300.0}, {"highest_bar": -1.0}, {"setting_bar": 10.0, "given_by": "c"}):
        with pytest.raises(ValueError, match=r"Write|Correct"):
            Adjuster(**{**good, **wrong})


def _large(text: str, relief_valves: int) -> bytes:
    begin, end = text.index("  RV1:"), text.index("  HV1:")
    block = text[begin:end]
    more = "".join(block.replace("RV1", f"RX{number}") for number in range(relief_valves))
    ports = "".join(f"RX{number}.{{}}, " for number in range(relief_valves))
    text = text[:end] + more + text[end:]
    text = text.replace("RV1.P,", "RV1.P, " + ports.replace("{}", "P"))
    return text.replace("RV1.T,", "RV1.T, " + ports.replace("{}", "T")).encode()


def _seconds(action: Callable[[], Machine]) -> float:
    times = []
    for _ in range(5):
        begin = time.process_time()
        action()
        times.append(time.process_time() - begin)
    return min(times)


def test_time_grows_with_the_parts_and_no_faster(small_text: str) -> None:
    parse_machine(_large(small_text, 1), "warm")
    small, large = _large(small_text, 52), _large(small_text, 52 * 4)
    assert len(parse_machine(small, "small").parts) == 60

    ratio = _seconds(lambda: parse_machine(large, "large")) / _seconds(lambda: parse_machine(small, "small"))

    assert ratio < 10  # 4 if it grows with the parts, 16 if with their square


@settings(max_examples=150, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(data=st.data())
def test_no_damage_to_a_file_brings_anything_but_problems(small_text: str, data: st.DataObject) -> None:
    lines = small_text.splitlines(keepends=True)
    for _ in range(data.draw(st.integers(1, 3))):
        place = data.draw(st.integers(0, len(lines) - 1))
        damage = data.draw(
            st.one_of(
                st.just(""),
                st.text(max_size=20).map(lambda text: text + "\n"),
                st.sampled_from(lines),
                st.sampled_from(
                    ["  - a\n", "kind: []\n", "    kind: {}\n", "nets: 1\n", "  x: [[]]\n", "parts: []\n"]
                ),
            )
        )
        lines[place] = damage
    try:
        parse_machine("".join(lines).encode("utf-8", "surrogatepass"), "small.yaml")
    except InputError as error:
        problems = error.problems
    else:
        return
    assert problems
    for problem in problems:
        assert problem.where.startswith("small.yaml")
        assert problem.what
        assert problem.fix
        assert (problem.where + problem.what + problem.fix).isprintable()
