"""The list for the machine: complete, by place, in the machine's units, and with the state of each entry."""

from __future__ import annotations

from collections.abc import Callable

import pytest

from sheets.machine.leaves import Leaf, leaves
from sheets.machine.model import Units
from sheets.pages.compose.matter import Matter
from sheets.pipeline import Described, walkdown
from sheets.wording.plates import plate_value
from sheets.wording.steps import Speaker
from sheets.wording.walk_list import walk_json, walk_lines


def list_of(described: Described) -> list[str]:
    speaker = Speaker(described.machine, described.circuit, described.policies, {})
    return list(walk_lines(speaker, walkdown(described)))


@pytest.mark.parametrize("name", ["clay_mixer", "glaze_press", "kiln_pusher"])
def test_every_plate_value_stands_in_the_list(changed: Callable[..., Described], name: str) -> None:
    described = changed(name)
    machine, text = described.machine, "\n".join(list_of(described))

    for entries in (machine.parts, machine.gauges, machine.energy):
        for id_, entry in entries.items():
            assert f"] {id_} " in text
            for leaf in leaves(entry):
                assert plate_value(leaf, machine.units) in text
    for net, ports in machine.nets.items():
        assert f"] {net}\n      {', '.join(ports)}" in text
    for source in machine.absent:
        assert source in text
    for place in (*machine.controls.start, *machine.controls.emergency_stop):
        assert place.name in text


def test_places_stand_together(changed: Callable[..., Described]) -> None:
    lines = list_of(changed("clay_mixer"))
    start = lines.index("Pressure manifold")
    end = lines.index("", start)

    ids = [line.split("] ")[1].split()[0] for line in lines[start:end] if "] " in line]
    assert ids == ["RV1", "BV1", "TP1", "TP2"]


@pytest.mark.parametrize(
    ("value", "unit", "units", "text"),
    [
        (206.84271879505083, "bar", Units(pressure=("psi",)), "3000 psi"),
        (206.84271879505083, "bar", Units(), "206.84 bar"),
        (0.05, "bar", Units(), "0.05 bar"),
        (37.85411784, "L/min", Units(flow=("gal/min",)), "10 gal/min"),
        (0.93, "", Units(), "0.93"),
        (0.25, "%", Units(), "0.25 %"),
        (True, None, Units(), "yes"),
        ((), None, Units(), "none"),
    ],
)
def test_values_as_on_a_plate(value: object, unit: str | None, units: Units, text: str) -> None:
    assert plate_value(Leaf(path=("a",), value=value, unit=unit), units) == text  # type: ignore[arg-type]  # each kind


def test_nobody_has_compared_anything_yet(any_sample: Matter) -> None:
    state = any_sample.walkdown
    assert state is not None
    data = walk_json(any_sample.speaker, state)

    assert data["complete"] is False
    assert {entry["state"] for entry in data["entries"]} == {"not compared"}  # type: ignore[index,union-attr]  # data


def test_a_gauge_on_a_line_is_in_no_box(changed: Callable[..., Described]) -> None:
    fixed = ("    fitted at: [TP1]\n", ""), ("RV1.P, TP1.P, HV2.A]", "RV1.P, TP1.P, HV2.A, G1.P]")
    lines = list_of(changed("kiln_pusher", *fixed))
    assert "  [ ] G1 dial gauge, fixed on the line “pump line”" in lines
    assert not any("gauge box" in line for line in lines)
    assert any("G1 dial gauge, in the gauge box" in line for line in list_of(changed("kiln_pusher")))
