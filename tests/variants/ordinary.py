"""Complete machines of common kinds with invented details, as a normal plant has them: hand valves, test
points, a check valve and a filter in the pump line, plain test gauges.
"""

from __future__ import annotations

from dataclasses import dataclass

from variant_bench import hand_valve, screw, text_of

GAUGES = """\
  G1: {kind: dial gauge, range: 400 bar, rating: 400 bar, graduation: 2 bar, accuracy class: 0.6,
    fitted at: [TP1, TP2]}
  G2: {kind: digital gauge, range: 600 bar, rating: 600 bar, resolution: 0.1 bar, error: 0.3 bar,
    fitted at: [TP1, TP3]}
"""


@dataclass(frozen=True, kw_only=True)
class Unit:
    """Figures of a unit with one variable pump."""

    name: str
    displacement_cm3: float
    speed_rpm: float
    volumetric_efficiency: float
    power: str
    compensator_bar: float
    relief_bar: float
    load_kn: float
    standby: str = ""
    """More keys of a load-sensing control; none without it."""
    pump: str = ""
    """More keys of the pump."""
    overall_efficiency: float = 0.88
    rating_bar: float = 350.0

    @property
    def displaced_lpm(self) -> float:
        return self.displacement_cm3 * self.speed_rpm / 1000.0

    @property
    def leakage(self) -> float:
        """L/min/bar."""
        return (1.0 - self.volumetric_efficiency) * self.displaced_lpm / self.rating_bar

    @property
    def full_lpm(self) -> float:
        return self.volumetric_efficiency * self.displaced_lpm

    def _compensator(self) -> str:
        return screw(
            f"{self.compensator_bar} bar", "40 bar", f"{self.relief_bar + 20} bar", more="width: 4 bar"
        )

    def text(self) -> str:
        flow = f"{self.displaced_lpm * 1.5:.0f} L/min"
        senses = bool(self.standby)
        control = (
            f"    load sensing: {screw('24 bar', '10 bar', '32 bar', more=self.standby)}\n" if senses else ""
        )
        valve = (
            "operated by: lever, positions: {centre: [LS to T], out: [P to A, B to T, A to LS], "
            "in: [P to B, A to T, B to LS]}, signal: {rated flow: 2 L/min, rated drop: 5 bar}"
            if senses
            else "operated by: lever, positions: {centre: [], out: [P to A, B to T], in: [P to B, A to T]}"
        )
        parts = (
            "  TK1: {kind: reservoir, where: below, volume: 400 L}\n"
            f"  M1: {{kind: electric motor, where: on the reservoir, power: {self.power}, "
            f"speed: {self.speed_rpm} rpm}}\n"
            + hand_valve("HV1", "between reservoir and pump", flow=flow, drop="0.1 bar")
            + "  PU1:\n"
            "    kind: variable pump\n    where: on M1\n    driven by: M1\n"
            f"    displacement: {self.displacement_cm3} cm3/rev\n    rating: {self.rating_bar} bar\n"
            f"    volumetric efficiency: {self.volumetric_efficiency}\n"
            f"    overall efficiency: {self.overall_efficiency}\n{self.pump}"
            f"    compensator: "
            f"{self._compensator()}\n"
            f"{control}"
            "  RV1:\n    kind: relief valve\n    where: pump manifold\n    rating: 400 bar\n"
            "    acting: pilot operated\n    opening ratio: 0.95\n    closing ratio: 0.92\n"
            f"    rated flow: 250 L/min\n"
            f"    adjuster: {screw(f'{self.relief_bar} bar', '50 bar', f'{self.relief_bar + 20} bar')}\n"
            "  TP1: {kind: test point, where: pump manifold, rating: 400 bar}\n"
            f"  CV1: {{kind: check valve, where: pump manifold, rating: 400 bar, opening: 0.5 bar, "
            f"rated flow: {flow}, rated drop: 2 bar}}\n"
            f"  FP1: {{kind: filter, where: pressure line, rating: 400 bar, rated flow: {flow}, "
            f"rated drop: 2 bar}}\n"
            + hand_valve("HV2", "after the pressure filter", flow=flow)
            + hand_valve("BV1", "bleed of the header", flow="10 L/min", rest="closed", drop="100 bar")
            + "  TP2: {kind: test point, where: header, rating: 400 bar}\n"
            "  TP3: {kind: test point, where: line A, rating: 400 bar}\n"
            f"  DV1: {{kind: directional valve, where: stand, rating: 400 bar, tank rating: 210 bar, "
            f"rest position: centre, rated flow: 100 L/min, rated drop: 20 bar, {valve}}}\n"
            + hand_valve("HV4", "line A", flow=flow)
            + hand_valve("HV5", "line B", flow=flow)
            + f"  CY1: {{kind: cylinder, where: bed, rating: 400 bar, bore: 100 mm, rod: 56 mm, "
            f"stroke: 600 mm, extending load: {self.load_kn} kN, retracting load: 10 kN}}\n"
            f"  FR1: {{kind: filter, where: on the reservoir, rating: 25 bar, rated flow: {flow}, "
            f"rated drop: 0.5 bar}}\n"
        )
        nets = (
            "  tank: [TK1.S, TK1.T, HV1.A, PU1.L, RV1.T, BV1.B, FR1.B]\n"
            "  suction: [HV1.B, PU1.S]\n"
            "  pump line: [PU1.P, RV1.P, TP1.P, CV1.A]\n"
            "  filter line: [CV1.B, FP1.A]\n"
            "  before header: [FP1.B, HV2.A]\n"
            "  header: [HV2.B, TP2.P, BV1.A, DV1.P]\n"
            "  return: [DV1.T, FR1.A]\n"
            "  line A: [DV1.A, TP3.P, HV4.A]\n"
            "  line B: [DV1.B, HV5.A]\n"
            "  cylinder A: [HV4.B, CY1.A]\n"
            "  cylinder B: [HV5.B, CY1.B]\n" + ("  load signal: [DV1.LS, PU1.X]\n" if senses else "")
        )
        return text_of(tag="PU-30", name=self.name, parts=parts, gauges=GAUGES, nets=nets)


