"""Load-sensing banks of any number of sections, as a normal plant has them."""

from __future__ import annotations

from variant_bench import hand_valve, screw, text_of


def bank_text(sections: int) -> str:
    """One load-sensing pump and so many lever valves, each with a motor behind two lockable hand valves.

    The signals of the sections meet in check valves, so that the highest counts; a small orifice drains what
    is left of them.
    """
    numbers = range(1, sections + 1)
    parts = (
        "  TK1: {kind: reservoir, where: below, volume: 400 L}\n"
        "  M1: {kind: electric motor, where: on the reservoir, power: 55 kW, speed: 1475 rpm}\n"
        "  PU1:\n    kind: variable pump\n    where: on M1\n    driven by: M1\n"
        "    displacement: 71 cm3/rev\n    volumetric efficiency: 0.95\n    overall efficiency: 0.88\n"
        "    rating: 350 bar\n"
        f"    compensator: {screw('176 bar', '40 bar', '240 bar', more='width: 4 bar')}\n"
        f"    load sensing: {screw('27 bar', '12 bar', '34 bar')}\n"
        "  RV1:\n    kind: relief valve\n    where: manifold\n    rating: 400 bar\n"
        "    acting: pilot operated\n    opening ratio: 0.95\n    closing ratio: 0.92\n"
        f"    rated flow: 200 L/min\n    adjuster: {screw('206 bar', '50 bar', '240 bar')}\n"
        "  TP1: {kind: test point, where: manifold, rating: 400 bar}\n"
        + hand_valve("BV1", "bleed of the manifold", flow="20 L/min", rest="closed", drop="50 bar")
        + "  OR1: {kind: orifice, where: LS line at the pump, rating: 315 bar,\n"
        "    rated flow: 0.5 L/min, rated drop: 20 bar}\n"
    )
    nets = (
        f"  tank: [TK1.S, TK1.T, PU1.S, PU1.L, RV1.T, BV1.B, OR1.B, {_ports(numbers, 'DV', 'T')},\n"
        f"    {_ports(numbers, 'HM', 'L')}]\n"
        f"  pressure line: [PU1.P, RV1.P, BV1.A, TP1.P, {_ports(numbers, 'DV', 'P')}]\n"
        f"  load signal: [PU1.X, OR1.A, {_ports(numbers, 'CV', 'B')}]\n"
    )
    for n in numbers:
        parts += (
            f"  DV{n}: {{kind: directional valve, where: stand {n}, rating: 400 bar, tank rating: 210 bar,\n"
            "    operated by: lever, rest position: centre, rated flow: 60 L/min, rated drop: 24 bar,\n"
            "    positions: {centre: [LS to T], out: [P to A, B to T, A to LS],\n"
            "      in: [P to B, A to T, B to LS]},\n"
            "    signal: {rated flow: 2 L/min, rated drop: 5 bar}}\n"
            f"  CV{n}: {{kind: check valve, where: LS line of stand {n}, rating: 400 bar, opening: 0.5 bar,\n"
            "    rated flow: 5 L/min, rated drop: 1 bar}\n"
            f"  HM{n}: {{kind: hydraulic motor, where: stand {n}, rating: 400 bar, tank rating: 5 bar,\n"
            "    displacement: 400 cm3/rev, volumetric efficiency: 0.94, mechanical efficiency: 0.9,\n"
            f"    load torque: {600 - 50 * n} N m}}\n"
            + hand_valve(f"HV{n}A", f"line A of {n}", flow="150 L/min")
            + hand_valve(f"HV{n}B", f"line B of {n}", flow="150 L/min")
        )
        nets += (
            f"  signal {n}: [DV{n}.LS, CV{n}.A]\n"
            f"  line A {n}: [DV{n}.A, HV{n}A.A]\n"
            f"  line B {n}: [DV{n}.B, HV{n}B.A]\n"
            f"  motor A {n}: [HV{n}A.B, HM{n}.A]\n"
            f"  motor B {n}: [HV{n}B.B, HM{n}.B]\n"
        )
    gauges = (
        "  G1: {kind: digital gauge, range: 400 bar, rating: 600 bar, resolution: 0.1 bar, error: 0.2 bar,\n"
        "    fitted at: [TP1]}\n"
    )
    return text_of(tag="PU-50", name="Bank of sections", parts=parts, gauges=gauges, nets=nets)


def _ports(numbers: range, part: str, port: str) -> str:
    return ", ".join(f"{part}{n}.{port}" for n in numbers)
