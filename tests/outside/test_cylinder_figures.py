"""Cylinder forces, sizes and intensification as published, through circuits and through the samples."""

from __future__ import annotations

import pytest
from outside_bench import Published, circuit_of, fixed_pump, running, screw, solved

from sheets.circuit.ratings import swept_by_area
from sheets.machine.parts import Cylinder
from sheets.pages.compose.matter import Matter

TABLE = "a maker's table of cylinders, push force at 160 bar"

# bore in mm, push force at 160 bar, piston area in mm²
PUSH = [
    ("40", "20.1 kN", 1257),
    ("50", "31.4 kN", 1964),
    ("63", "49.9 kN", 3118),
    ("80", "80.4 kN", 5027),
    ("100", "126 kN", 7855),
    ("125", "196 kN", 12272),
    ("160", "322 kN", 20106),
    ("200", "503 kN", 31426),
    ("250", "785 kN", 49087),
    ("320", "1287 kN", 80425),
]


@pytest.mark.parametrize(("bore", "force", "area_mm2"), PUSH)
def test_pressure_for_a_published_push_force(bore: str, force: str, area_mm2: int) -> None:
    """The published force as a load: the line reads 160 bar."""
    pressure = Published(printed="160 bar", source=TABLE, evidence="reported", within=0.003)
    circuit = circuit_of(
        fixed_pump("3.85 in3/rev")
        + f"""
CY1:
  kind: cylinder
  where: table
  rating: 3000 bar
  bore: {bore} mm
  rod: 20 mm
  stroke: 500 mm
  extending load: {force}
  force efficiency: 1
""",
        "tank: [TK1.S, TK1.T, PU1.S, CY1.B]\nline: [PU1.P, CY1.A]",
    )
    solution = solved(circuit, running(circuit))
    assert solution.moving == {"CY1"}
    assert pressure.agrees(solution.pressure_at("PU1.P"), "bar")
    # 6 L/min a m/s for each cm²; the table's areas use π of 3.142 and whole mm²
    assert swept_by_area(bore_mm=float(bore)) / 6.0 * 100.0 == pytest.approx(area_mm2, rel=4e-4)


ISO_3320_BORES = {8, 10, 12, 16, 20, 25, 32, 40, 50, 63, 80, 100, 125, 160, 200, 250, 320, 400, 500}
ISO_3320_RODS = {
    4, 5, 6, 8, 10, 12, 14, 16, 18, 20, 22, 25, 28, 32, 36, 40, 45, 50, 56, 63, 70, 80, 90, 100, 110, 125,
    140, 160, 180, 200, 220, 250, 280, 320, 360,
}  # fmt: skip
"""ISO 3320:2013, lists of bores and rods, from memory."""


def test_sample_cylinders_have_standard_bores_and_rods(kiln_pusher: Matter, glaze_press: Matter) -> None:
    cylinders = [
        part
        for matter in (kiln_pusher, glaze_press)
        for part in matter.machine.parts.values()
        if isinstance(part, Cylinder)
    ]
    assert len(cylinders) == 2
    assert {part.bore_mm for part in cylinders} <= ISO_3320_BORES
    assert {part.rod_mm for part in cylinders} <= ISO_3320_RODS


@pytest.mark.parametrize(
    ("bore_mm", "rod_mm", "nominal"),
    [(100, 70, 2.0), (80, 56, 2.0), (63, 45, 2.0), (80, 45, 1.4), (100, 56, 1.4), (50, 28, 1.4)],
)
def test_nominal_area_ratios(bore_mm: float, rod_mm: float, nominal: float) -> None:
    """ISO 3320:2013, nominal area ratios 1.4 and 2, from memory; actual ones lie within five percent."""
    ratio = swept_by_area(bore_mm=bore_mm) / swept_by_area(bore_mm=bore_mm, rod_mm=rod_mm)
    assert ratio == pytest.approx(nominal, rel=0.05)


def test_blocked_rod_end_doubles_the_pressure_at_two_to_one() -> None:
    """3000 psi at the cap end with the rod end shut and an area ratio of 2 stand against 6000 psi."""
    rod_side = Published(
        printed="6000 psi",
        source="two trade pages on intensification in cylinders: 3000 psi become 6000 psi at 2:1",
        evidence="reported",
        within=0.005,
    )
    circuit = circuit_of(
        fixed_pump("3.85 in3/rev")
        + f"""
RV1:
  kind: relief valve
  where: block
  rating: 3000 bar
  acting: direct
  opening ratio: 0.9
  rated flow: 60 gal/min
  adjuster: {screw()}
CY1:
  kind: cylinder
  where: table
  rating: 3000 bar
  bore: 100 mm
  rod: 70.7107 mm
  stroke: 500 mm
  force efficiency: 1
TP1: {{kind: test point, where: rod end, rating: 3000 bar}}
""",
        "tank: [TK1.S, TK1.T, PU1.S, RV1.T]\nline: [PU1.P, RV1.P, CY1.A]\nrod end: [CY1.B, TP1.P]",
    )
    supply = Published(printed="3000 psi", source=rod_side.source, evidence="reported", within=0.001)
    solution = solved(circuit, running(circuit, RV1=supply.in_base("bar")))
    assert supply.agrees(solution.pressure_at("CY1.A"), "bar")
    assert rod_side.agrees(solution.pressure_at("CY1.B"), "bar")
    assert not solution.moving
