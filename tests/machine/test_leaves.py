"""Every value of an entry once, with its keys and its unit; what says nothing is left out."""

from __future__ import annotations

from sheets.machine.leaves import leaves
from sheets.machine.loading import parse_machine


def test_values_with_their_keys_and_units(small_text: str) -> None:
    machine = parse_machine(small_text.encode(), "small.yaml")
    found = {leaf.path: (leaf.value, leaf.unit) for leaf in leaves(machine)}

    assert found["parts", "M1", "power"] == (5.5, "kW")
    assert found["parts", "RV1", "adjuster", "setting"] == (
        150.0,
        "bar",
    )  # optional as well
    assert found["parts", "PU1", "volumetric efficiency"] == (0.93, "")
    assert found["parts", "DV1", "positions", "centre"] == (("P to T",), None)
    assert found["parts", "HV1", "rest"] == ("closed", None)
    assert found["dated",] == ("2026-01-31", None)
    assert found["controls", "start", "1", "name"][1] is None
    assert ("parts", "TK1", "designation") not in found
    assert ("parts", "TK1", "plugged") not in found


def test_an_empty_list_that_had_to_be_written_says_something(small_text: str) -> None:
    text = small_text.replace("absent: [accumulator]", "absent: []")
    machine = parse_machine(text.encode(), "small.yaml")

    assert {leaf.path: leaf.value for leaf in leaves(machine)}["absent",] == ()
