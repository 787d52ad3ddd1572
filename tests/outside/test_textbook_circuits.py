"""Worked examples of a fluid power textbook, each as a machine that is read, built and solved.

The source is the textbook *Fluid Power with Applications*, by the number of the example. The figures were
read in the notebooks of its published companion, which rounds on the way: hence half a percent as tolerance.
A figure marked "from memory" follows the notebook's method and was not read in it.
"""

from __future__ import annotations

import pytest
from outside_bench import Evidence, Published, circuit_of, fixed_pump, running, screw, solved

from sheets.circuit.drive_load import drive_loads, hydraulic_power
from sheets.circuit.model import Circuit
from sheets.circuit.solution import Solution
from sheets.quantities import from_unit, parse
from sheets.targets.power import oil_warming_k_per_s

ROUNDED = 0.005
SPEED_20_GPM = "3.85 in3/rev"
"""At 1200 rpm, with 231 in³ to a gallon: 20 gal/min."""
SPOOL = """
  kind: directional valve
  where: block
  rating: 3000 bar
  operated by: lever
  rest position: rest
  rated flow: 1000 gal/min
  rated drop: 0.1 psi
"""
"""So wide that it costs a thousandth of a psi."""


def book(printed: str, example: str, evidence: Evidence = "seen", within: float = ROUNDED) -> Published:
    return Published(
        printed=printed,
        source=f"textbook Fluid Power with Applications, example {example}, companion notebook",
        evidence=evidence,
        within=within,
    )


def psi(value: float) -> float:
    return from_unit(value, "psi")


def orifice(flow: str, drop: str) -> str:
    return f"\nOR1: {{kind: orifice, where: line, rating: 3000 bar, rated flow: {flow}, rated drop: {drop}}}"


def relieved(displacement: str, *, opening_ratio: str = "0.999") -> Circuit:
    """A fixed pump whose whole flow goes over a relief that is read at 20 gal/min."""
    return circuit_of(
        fixed_pump(displacement)
        + f"""
RV1:
  kind: relief valve
  where: block
  rating: 3000 bar
  acting: direct
  opening ratio: {opening_ratio}
  reference flow: 20 gal/min
  rated flow: 60 gal/min
  adjuster: {screw()}
""",
        "tank: [TK1.S, TK1.T, PU1.S, RV1.T]\nline: [PU1.P, RV1.P]",
    )


def power_kw(circuit: Circuit, solution: Solution) -> float:
    return drive_loads(circuit, solution)["M1"].hydraulic_kw


def test_power_of_a_relief_that_passes_the_whole_flow() -> None:
    circuit = relieved(SPEED_20_GPM)
    solution = solved(circuit, running(circuit, RV1=psi(1000)))
    assert book("1000 psi", "8.2").agrees(solution.pressure_at("PU1.P"), "bar")
    assert book("11.7 hp", "8.2").agrees(power_kw(circuit, solution), "kW")


def test_power_of_an_unloaded_pump() -> None:
    spool = SPOOL.replace("1000 gal/min", "20 gal/min").replace("0.1 psi", "25 psi")
    circuit = circuit_of(
        fixed_pump(SPEED_20_GPM)
        + f"\nDV1:{spool}  positions: {{rest: [P to T], out: [P to A, B to T]}}\n  plugged: [A, B]",
        "tank: [TK1.S, TK1.T, PU1.S, DV1.T]\nline: [PU1.P, DV1.P]",
    )
    solution = solved(circuit, running(circuit))
    assert book("0.29 hp", "8.3", within=0.02).agrees(power_kw(circuit, solution), "kW")  # two digits printed


def test_relief_cracks_below_its_full_flow_pressure() -> None:
    """Spring of 2500 lb/in, 0.20 in preload, 0.10 in more at full flow, 0.75 in² poppet."""
    full, cracking = book("1000 psi", "8.1"), book("667 psi", "8.1")
    ratio = str(round(cracking.in_base("bar") / full.in_base("bar"), 6))
    at_full = relieved(SPEED_20_GPM, opening_ratio=ratio)
    trickle = relieved("0.00385 in3/rev", opening_ratio=ratio)
    assert full.agrees(solved(at_full, running(at_full, RV1=psi(1000))).pressure_at("PU1.P"), "bar")
    assert cracking.agrees(solved(trickle, running(trickle, RV1=psi(1000))).pressure_at("PU1.P"), "bar")


