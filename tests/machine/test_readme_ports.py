"""The table of ports in README against the models."""

import re
from pathlib import Path
from typing import get_args

from sheets.machine.gauges import AnyGauge
from sheets.machine.parts import Part

WITH_ALL = {"load_sensing": object(), "signal": object(), "has_case_drain": True}
"""What gives a part the ports that not every one of its kind has."""


def table(readme: str) -> dict[str, set[str]]:
    """Ports by kind, as README tells them."""
    told: dict[str, set[str]] = {}
    for row in readme.split("| kind | ports |")[1].split("\n\n")[0].splitlines()[2:]:
        kinds, ports = row.strip("| ").split(" | ")
        for kind in kinds.split(", "):
            assert kind not in told
            told[kind] = set(re.findall(r"\b[A-Z]{1,2}\b", ports))
    return told


def test_readme_tells_the_ports_of_every_kind(root: Path) -> None:
    models = [*get_args(get_args(Part)[0]), *get_args(get_args(AnyGauge)[0])]
    known: dict[str, set[str]] = {}
    for model in models:
        given = {key: value for key, value in WITH_ALL.items() if key in model.model_fields}
        made = model.model_construct(**given)
        ports = made.ports if hasattr(made, "ports") else made.PORTS
        for kind in get_args(model.model_fields["kind"].annotation):
            known[kind] = set(ports)
    assert table((root / "README.md").read_text(encoding="utf-8")) == known
