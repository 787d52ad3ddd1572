"""Starters: what they ask for, and that filling them in is all that is needed."""

from __future__ import annotations

import re
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest
import yaml

from sheets.circuit.verdict import Verdict
from sheets.errors import InputError
from sheets.machine.blanks import BLANK
from sheets.machine.loading import parse_machine
from sheets.machine.starters import find_starter, starters, write_starter
from sheets.pipeline import check, steps

PATTERNS = {"load-sensing": "clay_mixer", "compensated": "glaze_press", "fixed-pump": "kiln_pusher"}
"""Each starter has the parts of a sample; the test fills in that sample's plate values."""
ORDERS = {
    "load-sensing": ("RV1", "PU1.compensator", "PU1.load sensing"),
    "compensated": ("RV1", "PU1.compensator"),
    "fixed-pump": ("RV1",),
}


@pytest.fixture(params=PATTERNS)
def kind(request: pytest.FixtureRequest) -> str:
    return str(request.param)


def plain(text: bytes) -> dict[str, Any]:
    found: dict[str, Any] = yaml.load(text, Loader=yaml.BaseLoader)  # reads texts only
    return found


def filled(starter: Any, sample: Any) -> Any:
    if starter == BLANK:
        return "no" if sample is None else sample  # the sample leaves out that no load is held up
    if isinstance(starter, dict):
        return {key: filled(value, (sample or {}).get(key)) for key, value in starter.items()}
    if isinstance(starter, list):
        return [
            filled(value, sample[place] if isinstance(sample, list) and place < len(sample) else None)
            for place, value in enumerate(starter)
        ]
    return starter


def blank_lines(text: bytes) -> Iterator[tuple[int, str]]:
    for number, line in enumerate(text.decode().splitlines(), start=1):
        match = re.fullmatch(rf"\s*(?:- )?([^:#]+): {BLANK}\s+# (.+)", line)
        if match:
            yield number, match[1]


def test_there_is_a_pattern_for_every_starter() -> None:
    assert {starter.kind for starter in starters()} == set(PATTERNS)
    for starter in starters():
        assert starter.sentence.endswith(".")
        assert b"yaml-language-server: $schema=schemas/machine.schema.json" in starter.text


def test_check_asks_for_every_blank_in_order_and_for_nothing_else(kind: str) -> None:
    text = find_starter(kind).text
    expected = list(blank_lines(text))
    assert len(expected) == text.count(f": {BLANK}".encode()) > 80

    with pytest.raises(InputError) as caught:
        parse_machine(text, "mine.yaml")

    asked = [
        re.fullmatch(r"mine\.yaml, line (\d+), (?:.*, )?([^,]+)", problem.where)
        for problem in caught.value.problems
    ]
    assert [(int(match[1]), match[2]) for match in asked if match] == expected
    for problem in caught.value.problems:
        assert BLANK in problem.fix
        assert "isn't" not in problem.what


def test_the_advice_is_that_of_the_comment() -> None:
    with pytest.raises(InputError) as caught:
        parse_machine(find_starter("fixed-pump").text, "mine.yaml")

    said = {problem.where.split(", ", 2)[-1]: problem.what for problem in caught.value.problems}
    assert said["RV1, rating"] == "Read it off the valve's plate, such as 315 bar."


def test_a_blank_without_its_comment_is_asked_for_with_an_example(small_text: str) -> None:
    text = small_text.replace("rating: 3000 psi", f"rating: {BLANK}").replace(
        "key: hex 5 mm", f"key: {BLANK}"
    )

    with pytest.raises(InputError) as caught:
        parse_machine(text.encode(), "small.yaml")

    assert "RV1, rating" in caught.value.problems[0].where
    assert caught.value.problems[0].what == ("Read it off the machine or its data sheet, such as 210 bar.")


def test_blanks_hide_no_other_flaw(small_text: str) -> None:
    text = small_text.replace("rating: 3000 psi", f"rating: {BLANK}").replace(
        "volume: 60 L", "volume: 60 bar"
    )

    with pytest.raises(InputError) as caught:
        parse_machine(text.encode(), "small.yaml")

    assert ["TK1, volume" in one.where or "RV1, rating" in one.where for one in caught.value.problems] == [
        True,
        True,
    ]


def test_a_filled_starter_gives_an_established_procedure(kind: str, root: Path, tmp_path: Path) -> None:
    sample = plain((root / "sample_machines" / f"{PATTERNS[kind]}.yaml").read_bytes())
    data = filled(plain(find_starter(kind).text), sample)
    file = tmp_path / "mine.yaml"
    file.write_text(yaml.safe_dump(data, sort_keys=False, allow_unicode=True), encoding="utf-8")

    matter = steps(check(file))

    assert matter.targets.refusals == ()
    assert matter.procedure.verdict is Verdict.ESTABLISHED
    assert matter.procedure.order.sequence == ORDERS[kind]


def test_nothing_is_overwritten(tmp_path: Path) -> None:
    file = tmp_path / "mine.yaml"
    write_starter("fixed-pump", file)
    file.write_text("mine", encoding="utf-8")

    with pytest.raises(InputError, match="stands there already"):
        write_starter("compensated", file)
    assert file.read_text(encoding="utf-8") == "mine"
    with pytest.raises(InputError, match="can't be written"):
        write_starter("compensated", tmp_path / "no" / "mine.yaml")


def test_an_unknown_kind() -> None:
    with pytest.raises(InputError, match="Did you mean fixed-pump"):
        find_starter("fixedpump")