@pytest.mark.parametrize(
    ("flow", "compensated", "power"),
    [
        ("20 gal/min", False, book("14.0 hp", "5.5")),
        ("0.7 gal/min", True, book("0.49 hp", "5.5", within=0.02)),  # two digits printed
    ],
)
def test_compensated_pump_saves_power_when_the_flow_is_stopped(
    flow: str, compensated: bool, power: Published
) -> None:
    """At 1200 psi a fixed pump sends 20 gal/min over its relief; a compensated one makes up leakage."""
    if compensated:
        circuit = circuit_of(
            fixed_pump(SPEED_20_GPM, kind="variable pump", compensator=screw(width="4 bar"))
            + orifice(flow, "1200 psi"),
            "tank: [TK1.S, TK1.T, PU1.S, PU1.L, OR1.B]\nline: [PU1.P, OR1.A]",
        )
        state = running(circuit, PU1__compensator=psi(1200))
    else:
        circuit = relieved(SPEED_20_GPM)
        state = running(circuit, RV1=psi(1200))
    solution = solved(circuit, state)
    assert power.agrees(power_kw(circuit, solution), "kW")
    assert book(flow, "5.5").agrees(solution.flows_lpm["PU1"], "L/min")


@pytest.mark.parametrize(
    ("displacement", "theoretical", "actual", "pressure", "volumetric", "overall", "torque"),
    [
        (
            "5 in3/rev", book("21.6 gal/min", "5.8"), "20 gal/min", "1000 psi", "0.924", "0.816",
            book("900 lbf in", "5.8"),
        ),
        (
            "100 cm3/rev", book("100 L/min", "5.9"), "0.0015 m3/s", "70 bar", "0.900", "0.836",
            book("120 N m", "5.9"),
        ),
    ],
)  # fmt: skip
def test_pump_flow_and_shaft_power_by_its_efficiencies(
    displacement: str,
    theoretical: Published,
    actual: str,
    pressure: str,
    volumetric: str,
    overall: str,
    torque: Published,
) -> None:
    """1000 rpm. Our shaft power is compared with the torque that the book was given at that speed."""
    circuit = circuit_of(
        fixed_pump(
            displacement,
            rating=pressure,
            **{"volumetric efficiency": volumetric, "overall efficiency": overall},
        )
        + orifice(actual, pressure),
        "tank: [TK1.S, TK1.T, PU1.S, OR1.B]\nline: [PU1.P, OR1.A]",
        speed="1000 rpm",
    )
    solution = solved(circuit, running(circuit))
    assert theoretical.agrees(float(circuit.pumps.displaced_lpm[0]), "L/min")
    assert solution.flows_lpm["PU1"] == pytest.approx(parse(actual, unit="L/min"), rel=ROUNDED)
    rad_per_s = 104.7198  # 1000 rpm
    shaft_kw = drive_loads(circuit, solution)["M1"].shaft_kw
    assert torque.agrees(shaft_kw / rad_per_s * 1000.0, "N·m")


def driven_cylinder(bore: str, rod: str, load: str, positions: str) -> Circuit:
    return circuit_of(
        fixed_pump(SPEED_20_GPM)
        + f"""
DV1:{SPOOL}  positions: {positions}
CY1:
  kind: cylinder
  where: table
  rating: 3000 bar
  bore: {bore}
  rod: {rod}
  stroke: 500 mm
  {load}
  force efficiency: 1
""",
        "tank: [TK1.S, TK1.T, PU1.S, DV1.T]\nline: [PU1.P, DV1.P]\na: [DV1.A, CY1.A]\nb: [DV1.B, CY1.B]",
    )


@pytest.mark.parametrize(
    ("position", "pressure", "speed", "power"),
    [
        ("out", book("318 psi", "6.1"), book("2.05 ft/s", "6.1"), book("3.72 hp", "6.1", "from memory")),
        (
            "in",
            book("425 psi", "6.1", "from memory"),
            book("2.73 ft/s", "6.1", "from memory"),
            book("4.96 hp", "6.1", "from memory"),
        ),
    ],
)
def test_cylinder_both_ways(position: str, pressure: Published, speed: Published, power: Published) -> None:
    """2 in bore, 1 in rod, 20 gal/min, 1000 lb both ways."""
    circuit = driven_cylinder(
        "2 in",
        "1 in",
        "extending load: 1000 lbf\n  retracting load: 1000 lbf",
        "{rest: [P to T], out: [P to A, B to T], in: [P to B, A to T]}",
    )
    solution = solved(circuit, running(circuit, positions={"DV1": position}))
    assert pressure.agrees(solution.pressure_at("PU1.P"), "bar")
    assert speed.agrees_in_metres(abs(solution.speeds["CY1"]))
    assert power.agrees(power_kw(circuit, solution), "kW")


@pytest.mark.parametrize(
    ("position", "speed", "load", "power"),
    [
        ("regenerating", book("11.0 in/s", "9.1"), "extending load: 7000 lbf", book("11.7 hp", "9.1")),
        ("in", book("4.28 in/s", "9.1"), "retracting load: 18000 lbf", book("11.7 hp", "9.1")),
    ],
)
def test_regenerative_circuit(position: str, speed: Published, load: str, power: Published) -> None:
    """Piston 25 in², rod 7 in², 20 gal/min: either load asks for 1000 psi."""
    circuit = driven_cylinder(
        "5.64190 in",
        "2.98541 in",
        load,
        "{rest: [P to T], regenerating: [P to A, P to B], in: [P to B, A to T]}",
    )
    solution = solved(circuit, running(circuit, positions={"DV1": position}))
    assert book("1000 psi", "9.1").agrees(solution.pressure_at("PU1.P"), "bar")
    assert speed.agrees_in_metres(abs(solution.speeds["CY1"]))
    assert power.agrees(power_kw(circuit, solution), "kW")