def fixed_text(*, power: str = "15 kW") -> str:
    """A gear pump whose relief is the working limit, tandem centre."""
    parts = (
        "  TK1: {kind: reservoir, where: below, volume: 130 L}\n"
        f"  M1: {{kind: electric motor, where: on the reservoir, power: {power}, speed: 1450 rpm, "
        "service factor: 1.15}\n"
        + hand_valve("HV1", "between reservoir and pump", flow="90 L/min", drop="0.1 bar")
        + "  PU1: {kind: fixed pump, where: on M1, driven by: M1, displacement: 32 cm3/rev,\n"
        "    rating: 250 bar,\n"
        "    volumetric efficiency: 0.93, overall efficiency: 0.88}\n"
        "  RV1:\n    kind: relief valve\n    where: pump manifold\n    rating: 315 bar\n"
        "    acting: pilot operated\n    opening ratio: 0.93\n    closing ratio: 0.90\n"
        "    rated flow: 100 L/min\n"
        f"    adjuster: {screw('180 bar', '30 bar', '210 bar')}\n"
        "  TP1: {kind: test point, where: pump manifold, rating: 400 bar}\n"
        "  CV1: {kind: check valve, where: pump manifold, rating: 315 bar, opening: 0.5 bar,\n"
        "    rated flow: 60 L/min, rated drop: 2 bar}\n"
        + hand_valve("HV2", "after the check valve", flow="90 L/min")
        + "  DV1: {kind: directional valve, where: stand, rating: 315 bar, tank rating: 210 bar,\n"
        "    rest position: centre,\n"
        "    operated by: lever, positions: {centre: [P to T], out: [P to A, B to T],\n"
        "      in: [P to B, A to T]},\n"
        "    rated flow: 60 L/min, rated drop: 4 bar}\n"
        "  TP2: {kind: test point, where: line A, rating: 400 bar}\n"
        "  TP3: {kind: test point, where: line B, rating: 400 bar}\n"
        "  CY1: {kind: cylinder, where: bed, rating: 250 bar, bore: 80 mm, rod: 45 mm, stroke: 500 mm,\n"
        "    extending load: 60 kN, retracting load: 10 kN}\n"
        "  FR1: {kind: filter, where: on the reservoir, rating: 25 bar,\n"
        "    rated flow: 100 L/min, rated drop: 0.5 bar}\n"
    )
    nets = (
        "  tank: [TK1.S, TK1.T, HV1.A, RV1.T, FR1.B]\n"
        "  suction: [HV1.B, PU1.S]\n"
        "  pump line: [PU1.P, RV1.P, TP1.P, CV1.A]\n"
        "  pressure line: [CV1.B, HV2.A]\n"
        "  valve: [HV2.B, DV1.P]\n"
        "  return: [DV1.T, FR1.A]\n"
        "  line A: [DV1.A, TP2.P, CY1.A]\n"
        "  line B: [DV1.B, TP3.P, CY1.B]\n"
    )
    gauges = (
        "  G1: {kind: dial gauge, range: 250 bar, rating: 300 bar, graduation: 2 bar, accuracy class: 0.6,\n"
        "    fitted at: [TP1]}\n"
    )
    return text_of(tag="PU-31", name="Gear pump unit", parts=parts, gauges=gauges, nets=nets)


COMPENSATED = Unit(
    name="Compensated pump unit",
    displacement_cm3=71,
    speed_rpm=1450,
    volumetric_efficiency=0.95,
    power="37 kW, service factor: 1.15",
    compensator_bar=210,
    relief_bar=235,
    load_kn=110,
)
LOAD_SENSING = Unit(
    name="Load-sensing pump unit",
    displacement_cm3=100,
    speed_rpm=1480,
    volumetric_efficiency=0.94,
    power="75 kW",
    compensator_bar=250,
    relief_bar=280,
    load_kn=140,
    standby="differential: 20 bar, differential flow: 100 L/min",
)
MOBILE = Unit(
    name="Load-sensing pump at a fast drive",
    displacement_cm3=75,
    speed_rpm=2200,
    volumetric_efficiency=0.95,
    power="85 kW",
    compensator_bar=240,
    relief_bar=270,
    load_kn=130,
    standby="differential: 20 bar, differential flow: 100 L/min",
)
TORQUE_LIMITED = Unit(
    name="Torque-limited pump unit",
    displacement_cm3=71,
    speed_rpm=1480,
    volumetric_efficiency=0.95,
    power="30 kW",
    compensator_bar=280,
    relief_bar=310,
    load_kn=150,
    pump="    torque limit: 158.2 N m\n",
)
