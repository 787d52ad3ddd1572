"""The schemas in schemas/ are those of the models, and say of a file what the reader says."""

import json
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest
from jsonschema import Draft202012Validator

from sheets.machine.loading import parse_machine, parse_site
from sheets.machine.reading import read_text
from sheets.machine.schema import SCHEMAS, schema_text
from sheets.resources import resource_folder

SAMPLES = sorted((Path(__file__).parents[2] / "sample_machines").glob("*.yaml"))


def schema_of(name: str) -> Any:
    return json.loads((resource_folder("schemas") / name).read_text(encoding="utf-8"))


@pytest.mark.parametrize("name", SCHEMAS)
def test_schema_is_fresh(name: str) -> None:
    written = (resource_folder("schemas") / name).read_text(encoding="utf-8")

    assert written == schema_text(SCHEMAS[name]), "write it anew: python -m sheets.machine.schema"
    Draft202012Validator.check_schema(json.loads(written))


@pytest.mark.parametrize("path", SAMPLES, ids=lambda path: path.name)
def test_samples_hold_to_the_schema_and_are_read(path: Path) -> None:
    site = path.name.startswith("site")
    (parse_site if site else parse_machine)(path.read_bytes(), path.name)

    schema = schema_of("site.schema.json" if site else "machine.schema.json")
    assert not list(Draft202012Validator(schema).iter_errors(read_text(path.read_bytes(), path.name).data))


@pytest.mark.parametrize(
    ("good", "bad"),
    [
        ("rating: 400 bar", "rating: 400"),
        ("rating: 400 bar", "ratings: 400 bar"),
        ("kind: test point", "kind: tap"),
        ("tag: T-01", "tag: ../T"),
        ("dated: 2026-01-31", "dated: yesterday"),
        ("  TP1:", "  ../TP1:"),
        ("absent: [accumulator]", "absent: accumulator"),
        ("kind: main switch", "kind: push button"),
        ("lockable: yes", "lockable: maybe"),
        ("area: Bench\n", ""),
    ],
)
def test_schema_refuses_what_it_can_see(small_text: str, good: str, bad: str) -> None:
    validator = Draft202012Validator(schema_of("machine.schema.json"))
    assert validator.is_valid(read_text(small_text.encode(), "x").data)

    assert not validator.is_valid(read_text(small_text.replace(good, bad, 1).encode(), "x").data)


def _properties(schema: Any) -> Iterator[tuple[str, Any]]:
    for group in (schema, *schema["$defs"].values()):
        yield from group["properties"].items()


@pytest.mark.parametrize("name", SCHEMAS)
def test_every_key_is_described(name: str) -> None:
    undescribed = {key for key, said in _properties(schema_of(name)) if not said.get("description")}

    assert undescribed <= {"kind"}  # its allowed word says it
