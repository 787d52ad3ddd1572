"""Trapped volumes of two common units, found by hand on paper, and what relieves them."""

import pytest
from netlists import blocked_centre_unit, tandem_unit, unit

from sheets.circuit.model import Circuit
from sheets.energy.trapped import Trapped, find_trapped
from sheets.pages.compose.matter import Matter


def names(circuit: Circuit, nodes: object) -> set[str]:
    return {circuit.nodes[node].name for node in nodes}  # type: ignore[attr-defined]  # any row of numbers


def trapped_at_rest(circuit: Circuit, trapped: Trapped) -> set[str]:
    return names(circuit, [volume.node for volume in trapped.volumes if volume.trapped_at_rest])


def unrelieved(circuit: Circuit, trapped: Trapped) -> set[str]:
    return names(circuit, [volume.node for volume in trapped.without_relief])


def standing(circuit: Circuit, **positions: str) -> dict[str, str]:
    return {**{valve: places[0] for valve, places in circuit.positions.items()}, **positions}


def test_tandem_centre_keeps_the_working_lines() -> None:
    # Pump line, check and pressure line drain through the tandem centre; the centre blocks A and B.
    machine, circuit = tandem_unit()
    trapped = find_trapped(machine, circuit)

    assert trapped_at_rest(circuit, trapped) == {"WA", "WB"}
    assert unrelieved(circuit, trapped) == {"WA", "WB"}  # solenoids are dead once their supply is isolated
    assert trapped.reliefs == ()


def test_lever_relieves_the_working_lines() -> None:
    machine, circuit = tandem_unit(by_lever=True)
    trapped = find_trapped(machine, circuit)

    assert trapped_at_rest(circuit, trapped) == {"WA", "WB"}
    assert unrelieved(circuit, trapped) == set()
    assert {relief.valve for relief in trapped.reliefs} == {"DV1"}
    assert {relief.position for relief in trapped.reliefs} == {"out", "back"}
    assert not any(relief.stays for relief in trapped.reliefs)  # springs bring it back: no lock holds it


def test_isolation_that_traps() -> None:
    # With the isolating valve shut the pump side has only its relief valve, which holds its setting.
    machine, circuit = tandem_unit()
    trapped = find_trapped(machine, circuit, standing(circuit, HV2="closed"))
    assert trapped_at_rest(circuit, trapped) == {"PMP", "PH", "WA", "WB"}


def test_blocked_centre_keeps_every_line() -> None:
    machine, circuit = blocked_centre_unit()
    trapped = find_trapped(machine, circuit)

    assert trapped_at_rest(circuit, trapped) == {"PMP", "PF", "PH", "HDR", "AV", "WA", "BV", "WB"}
    (relief,) = trapped.reliefs
    assert (relief.valve, relief.position, relief.stays) == ("NV1", "open", True)
    assert names(circuit, relief.nodes) == {"PMP", "PF", "PH", "HDR"}
    # Still trapped with every bleed valve open:
    assert unrelieved(circuit, trapped) == {"AV", "WA", "BV", "WB"}


def test_isolating_valve_cuts_the_bleed_valve_off() -> None:
    machine, circuit = blocked_centre_unit()
    trapped = find_trapped(machine, circuit, standing(circuit, HV2="closed"))
    relieved = names(
        circuit, [node for relief in trapped.reliefs if relief.valve == "NV1" for node in relief.nodes]
    )

    assert {"PMP", "PF", "PH"} <= trapped_at_rest(circuit, trapped)
    assert relieved == {"HDR"}


def test_pump_in_its_case_drain_valve() -> None:
    # Case and suction don't keep pressure, unless somebody shuts the case drain.
    machine, circuit = blocked_centre_unit()
    assert "CASE" not in trapped_at_rest(circuit, find_trapped(machine, circuit))
    shut = find_trapped(machine, circuit, standing(circuit, HV3="closed"))
    assert "CASE" in trapped_at_rest(circuit, shut)


def test_where_zero_can_be_verified() -> None:
    machine, circuit = blocked_centre_unit()
    points = {
        circuit.nodes[volume.node].name: volume.test_points
        for volume in find_trapped(machine, circuit).volumes
    }
    assert points["PMP"] == ("TP1",)
    assert points["HDR"] == ("TP2",)
    assert points["WA"] == ("TP3",)
    for line in ("PF", "PH", "AV", "BV"):
        assert points[line] == (), line


def test_check_valve_drains_one_way_only() -> None:
    def with_check(inward: bool) -> set[str]:
        ends = ("CV1.A", "CV1.B") if inward else ("CV1.B", "CV1.A")
        machine, circuit = unit(
            {
                "TK1": {"kind": "reservoir"},
                "M1": {"kind": "electric motor"},
                "PU1": {"kind": "fixed pump"},
                "RV1": {"kind": "relief valve"},
                "CV1": {"kind": "check valve"},
                "CY1": {"kind": "cylinder"},
                "DV1": {
                    "kind": "directional valve",
                    "positions": {"centre": "[P to T, B to T]", "out": "[P to A, B to T]"},
                    "solenoids": {"out": "Y1"},
                },
            },
            {
                "TANK": "TK1.S TK1.T TK1.L PU1.S RV1.T DV1.T",
                "PMP": "PU1.P RV1.P DV1.P " + ends[0],
                "BEHIND": ends[1] + " CY1.A DV1.A",
                "WB": "DV1.B CY1.B",
            },
        )
        return trapped_at_rest(circuit, find_trapped(machine, circuit))

    assert with_check(inward=True) == {"BEHIND"}
    assert with_check(inward=False) == set()


@pytest.mark.parametrize(
    ("name", "kept", "without"),
    [
        # The lever's neutral opens the load signal to tank only; the bleed valve takes the pressure line.
        ("clay_mixer", {"TP1", "TP2", "TP4", "TP5"}, set()),
        # Blocked centre, solenoids: nothing relieves the cylinder's lines.
        ("glaze_press", {"TP1", "TP2", "TP3", "TP4"}, {"TP3", "TP4"}),
        # Tandem centre, lever.
        ("kiln_pusher", {"TP2", "TP3"}, set()),
    ],
)
def test_samples(name: str, kept: set[str], without: set[str], request: pytest.FixtureRequest) -> None:
    matter: Matter = request.getfixturevalue(name)
    trapped = matter.procedure.trapped
    at = matter.circuit.node_of
    keeping = {volume.node for volume in trapped.volumes if volume.trapped_at_rest}
    lost = {volume.node for volume in trapped.without_relief}
    points = [id_ for id_, part in matter.machine.parts.items() if part.kind == "test point"]

    assert {point for point in points if at[f"{point}.P"] in keeping} == kept
    assert {point for point in points if at[f"{point}.P"] in lost} == without