def test_hydraulic_motor_speed_and_pressure_from_its_torque() -> None:
    """5 in³, 10 gal/min, 1000 psi. The flow was inferred from the results; it is not in the notebook."""
    circuit = circuit_of(
        fixed_pump("1.925 in3/rev")
        + """
HM1:
  kind: hydraulic motor
  where: gearbox
  rating: 3000 bar
  displacement: 5 in3/rev
  volumetric efficiency: 1
  mechanical efficiency: 1
  load torque: 795 lbf in
""",
        "tank: [TK1.S, TK1.T, PU1.S, HM1.B, HM1.L]\nline: [PU1.P, HM1.A]",
    )
    solution = solved(circuit, running(circuit))
    assert book("462 rpm", "7.2").agrees(solution.speeds["HM1"], "rpm")
    assert book("1000 psi", "7.2").agrees(solution.pressure_at("PU1.P"), "bar")
    assert book("5.83 hp", "7.2").agrees(power_kw(circuit, solution), "kW")


@pytest.mark.parametrize(
    ("flow_at_unit_drop", "unit_drop", "displacement", "drop"),
    [
        # Cv 2.37: gal/min of water at 1 psi, so 2.37/√0.9 of this oil
        ("2.4982 gal/min", "1 psi", "4.8125 in3/rev", book("100 psi", "8.5")),
        # 3.43 with L/min and kPa: 3.43/√0.9
        ("3.6155 L/min", "1 kPa", "79 cm3/rev", book("687 kPa", "8.5")),
    ],
)
def test_drop_over_a_valve_from_its_flow_coefficient(
    flow_at_unit_drop: str, unit_drop: str, displacement: str, drop: Published
) -> None:
    """Density 0.9: 25 gal/min, and 94.8 L/min, through valves known by their flow at a unit of drop."""
    circuit = circuit_of(
        fixed_pump(displacement)
        + f"""
FC1:
  kind: flow control
  where: line
  rating: 3000 bar
  rated flow: {flow_at_unit_drop}
  rated drop: {unit_drop}
""",
        "tank: [TK1.S, TK1.T, PU1.S, FC1.B]\nline: [PU1.P, FC1.A]",
    )
    assert drop.agrees(solved(circuit, running(circuit)).pressure_at("PU1.P"), "bar")


def test_metered_cylinder_under_a_relief() -> None:
    """Cv 1 in the line to a 2 in cylinder with 4000 lb, relief at 1400 psi, density 0.9."""
    circuit = circuit_of(
        fixed_pump(SPEED_20_GPM)
        + f"""
RV1:
  kind: relief valve
  where: block
  rating: 3000 bar
  acting: direct
  opening ratio: 0.999
  rated flow: 60 gal/min
  adjuster: {screw()}
FC1: {{kind: flow control, where: line, rating: 3000 bar, rated flow: 1.0541 gal/min, rated drop: 1 psi}}
CY1:
  kind: cylinder
  where: table
  rating: 3000 bar
  bore: 2 in
  rod: 1 in
  stroke: 500 mm
  extending load: 4000 lbf
  force efficiency: 1
""",
        "tank: [TK1.S, TK1.T, PU1.S, RV1.T, CY1.B]\nline: [PU1.P, RV1.P, FC1.A]\ncap: [FC1.B, CY1.A]",
    )
    solution = solved(circuit, running(circuit, RV1=psi(1400)))
    speed = book("14.5 in/s", "9.4", within=0.01)  # the drop is a small difference of large pressures
    assert speed.agrees_in_metres(solution.speeds["CY1"])


@pytest.mark.parametrize(
    ("pressure", "flow", "before", "after", "within"),
    [
        # the oil of the example holds 4 % less heat a litre than ours, so it warms by that much more
        ("1000 psi", "10 gal/min", "120 °F", book("127.9 °F", "11.2"), 0.05),
        ("70 bar", "0.000632 m3/s", "50 °C", book("54.3 °C", "11.3"), 0.02),
    ],
)
def test_oil_warms_as_it_passes_a_relief(
    pressure: str, flow: str, before: str, after: Published, within: float
) -> None:
    """What passes in a second is warmed by that second's power."""
    flow_lpm = parse(flow, unit="L/min")
    rise_k = oil_warming_k_per_s(
        power_kw=hydraulic_power(pressure_bar=parse(pressure, unit="bar"), flow_lpm=flow_lpm),
        volume_l=flow_lpm / 60.0,
    )
    assert rise_k == pytest.approx(after.in_base("°C") - parse(before, unit="°C"), rel=within)
