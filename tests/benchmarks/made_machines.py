"""Machines of any size, written as a user writes them: one compensated pump, many like sections."""

from __future__ import annotations

import sys
from pathlib import Path

sys.path.insert(0, str(Path(__file__).parents[1] / "variants"))

from variant_bench import hand_valve, screw, text_of

BASE_PARTS, SECTION_PARTS = 12, 8


def sections_text(count: int, *, compensator_highest_bar: float = 240.0, accuracy_class: float = 0.25) -> str:
    """A machine file with 12 parts and 8 more a section: spool, hand valves, test points, hoses, cylinder."""
    compensator = screw("180 bar", "40 bar", f"{compensator_highest_bar} bar", more="width: 4 bar")
    parts = (
        "  TK1: {kind: reservoir, where: below, volume: 400 L}\n"
        "  M1: {kind: electric motor, where: on the reservoir, power: 55 kW, speed: 1475 rpm}\n"
        + hand_valve("HV1", "between reservoir and pump", flow="200 L/min", drop="0.1 bar")
        + "  PU1:\n    kind: variable pump\n    where: on M1\n    driven by: M1\n"
        "    displacement: 71 cm3/rev\n"
        "    volumetric efficiency: 0.95\n    overall efficiency: 0.88\n    rating: 350 bar\n"
        f"    compensator: {compensator}\n"
        "  RV1:\n    kind: relief valve\n    where: manifold\n    rating: 400 bar\n"
        "    acting: pilot operated\n    opening ratio: 0.95\n    closing ratio: 0.92\n"
        "    rated flow: 200 L/min\n"
        f"    adjuster: {screw('210 bar', '50 bar', '240 bar')}\n"
        "  TP1: {kind: test point, where: manifold, rating: 400 bar}\n"
        "  CV1: {kind: check valve, where: manifold, rating: 400 bar, opening: 0.5 bar,\n"
        "    rated flow: 200 L/min, rated drop: 2 bar}\n"
        "  FP1: {kind: filter, where: pressure line, rating: 400 bar,\n"
        "    rated flow: 200 L/min, rated drop: 2 bar}\n"
        + hand_valve("HV2", "after the pressure filter", flow="200 L/min")
        + hand_valve("BV1", "bleed of the header", flow="10 L/min", rest="closed", drop="100 bar")
        + "  TP2: {kind: test point, where: header, rating: 400 bar}\n"
        "  FR1: {kind: filter, where: on the reservoir, rating: 25 bar,\n"
        "    rated flow: 200 L/min, rated drop: 1 bar}\n"
    )
    nets = (
        "  tank: [TK1.S, TK1.T, HV1.A, PU1.L, RV1.T, BV1.B, FR1.B]\n"
        "  suction: [HV1.B, PU1.S]\n"
        "  pump line: [PU1.P, RV1.P, TP1.P, CV1.A]\n"
        "  filter line: [CV1.B, FP1.A]\n"
        "  before header: [FP1.B, HV2.A]\n"
    )
    numbers = range(1, count + 1)
    nets += f"  header: [HV2.B, TP2.P, BV1.A, {', '.join(f'DV{n}.P' for n in numbers)}]\n"
    nets += f"  return: [FR1.A, {', '.join(f'DV{n}.T' for n in numbers)}]\n"
    for n in numbers:
        parts += (
            f"  DV{n}: {{kind: directional valve, where: stand {n}, rating: 400 bar, tank rating: 210 bar,\n"
            "    operated by: lever, rest position: centre, rated flow: 60 L/min, rated drop: 5 bar,\n"
            "    positions: {centre: [], out: [P to A, B to T], in: [P to B, A to T]}}\n"
            f"  CY{n}: {{kind: cylinder, where: bed {n}, rating: 400 bar, bore: 80 mm, rod: 45 mm,\n"
            "    stroke: 400 mm, extending load: 50 kN, retracting load: 10 kN}\n"
        )
        for side in "AB":
            parts += hand_valve(f"HV{n}{side}", f"line {side} of {n}", flow="100 L/min")
            parts += f"  TP{n}{side}: {{kind: test point, where: line {side} of {n}, rating: 400 bar}}\n"
            parts += f"  H{n}{side}: {{kind: hose, where: line {side} of {n}, rating: 400 bar}}\n"
            nets += (
                f"  line {side} {n}: [DV{n}.{side}, TP{n}{side}.P, HV{n}{side}.A]\n"
                f"  hose {side} {n}: [HV{n}{side}.B, H{n}{side}.A]\n"
                f"  cylinder {side} {n}: [H{n}{side}.B, CY{n}.{side}]\n"
            )
    gauges = (
        "  G1: {kind: dial gauge, range: 400 bar, rating: 400 bar, graduation: 2 bar,\n"
        f"    accuracy class: {accuracy_class}, fitted at: [TP1, TP2]}}\n"
    )
    return text_of(tag="PU-40", name="Unit of many sections", parts=parts, gauges=gauges, nets=nets)
